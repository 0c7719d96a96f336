const QUOTE = '"';

/** The cells of one line. A quoted cell may hold the delimiter; spaces as a delimiter count once, however many. */
export function splitLine(line: string, delimiter: string): string[] {
  if (delimiter === " ") return line.trim().split(/ +/);
  if (!line.includes(QUOTE)) return line.split(delimiter).map((cell) => cell.trim());
  const cells: string[] = [];
  let cell = "";
  let isQuoted = false;
  for (let at = 0; at < line.length; at++) {
    const letter = line[at]!;
    if (letter === QUOTE) {
      if (isQuoted && line[at + 1] === QUOTE) {
        cell += QUOTE;
        at += 1;
      } else isQuoted = !isQuoted;
    } else if (letter === delimiter && !isQuoted) {
      cells.push(cell.trim());
      cell = "";
    } else cell += letter;
  }
  cells.push(cell.trim());
  return cells;
}

const MISSING_MARKS = new Set([
  "",
  "-",
  "--",
  "---",
  "nan",
  "na",
  "n/a",
  "null",
  "none",
  "#n/a",
  "x",
  "…",
  "...",
]);
const OVER_MARKS = /^(>.*|ol|ovl|ovld|ovr|over|overload|overrange|over range|#over)$/i;
const UNDER_MARKS = /^(<.*|ul|ur|unr|under|underrange|under range|#under)$/i;
/** What of these is told to whoever maps a file. */
export const KNOWN_OVER_MARKS = ["OL", "OVL", "OVR", "OVER", "OVERLOAD"] as const;
export const KNOWN_UNDER_MARKS = ["UL", "UR", "UNR", "UNDER"] as const;

/** A number with a sign after it, as an instrument marks some of its levels: "104.2*". */
const SIGNED = /^[+-]?[\d.,]+\s*([^\s\w.,+%-])$/;
export const signAfter = (cell: string): string | null => SIGNED.exec(cell.trim())?.[1] ?? null;

/** Decibels of a value as written; NaN for no sound pressure at all. */
export function toDb(value: number, unit: "dB" | "dB/10" | "Pa"): number {
  switch (unit) {
    case "dB":
      return value;
    case "dB/10":
      return value / 10;
    case "Pa":
      return value > 0 ? 20 * Math.log10(value / 20e-6) : Number.NaN;
  }
}

export type Value = number | "missing" | "over" | "under" | "unreadable";

export interface ValueMarks {
  readonly decimal: "." | ",";
  readonly overRange: readonly string[];
  readonly underRange: readonly string[];
}

/** A level's cell: a number with the file's decimal mark and nothing else but a unit, or a mark for none. */
export function readValue(cell: string, { decimal, overRange, underRange }: ValueMarks): Value {
  const text = cell.trim();
  const sign = signAfter(text);
  const isMarked = (marks: readonly string[]) =>
    marks.includes(text) || (sign !== null && marks.includes(sign));
  if (isMarked(overRange)) return "over";
  if (isMarked(underRange)) return "under";
  if (MISSING_MARKS.has(text.toLowerCase())) return "missing";
  if (OVER_MARKS.test(text)) return "over";
  if (UNDER_MARKS.test(text)) return "under";
  const bare = text.replace(/\s*(dB(\s*\(?[ACZ]\)?)?|dB[ACZ]|Pa)$/i, "").replace("\u2212", "-");
  const dotted = decimal === "," ? bare.replace(",", ".") : bare;
  return /^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(dotted) ? Number(dotted) : "unreadable";
}

const MONTHS: Record<string, number> = {
  jan: 1,
  feb: 2,
  mar: 3,
  mär: 3,
  mrz: 3,
  apr: 4,
  may: 5,
  mai: 5,
  jun: 6,
  jul: 7,
  aug: 8,
  sep: 9,
  oct: 10,
  okt: 10,
  nov: 11,
  dec: 12,
  dez: 12,
};
const DAY_MS = 86_400_000;

export type DateOrder = "ymd" | "dmy" | "mdy";

/** Midnight of a date as if the clock were UTC's, ms; null where there is no such date. */
export function dayMsOf(year: number, month: number, day: number): number | null {
  const ms = Date.UTC(year, month - 1, day);
  const found = new Date(ms);
  return year >= 1980 &&
    year <= 2200 &&
    found.getUTCMonth() === month - 1 &&
    found.getUTCDate() === day
    ? ms
    : null;
}

/** What the parts of a date are, by their order; four digits in front are a year in any order. */
export function dateOf(
  parts: readonly number[],
  isYearFirst: boolean,
  order: DateOrder,
): number | null {
  const [a = 0, b = 0, c = 0] = parts;
  const whole = (year: number) => (year < 100 ? 2000 + year : year);
  if (isYearFirst || order === "ymd") return dayMsOf(whole(a), b, c);
  return order === "dmy" ? dayMsOf(whole(c), b, a) : dayMsOf(whole(c), a, b);
}

/** Midnight of the date that a text begins with, and the rest of it. */
export function readDate(text: string, order: DateOrder): { dayMs: number; rest: string } | null {
  const compact = /^(\d{4})(\d{2})(\d{2})(?!\d)/.exec(text);
  const named = /^(\d{1,4})[-./ ]+([A-Za-zä]{3})[a-zä]*\.?[-./ ]+(\d{1,4})/.exec(text);
  const plain = /^(\d{1,4})[-./](\d{1,2})[-./](\d{1,4})(?!\d)/.exec(text);
  let dayMs: number | null = null;
  const found = compact ?? named ?? plain;
  if (!found) return null;
  const [whole, first = "", second = "", third = ""] = found;
  if (named && found === named) {
    const month = MONTHS[second.toLowerCase()];
    if (month === undefined) return null;
    const [day, year] = first.length === 4 ? [third, first] : [first, third];
    dayMs = dateOf([Number(year), month, Number(day)], false, "ymd");
  } else dayMs = dateOf([Number(first), Number(second), Number(third)], first.length === 4, order);
  return dayMs === null
    ? null
    : { dayMs, rest: text.slice(whole.length).replace(/^[T\s,;_]+/, "") };
}

const TIME =
  /^(\d{1,2}):(\d{2})(?::(\d{2})(?:[.,:](\d{1,6}))?)?\s*([AaPp]\.?[Mm]\.?)?\s*(Z|UTC|[+-]\d{2}:?\d{2})?$/;
const COMPACT_TIME = /^(\d{2})(\d{2})(\d{2})()()()$/;

export interface TimeOfDay {
  ms: number;
  /** The zone that the text itself states, ms ahead of UTC. */
  aheadMs: number | null;
}

/** A time of day. Twelve-hour clocks by their letters; seconds may be left out. */
export function readTime(text: string): TimeOfDay | null {
  const found = TIME.exec(text.trim()) ?? COMPACT_TIME.exec(text.trim());
  if (!found) return null;
  const [, h = "", m = "", s = "", fraction = "", half = "", zone = ""] = found;
  let hour = Number(h);
  if (half !== "") {
    if (hour < 1 || hour > 12) return null;
    hour = (hour % 12) + (/^p/i.test(half) ? 12 : 0);
  }
  const [minute, second] = [Number(m), Number(s)];
  if (hour > 24 || minute > 59 || second > 59 || (hour === 24 && minute + second > 0)) return null;
  const ms =
    ((hour * 60 + minute) * 60 + second) * 1000 +
    (fraction === "" ? 0 : Number(`0.${fraction}`) * 1000);
  const ahead = /^([+-])(\d{2}):?(\d{2})$/.exec(zone);
  const aheadMs = ahead
    ? (ahead[1] === "-" ? -1 : 1) * (Number(ahead[2]) * 60 + Number(ahead[3])) * 60_000
    : zone === ""
      ? null
      : 0;
  return { ms, aheadMs };
}

/** Seconds since the start, ms: a number, or hours, minutes and seconds. */
export function readElapsed(
  text: string,
  unit: "s" | "ms" | "hh:mm:ss",
  decimal: "." | ",",
): number | null {
  if (unit === "hh:mm:ss") {
    const found = /^(?:(\d+)\s*d(?:ays?)?\s+)?(\d{1,3}):(\d{2})(?::(\d{2}(?:[.,]\d+)?))?$/i.exec(
      text.trim(),
    );
    if (!found) return null;
    const [, d = "0", h = "0", m = "0", s = "0"] = found;
    return (
      ((Number(d) * 24 + Number(h)) * 60 + Number(m)) * 60_000 + Number(s.replace(",", ".")) * 1000
    );
  }
  const value = readValue(text, { decimal, overRange: [], underRange: [] });
  if (typeof value !== "number") return null;
  return unit === "s" ? value * 1000 : value;
}

export { DAY_MS };
