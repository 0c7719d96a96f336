import type { OutingReturn, OutingRow } from "../../../shared/schemas/outing";
import { addDays, atLocalTime, localDate, localTime } from "../../../shared/time/zone";

/** The cells of a row that are typed into, in the order of the keys. */
export type Cell =
  | "who"
  | "checkBeforeDb"
  | "outTime"
  | "backTime"
  | "checkAfterDb"
  | `figure${number}`
  | "peakDb";

/** In the morning an instrument goes out, in the evening it comes back; of a day gone by both are typed at once. */
export type Phase = "out" | "back" | "both";

export const phaseOf = ({ run }: Pick<OutingRow, "run">, isPast: boolean): Phase =>
  run?.isOut ? "back" : isPast ? "both" : "out";

export function cellsOf(phase: Phase, presetsCount: number): Cell[] {
  const out: Cell[] = ["who", "checkBeforeDb", "outTime"];
  if (phase === "out") return out;
  const figures = Array.from({ length: presetsCount }, (_, index): Cell => `figure${index}`);
  const back: Cell[] = ["backTime", "checkAfterDb", ...figures, "peakDb"];
  return phase === "back" ? back : [...out, ...back];
}

export type EnterStep =
  | { kind: "stamp"; cell: "outTime" | "backTime" }
  | { kind: "go"; to: Cell }
  | { kind: "send" };

/**
 * What Enter does in a cell: an empty time cell takes the present time, any other goes on to the next, and from the last
 * the row is sent. In the morning the time is the last, so that stamping sends. No time of a day gone by is the present
 * one.
 */
export function enterStep(
  cell: Cell,
  { phase, presetsCount, isEmpty }: { phase: Phase; presetsCount: number; isEmpty: boolean },
): EnterStep {
  if (phase !== "both" && (cell === "outTime" || cell === "backTime") && isEmpty)
    return { kind: "stamp", cell };
  const cells = cellsOf(phase, presetsCount);
  const next = cells[cells.indexOf(cell) + 1];
  return next ? { kind: "go", to: next } : { kind: "send" };
}

const plain = (text: string) => text.toLowerCase().replace(/[\s-]/g, "");

/** The row that a typed or scanned serial number means: that number, or the only one that ends with what was typed. */
export function findBySerial<Row extends Pick<OutingRow, "serialNumber">>(
  rows: readonly Row[],
  typed: string,
): Row | null {
  const wanted = plain(typed);
  if (wanted === "") return null;
  const exact = rows.find(({ serialNumber }) => plain(serialNumber) === wanted);
  if (exact) return exact;
  const ending = rows.filter(({ serialNumber }) => plain(serialNumber).endsWith(wanted));
  return ending.length === 1 ? (ending[0] as Row) : null;
}

export type FoundInstant =
  | { kind: "one"; instant: string }
  | { kind: "twice"; first: string; second: string }
  | { kind: "skipped" };

function instantAt(date: string, time: string, timeZone: string): FoundInstant {
  const found = atLocalTime(date, time, timeZone);
  if (found.kind === "one") return { kind: "one", instant: found.instant.toISOString() };
  if (found.kind === "skipped") return found;
  return { kind: "twice", first: found.first.toISOString(), second: found.second.toISOString() };
}

/** The instant at which an instrument went out, by the clock of the site. */
export const outInstant = (date: string, time: string, timeZone: string): FoundInstant =>
  instantAt(date, time, timeZone);

/** The first such time of day after it went out: a night shift comes back on the next date. */
export function backInstant(outAt: string, time: string, timeZone: string): FoundInstant {
  const outOn = localDate(new Date(outAt), timeZone);
  for (const date of [outOn, addDays(outOn, 1)]) {
    const found = instantAt(date, time, timeZone);
    if (found.kind === "skipped") return found;
    if (found.kind === "one" && found.instant > outAt) return found;
    if (found.kind === "twice" && found.second > outAt)
      return found.first > outAt ? found : { kind: "one", instant: found.second };
  }
  return { kind: "skipped" };
}

/** The present minute, and how the site's clock shows it. */
export function presentTime(now: Date, timeZone: string): { instant: string; time: string } {
  const minute = new Date(Math.floor(now.getTime() / 60_000) * 60_000);
  return { instant: minute.toISOString(), time: localTime(minute, timeZone) };
}

export type Figure = { kind: "dose"; dosePct: number } | { kind: "average"; averageDb: number };

/** The readings of a return: each preset with the figure that was typed for it, the peak with the first. */
export function readingsOf(
  presets: OutingRow["presets"],
  figures: readonly (Figure | null)[],
  peakDb: number | null,
): OutingReturn["readings"] {
  const readings = presets.flatMap((settings, index) => {
    const figure = figures[index] ?? null;
    if (figure === null) return [];
    return [
      {
        settings,
        dosePct: figure.kind === "dose" ? figure.dosePct : null,
        averageDb: figure.kind === "average" ? figure.averageDb : null,
        lceqDb: null,
        lasMaxDb: null,
        peak: null,
      },
    ];
  });
  const [settings] = presets;
  if (peakDb === null || !settings) return readings;
  const peak = { levelDb: peakDb, weighting: "C" as const };
  const [first, ...rest] = readings;
  if (first) return [{ ...first, peak }, ...rest];
  return [{ settings, dosePct: null, averageDb: null, lceqDb: null, lasMaxDb: null, peak }];
}
