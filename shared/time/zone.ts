import { tzOffset } from "@date-fns/tz";

export type LocalInstant =
  | { kind: "one"; instant: Date }
  /** The clock was set back: this time came twice. */
  | { kind: "twice"; first: Date; second: Date }
  /** The clock was set forward: this time never came. */
  | { kind: "skipped" };

/**
 * The instant at which a wall clock in a zone shows a local date and time.
 *
 * @param date ISO date
 * @param time HH:MM
 * @param timeZone IANA name
 */
export function atLocalTime(date: string, time: string, timeZone: string): LocalInstant {
  const asUtc = Date.parse(`${date}T${time}:00Z`);
  const dayMs = 86_400_000;
  const minuteMs = 60_000;
  const offsets = [
    tzOffset(timeZone, new Date(asUtc - dayMs)),
    tzOffset(timeZone, new Date(asUtc + dayMs)),
  ];
  const found = [...new Set(offsets.map((offset) => asUtc - offset * minuteMs))]
    .filter((instant) => instant + tzOffset(timeZone, new Date(instant)) * minuteMs === asUtc)
    .sort((a, b) => a - b)
    .map((instant) => new Date(instant));
  const [first, second] = found;
  if (!first) return { kind: "skipped" };
  return second ? { kind: "twice", first, second } : { kind: "one", instant: first };
}

/**
 * The first instant at which a wall clock in a zone shows a local date and time; where that time never comes, the next
 * one that there is. Of a time that comes twice it is the first.
 */
export function atOrAfterLocalTime(date: string, time: string, timeZone: string): Date {
  for (let minutes = 0; ; minutes += 1) {
    const wanted = new Date(Date.parse(`${date}T${time}:00Z`) + minutes * 60_000).toISOString();
    const at = atLocalTime(wanted.slice(0, 10), wanted.slice(11, 16), timeZone);
    if (at.kind !== "skipped") return at.kind === "one" ? at.instant : at.first;
  }
}

/** The local date in a zone at an instant, ISO. */
export function localDate(instant: Date, timeZone: string): string {
  const local = new Date(instant.getTime() + tzOffset(timeZone, instant) * 60_000);
  return local.toISOString().slice(0, 10);
}

/** HH:MM in a zone at an instant. */
export function localTime(instant: Date, timeZone: string): string {
  const local = new Date(instant.getTime() + tzOffset(timeZone, instant) * 60_000);
  return local.toISOString().slice(11, 16);
}

/** An ISO date some days later or earlier. */
export function addDays(date: string, days: number): string {
  return new Date(Date.parse(`${date}T00:00:00Z`) + days * 86_400_000).toISOString().slice(0, 10);
}

/** An ISO date some months later; where that month is too short, its last day. */
export function addMonths(date: string, months: number): string {
  const [year = 0, month = 1, day = 1] = date.split("-").map(Number);
  const lastOfMonth = new Date(Date.UTC(year, month - 1 + months + 1, 0));
  const wanted = Math.min(day, lastOfMonth.getUTCDate());
  return new Date(Date.UTC(lastOfMonth.getUTCFullYear(), lastOfMonth.getUTCMonth(), wanted))
    .toISOString()
    .slice(0, 10);
}
