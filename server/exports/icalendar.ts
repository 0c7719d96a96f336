/** One all-day entry of a calendar. */
export interface CalendarEntry {
  /** The same each time the entry is written. */
  readonly uid: string;
  /** ISO date. */
  readonly date: string;
  readonly summary: string;
  readonly url: string;
}

const CRLF = "\r\n";
/** RFC 5545, 3.1: lines of at most 75 octets, continued by a space. */
const LINE_OCTETS = 75;

/** RFC 5545, 3.3.11: what a text value has to mask. */
const textValue = (text: string): string =>
  text.replace(/[\\;,]/g, (mark) => `\\${mark}`).replace(/\r\n|\r|\n/g, "\\n");

function fold(line: string): string {
  const lines: string[] = [];
  let current = "";
  let octets = 0;
  for (const sign of line) {
    const size = Buffer.byteLength(sign);
    if (octets + size > LINE_OCTETS) {
      lines.push(current);
      current = " ";
      octets = 1;
    }
    current += sign;
    octets += size;
  }
  return [...lines, current].join(CRLF);
}

const compactDate = (date: string): string => date.replaceAll("-", "");

/** The day after an ISO date: an all-day entry ends before it (RFC 5545, 3.6.1). */
const dayAfter = (date: string): string =>
  new Date(Date.parse(`${date}T00:00:00Z`) + 86_400_000).toISOString().slice(0, 10);

/**
 * A calendar as RFC 5545 has it. `stampedAt` stands for when its entries were made, so that the same entries give the
 * same text.
 */
export function writeCalendar(
  name: string,
  stampedAt: Date,
  entries: readonly CalendarEntry[],
): string {
  const stamp = `${stampedAt.toISOString().replace(/[-:]/g, "").slice(0, 15)}Z`;
  const lines = [
    "BEGIN:VCALENDAR",
    "VERSION:2.0",
    "PRODID:-//Dinward//Due//EN",
    "CALSCALE:GREGORIAN",
    "METHOD:PUBLISH",
    `NAME:${textValue(name)}`,
    ...entries.flatMap(({ uid, date, summary, url }) => [
      "BEGIN:VEVENT",
      `UID:${textValue(uid)}`,
      `DTSTAMP:${stamp}`,
      `DTSTART;VALUE=DATE:${compactDate(date)}`,
      `DTEND;VALUE=DATE:${compactDate(dayAfter(date))}`,
      `SUMMARY:${textValue(summary)}`,
      `URL:${url}`,
      "TRANSP:TRANSPARENT",
      "END:VEVENT",
    ]),
    "END:VCALENDAR",
  ];
  return lines.map((line) => fold(line) + CRLF).join("");
}
