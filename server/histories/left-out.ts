import type { LeftOut, Unaccounted } from "../../shared/acoustics/types";
import type { HistoryStretch } from "../../shared/schemas/history";

/** What a run's revision says of the time that is left out of its history. */
export interface StoredLeftOut {
  how: Unaccounted["how"];
  /** Where it was quiet, dB. */
  levelDb: number | null;
  /** What counts of the history, minutes. */
  countedMin: number;
  /** ISO instants. */
  spans: [from: string, to: string][];
}

/** Null where nothing is left out. */
export function storedLeftOut(
  stretches: readonly HistoryStretch[],
  { startsAt, countedMin }: { startsAt: string; countedMin: number },
  unaccounted: Unaccounted,
): StoredLeftOut | null {
  const startMs = Date.parse(startsAt);
  const instant = (seconds: number) => new Date(startMs + seconds * 1000).toISOString();
  const spans = stretches.flatMap(({ kind, fromS, toS }): StoredLeftOut["spans"] =>
    kind === "left-out" ? [[instant(fromS), instant(toS)]] : [],
  );
  if (spans.length === 0) return null;
  const levelDb = unaccounted.how === "quiet" ? unaccounted.levelDb : null;
  return { how: unaccounted.how, levelDb, countedMin, spans };
}

/** What of it lies within a shift, by milliseconds; all of it where no shift is known. Undefined: nothing. */
export function leftOutIn(
  { how, levelDb, spans }: StoredLeftOut,
  shift: { fromMs: number; toMs: number } | null,
): LeftOut | undefined {
  const { fromMs, toMs } = shift ?? {
    fromMs: Number.NEGATIVE_INFINITY,
    toMs: Number.POSITIVE_INFINITY,
  };
  let sumMs = 0;
  for (const [from, to] of spans)
    sumMs += Math.max(0, Math.min(Date.parse(to), toMs) - Math.max(Date.parse(from), fromMs));
  if (sumMs === 0) return undefined;
  const minutes = sumMs / 60_000;
  return how === "quiet" ? { how, levelDb: levelDb ?? 0, minutes } : { how, minutes };
}
