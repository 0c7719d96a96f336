import { addDays } from "../../../shared/time/zone";

const DAYS = [0, 1, 2, 3, 4, 5, 6];

/** The weeks of a month from Monday to Sunday, with the days of its neighbours that fill them. */
export function weeksOf(month: string): string[][] {
  const first = `${month}-01`;
  const weekday = (new Date(`${first}T00:00:00Z`).getUTCDay() + 6) % 7;
  const weeks: string[][] = [];
  for (
    let monday = addDays(first, -weekday);
    monday.slice(0, 7) <= month;
    monday = addDays(monday, 7)
  )
    weeks.push(DAYS.map((day) => addDays(monday, day)));
  return weeks;
}

/** The month so many months on: 2026-12 and 1 give 2027-01. */
export function monthAfter(month: string, months: number): string {
  const [year = 0, at = 1] = month.split("-").map(Number);
  return new Date(Date.UTC(year, at - 1 + months, 1)).toISOString().slice(0, 7);
}
