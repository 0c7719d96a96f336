/** Calendar dates counted from today, as the tests' database counts it (UTC). */
export const daysFromToday = (days: number): string =>
  new Date(Date.now() + days * 86_400_000).toISOString().slice(0, 10);

/** PostgreSQL's half-open range of days whose last one is included. */
export function daysRange(fromDate: string, toDate: string | null): string {
  if (toDate === null) return `[${fromDate},)`;
  const after = new Date(Date.parse(`${toDate}T00:00:00Z`) + 86_400_000).toISOString().slice(0, 10);
  return `[${fromDate},${after})`;
}
