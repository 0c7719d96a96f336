import { addDays, localDate } from "../../shared/time/zone";

/** Where a site is unless said. */
export const SITE_TIME_ZONE = "Europe/Berlin";

/** Calendar dates counted from today, as the tests' database counts it (UTC). */
export const daysFromToday = (days: number): string =>
  new Date(Date.now() + days * 86_400_000).toISOString().slice(0, 10);

/** The same by the clock of a site that `buildSite` made without saying where: an hour or two ahead of UTC. */
export const daysFromTodayAtSite = (days: number): string =>
  addDays(localDate(new Date(), SITE_TIME_ZONE), days);

/** PostgreSQL's half-open range of days whose last one is included. */
export function daysRange(fromDate: string, toDate: string | null): string {
  if (toDate === null) return `[${fromDate},)`;
  const after = new Date(Date.parse(`${toDate}T00:00:00Z`) + 86_400_000).toISOString().slice(0, 10);
  return `[${fromDate},${after})`;
}
