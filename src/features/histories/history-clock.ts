import { parseTime } from "../../../shared/format/date";
import { addDays, atLocalTime, localDate, localTime } from "../../../shared/time/zone";
import type { Span } from "./history-span";

/** Where the clock of a history's site stands at its seconds. */
export interface HistoryClock {
  readonly startMs: number;
  readonly lengthS: number;
  readonly timeZone: string;
}

const STEPS_S = [
  1, 2, 5, 10, 15, 30, 60, 120, 300, 600, 900, 1800, 3600, 7200, 10_800, 14_400, 21_600,
] as const;
const QUARTER_S = 900;

const instantAt = ({ startMs }: HistoryClock, atS: number) => new Date(startMs + atS * 1000);

/** "07:12", or "07:12:30" where asked, by the site's clock. */
export function clockText(clock: HistoryClock, atS: number, withSeconds = false): string {
  const instant = instantAt(clock, atS);
  const text = localTime(instant, clock.timeZone);
  return withSeconds ? `${text}:${instant.toISOString().slice(17, 19)}` : text;
}

/** As a person types it back: with its seconds only where there are some. */
export const editClock = (clock: HistoryClock, atS: number): string =>
  clockText(clock, atS, instantAt(clock, atS).getUTCSeconds() !== 0);

function localSeconds(instant: Date, timeZone: string): number {
  const [hours = 0, minutes = 0] = localTime(instant, timeZone).split(":").map(Number);
  return hours * 3600 + minutes * 60 + instant.getUTCSeconds();
}

export interface ClockTick {
  readonly atS: number;
  readonly text: string;
}

/** Round times of the site's clock in a span, as many as have room. On the night of a change, as the clock showed them. */
export function clockTicks(clock: HistoryClock, span: Span, most: number): ClockTick[] {
  const size = span.toS - span.fromS;
  const stepS = STEPS_S.find((step) => size / step <= most) ?? 21_600;
  // Every change of a clock lies on a quarter of an hour, so that larger steps are looked for among the quarters.
  const walkMs = Math.min(stepS, QUARTER_S) * 1000;
  const ticks: ClockTick[] = [];
  const lastMs = clock.startMs + span.toS * 1000;
  let atMs = Math.ceil((clock.startMs + span.fromS * 1000) / walkMs) * walkMs;
  for (; atMs <= lastMs; atMs += walkMs) {
    if (localSeconds(new Date(atMs), clock.timeZone) % stepS !== 0) continue;
    const atS = (atMs - clock.startMs) / 1000;
    ticks.push({ atS, text: clockText(clock, atS, stepS < 60) });
  }
  return ticks;
}

export interface ClockChange {
  readonly atS: number;
  /** Above 0 where the clock was set forward. */
  readonly byMin: number;
}

/** Where the site's clock was set during a history. */
export function clockChanges(clock: HistoryClock): ClockChange[] {
  const changes: ClockChange[] = [];
  const stepMs = QUARTER_S * 1000;
  const endMs = clock.startMs + clock.lengthS * 1000;
  const offsetMin = (ms: number) => {
    const shown = localSeconds(new Date(ms), clock.timeZone) / 60;
    const byUtc = (ms / 60_000) % 1440;
    return Math.floor((shown - byUtc + 2880) % 1440);
  };
  for (let ms = Math.ceil(clock.startMs / stepMs) * stepMs; ms < endMs; ms += stepMs) {
    const byMin = offsetMin(ms) - offsetMin(ms - stepMs);
    if (byMin === 0) continue;
    changes.push({
      atS: (ms - clock.startMs) / 1000,
      byMin: byMin > 720 ? byMin - 1440 : byMin < -720 ? byMin + 1440 : byMin,
    });
  }
  return changes;
}

/** What a typed time of the clock can mean within a history: no second of it, one, or two where the clock was set back. */
export type TypedClock =
  | { readonly kind: "unreadable" }
  | { readonly kind: "outside" }
  | { readonly kind: "at"; readonly atS: readonly [number, ...number[]] };

/** Reads `7:30`, `0730` or `07:30:15` as a time within the history, its two ends included. */
export function readClock(clock: HistoryClock, text: string): TypedClock {
  const parts = /^(.*?\d[:.]\d{2})[:.](\d{2})$/.exec(text.trim());
  const time = parseTime(parts?.[1] ?? text);
  const seconds = Number(parts?.[2] ?? 0);
  if (time === null || seconds > 59) return { kind: "unreadable" };
  const first = localDate(new Date(clock.startMs), clock.timeZone);
  const found = [first, addDays(first, 1)].flatMap((date) => {
    const local = atLocalTime(date, time, clock.timeZone);
    if (local.kind === "skipped") return [];
    return local.kind === "one" ? [local.instant] : [local.first, local.second];
  });
  const within = found
    .map((instant) => instant.getTime() / 1000 + seconds - clock.startMs / 1000)
    // A history that starts within a minute, 06:00:37, is meant by that minute; so is its end.
    .flatMap((atS) => {
      const isWithoutSeconds = parts === null;
      if (atS >= 0 && atS <= clock.lengthS) return [atS];
      if (isWithoutSeconds && atS < 0 && atS > -60) return [0];
      if (isWithoutSeconds && atS > clock.lengthS && atS < clock.lengthS + 60)
        return [clock.lengthS];
      return [];
    });
  const [one, ...more] = within;
  return one === undefined ? { kind: "outside" } : { kind: "at", atS: [one, ...more] };
}
