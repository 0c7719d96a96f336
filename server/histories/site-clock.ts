import { tzOffset } from "@date-fns/tz";
import type { IssueList } from "./issue-list";
import type { RawSeries } from "./raw-series";

const HOUR_MS = 3_600_000;
const DAY_MS = 24 * HOUR_MS;

const offsetMs = (timeZone: string, instantMs: number) =>
  tzOffset(timeZone, new Date(instantMs)) * 60_000;

/** The instant, to the second, at which the zone's clock was set between two instants. */
function transitionBetween(timeZone: string, fromMs: number, toMs: number): number {
  const before = offsetMs(timeZone, fromMs);
  let [low, high] = [fromMs, toMs];
  while (high - low > 1000) {
    const middle = Math.floor((low + high) / 2000) * 1000;
    if (middle <= low || middle >= high) break;
    if (offsetMs(timeZone, middle) === before) low = middle;
    else high = middle;
  }
  return high;
}

/**
 * Turns what a clock in a zone showed into instants, in place. A change of the zone's clock within the series is
 * understood whether the instrument's clock took part in it or not, and told.
 *
 * @param firstOrSecond which of the two it was, where the series begins in the hour that came twice; null: not said.
 */
export function toInstants(
  series: Pick<RawSeries, "times" | "lines" | "count">,
  timeZone: string,
  issues: IssueList,
  firstOrSecond: "first" | "second" | null,
): void {
  const { times, lines, count } = series;
  if (count === 0) return;
  let [earliest, latest] = [times[0]!, times[0]!];
  for (let index = 1; index < count; index++) {
    const time = times[index]!;
    if (time < earliest) earliest = time;
    if (time > latest) latest = time;
  }
  if (latest - earliest > 3 * DAY_MS) {
    // Longer than any history: refused for that, whatever the zone did meanwhile.
    const ahead = offsetMs(timeZone, earliest);
    for (let index = 0; index < count; index++) times[index]! -= ahead;
    return;
  }
  const [from, to] = [earliest - DAY_MS, latest + DAY_MS];
  const [before, after] = [offsetMs(timeZone, from), offsetMs(timeZone, to)];
  const transition =
    before === after ? Number.POSITIVE_INFINITY : transitionBetween(timeZone, from, to);
  const setBy = after - before;
  // The local times between which the clock has no time, or every time twice.
  const [lowWall, highWall] = [
    transition + Math.min(before, after),
    transition + Math.max(before, after),
  ];
  const first = times[0]!;
  if (before === after || latest < lowWall || first >= highWall) {
    const ahead = before === after || latest < lowWall ? before : after;
    for (let index = 0; index < count; index++) times[index]! -= ahead;
    return;
  }
  let isAfter = false;
  if (first >= lowWall) {
    if (setBy < 0) {
      if (firstOrSecond === null)
        issues.add("asked", "time-twice", lines[0]!, { minutes: -setBy / 60_000 });
      isAfter = firstOrSecond === "second";
    }
  }
  // An instrument that shows a time in the gap keeps the old time throughout.
  let keepsOld = false;
  if (setBy > 0)
    for (let index = 0; index < count && !keepsOld; index++)
      keepsOld = times[index]! >= lowWall && times[index]! < highWall;
  for (let index = 0; index < count; index++) {
    const wall = times[index]!;
    if (!isAfter && !keepsOld) {
      const isForward = setBy > 0 && wall >= highWall;
      const fell = index > 0 ? times[index - 1]! + before - wall : 0;
      const isBack = setBy < 0 && wall >= lowWall && fell > -setBy / 2;
      if (isForward || isBack) {
        isAfter = true;
        if (index > 0)
          issues.add("told", isForward ? "clock-set-forward" : "clock-set-back", lines[index]!, {
            minutes: Math.abs(setBy) / 60_000,
          });
      }
    }
    times[index] = wall - (isAfter ? after : before);
  }
  const end = times[count - 1]!;
  if (keepsOld || (!isAfter && end >= transition))
    issues.add("told", "clock-not-set", lines[0]!, { minutes: Math.abs(setBy) / 60_000 });
}
