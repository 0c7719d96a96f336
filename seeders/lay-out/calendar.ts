import { addDays, atLocalTime, localDate } from "../../shared/time/zone";
import type { DemoCrew } from "../demo/programme";
import { chance } from "./chance";

const weekday = (date: string) => new Date(`${date}T00:00:00Z`).getUTCDay();
export const daysBetween = (from: string, to: string) =>
  Math.round((Date.parse(to) - Date.parse(from)) / 86_400_000);

/** The days of a site, from the first of the demo to the one on its clock when the demo is filled. */
export class SiteCalendar {
  readonly today: string;

  constructor(
    readonly timeZone: string,
    now: Date,
    readonly spanDays: number,
  ) {
    this.today = localDate(now, timeZone);
  }

  get first(): string {
    return addDays(this.today, -this.spanDays);
  }

  daysAgo(count: number): string {
    return addDays(this.today, -count);
  }

  /** Whether a crew works on a date. Today and yesterday always: a weekend's demo has something to enter too. */
  works({ pattern }: Pick<DemoCrew, "pattern">, date: string): boolean {
    const ago = daysBetween(date, this.today);
    if (pattern === "four-on-four-off") return ago % 8 < 4;
    if (ago <= 1) return true;
    return weekday(date) !== 0 && weekday(date) !== 6;
  }

  /** The working day of a crew that lies so many working days back; 0 is today. Null where the demo begins later. */
  workdayAgo(crew: Pick<DemoCrew, "pattern">, count: number): string | null {
    let left = count;
    for (let date = this.today; date >= this.first; date = addDays(date, -1)) {
      if (!this.works(crew, date)) continue;
      if (left === 0) return date;
      left -= 1;
    }
    return null;
  }

  private readonly counted = new Map<DemoCrew["pattern"], Map<string, number>>();

  /**
   * How many working days back a working day of a crew lies; 0 is today. What happens by chance hangs on this and not on
   * the date, so that the demo tells the same on whatever day it is filled.
   */
  workdaysAgo({ pattern }: Pick<DemoCrew, "pattern">, date: string): number {
    let ago = this.counted.get(pattern);
    if (!ago) {
      ago = new Map();
      // Another site's first day may be the day before.
      const first = addDays(this.first, -1);
      for (let day = this.today; day >= first; day = addDays(day, -1))
        if (this.works({ pattern }, day)) ago.set(day, ago.size);
      this.counted.set(pattern, ago);
    }
    const found = ago.get(date);
    if (found === undefined) throw new Error(`no ${pattern} crew of the demo works on ${date}`);
    return found;
  }

  /** The working day of a crew so many after the first of the demo. */
  workdayIn(crew: Pick<DemoCrew, "pattern">, count: number): string {
    let date = this.first;
    for (let left = count; !this.works(crew, date) || left > 0; date = addDays(date, 1)) {
      if (this.works(crew, date)) left -= 1;
    }
    return date;
  }

  /** The instant of a time on the site's clock; a time that the clock skips is taken an hour later. */
  instant(date: string, time: string): Date {
    const local = atLocalTime(date, time, this.timeZone);
    if (local.kind === "one") return local.instant;
    if (local.kind === "twice") return local.first;
    const [hour = "0", minute = "00"] = time.split(":");
    return this.instant(date, `${String(Number(hour) + 1).padStart(2, "0")}:${minute}`);
  }
}

/** Most are away between Christmas and New Year. */
function isFestive(date: string): boolean {
  const day = date.slice(5);
  return day >= "12-24" || day === "01-01";
}

export const WORKDAYS_A_WEEK = 5;
export const workweek = (workdaysAgo: number) => Math.floor(workdaysAgo / WORKDAYS_A_WEEK);

/** Leave comes in weeks, sickness in days. In the last days only the story decides who is there. */
export function isAway(number: string, date: string, workdaysAgo: number): boolean {
  if (workdaysAgo < 7) return false;
  if (isFestive(date) && chance(number, "festive", date.slice(0, 4)) < 0.7) return true;
  return (
    chance(number, "leave", workweek(workdaysAgo)) < 0.08 ||
    chance(number, "ill", workdaysAgo) < 0.015
  );
}
