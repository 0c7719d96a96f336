import { MISSING } from "../../shared/acoustics/history";
import type { IssueList } from "./issue-list";
import { OVER, type RawSeries, UNDER } from "./raw-series";

export const SHORTEST_MS = 125;
export const LONGEST_MS = 60_000;
export const DAY_MS = 86_400_000;

/** Gaps up to this are filled as missing without a question, ms. */
const SHORT_GAP_MS = 60_000;
/** Lines that the interval is taken from. */
const SAMPLE = 5_000;
/** Share of neighbouring lines that have to be one interval apart. */
const REGULAR = 0.8;

/** A history on its grid: one value an interval, `MISSING` where there is none. */
export interface Grid {
  startMs: number;
  intervalMs: number;
  levels: Int16Array[];
}

/** The commonest of some positive whole numbers, with its share. */
function commonest(values: readonly number[]): { value: number; share: number } | null {
  const counts = new Map<number, number>();
  for (const value of values) counts.set(value, (counts.get(value) ?? 0) + 1);
  let best: { value: number; count: number } | null = null;
  for (const [value, count] of counts)
    if (!best || count > best.count || (count === best.count && value < best.value))
      best = { value, count };
  return best && { value: best.value, share: best.count / values.length };
}

/**
 * Eighths and tenths of seconds under whole seconds: so many lines share each time that they are parts of it. Spreads
 * them, and says how many share one.
 */
function spreadShared(series: RawSeries): number {
  const { times, count } = series;
  const runs: number[] = [];
  for (let index = 0; index < Math.min(count, SAMPLE); ) {
    let end = index + 1;
    while (end < count && times[end] === times[index]) end += 1;
    runs.push(end - index);
    index = end;
  }
  const inner = runs.slice(1, -1);
  const most = commonest(inner);
  if (!most || inner.length < 3 || most.value < 2 || most.value > 10 || most.share < 0.9) return 1;
  const steps: number[] = [];
  for (let index = 1; index < Math.min(count, SAMPLE); index++) {
    const step = times[index]! - times[index - 1]!;
    if (step > 0) steps.push(step);
  }
  const step = commonest(steps)?.value ?? 1000;
  for (let index = 0; index < count; ) {
    let end = index + 1;
    while (end < count && times[end] === times[index]) end += 1;
    // A first run that is short began within its second; every other one at it.
    const late = index === 0 ? Math.max(0, most.value - (end - index)) : 0;
    for (let place = index; place < end; place++)
      times[place]! += ((place - index + late) * step) / most.value;
    index = end;
  }
  return most.value;
}

function intervalOf(series: RawSeries, issues: IssueList): number | null {
  const { times, lines, count } = series;
  const steps: number[] = [];
  for (let index = 1; index < Math.min(count, SAMPLE); index++) {
    const step = Math.round(times[index]! - times[index - 1]!);
    if (step > 0) steps.push(step);
  }
  const most = commonest(steps);
  if (!most) {
    issues.add("refused", "no-interval", lines[0] ?? 1);
    return null;
  }
  // Thirds and sevenths of seconds are written with their milliseconds rounded.
  const near = steps.filter((step) => Math.abs(step - most.value) <= 2);
  const intervalMs = Math.round(near.reduce((sum, step) => sum + step, 0) / near.length);
  if (intervalMs < SHORTEST_MS || intervalMs > LONGEST_MS) {
    issues.add("refused", "interval-unsupported", lines[0]!, { intervalMs });
    return null;
  }
  const whole = steps.filter(
    (step) => Math.abs(step / intervalMs - Math.round(step / intervalMs)) < 0.05,
  );
  if (near.length / steps.length < REGULAR && whole.length / steps.length < REGULAR) {
    const odd = steps.findIndex((step) => Math.abs(step - most.value) > 2);
    issues.add("refused", "interval-irregular", lines[odd + 1] ?? 1, { intervalMs });
    return null;
  }
  return intervalMs;
}

const isSame = (series: RawSeries, a: number, b: number) =>
  series.levels.every((levels) => levels[a] === levels[b]);

/**
 * Lays lines on the grid of their interval: missing ones are filled and told, or asked about where they are many;
 * repeated ones are told where they say the same; a clock that goes back refuses the file. Null where there is no grid.
 */
export function layOnGrid(series: RawSeries, issues: IssueList): Grid | null {
  const { times, lines } = series;
  if (series.count === 0) return null;
  const shared = spreadShared(series);
  if (shared > 1) issues.add("told", "lines-share-a-time", lines[0]!, { count: shared });
  const intervalMs = intervalOf(series, issues);
  if (intervalMs === null) return null;
  const startMs = times[0]!;
  const { count } = series;
  const places = new Uint32Array(count);
  const isKept = new Uint8Array(count);
  const repeated = { count: 0, line: 0 };
  let lastKept = 0;
  let next = 1;
  isKept[0] = 1;
  for (let index = 1; index < count; index++) {
    const time = times[index]!;
    const place = Math.round((time - startMs) / intervalMs);
    if (place >= next) {
      if (place > next) {
        const missing = place - next;
        const isShort = missing * intervalMs <= SHORT_GAP_MS;
        issues.add(
          isShort ? "told" : "asked",
          isShort ? "missing-filled" : "clock-jump",
          lines[index]!,
          {
            count: missing,
            seconds: (missing * intervalMs) / 1000,
          },
        );
      }
      if ((place + 1) * intervalMs > DAY_MS) {
        issues.add("refused", "longer-than-a-day", lines[index]!);
        return null;
      }
      places[index] = place;
      isKept[index] = 1;
      lastKept = index;
      next = place + 1;
    } else if (place === next - 1) {
      if (isSame(series, lastKept, index)) {
        if (repeated.count++ === 0) repeated.line = lines[index]!;
      } else issues.add("asked", "repeated-different", lines[index]!, {});
    } else {
      issues.add("refused", "clock-went-back", lines[index]!, {
        seconds: (times[lastKept]! - time) / 1000,
      });
      return null;
    }
  }
  if (repeated.count > 0)
    issues.add("told", "repeated-same", repeated.line, { count: repeated.count });
  const levels = series.levels.map((raw) => {
    const laid = new Int16Array(next).fill(MISSING);
    for (let index = 0; index < count; index++) {
      const level = raw[index]!;
      if (isKept[index] === 1 && level !== OVER && level !== UNDER) laid[places[index]!] = level;
    }
    return laid;
  });
  return { startMs: Math.round(startMs), intervalMs, levels };
}
