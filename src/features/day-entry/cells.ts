import type { Unaccounted } from "../../../shared/acoustics/types";
import { parseTime } from "../../../shared/format/date";
import { parseDuration } from "../../../shared/format/duration";
import { editNumber, type Parsed, parseNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import type { CellId } from "./columns";

/** What a dosimeter said: its average under its settings, or its dose. */
export type ReadingValue =
  | { readonly kind: "level"; readonly levelDb: number }
  | { readonly kind: "dose"; readonly dosePct: number };

export type CellValue = string | number | Unaccounted | ReadingValue;

/** `filled`: from roster, nominal day or last shift, and nobody has looked at it. */
export type CellMark = "filled" | "typed" | "saved";

const DAY_MIN = 1440;

export type CellFault =
  | "ambiguous"
  | "not-a-duration"
  | "not-a-number"
  | "not-a-time"
  | "not-a-share"
  | "not-a-reading"
  | "not-unaccounted"
  | "minutes-follow"
  | "negative"
  | "more-than-a-day"
  | "level-out-of-range";

export interface Cell {
  readonly value: CellValue | null;
  /** As typed, where it can't be read: it is neither dropped nor taken for empty. */
  readonly text: string | null;
  readonly fault: CellFault | null;
  readonly mark: CellMark;
}

/** The words for time not accounted for, in the reader's language. */
export interface UnaccountedWords {
  readonly quiet: string;
  readonly likeTheRest: string;
  readonly unknown: string;
}

const QUIETEST_DB = 20;
const LOUDEST_DB = 160;

export const emptyCell = (mark: CellMark): Cell => ({ value: null, text: null, fault: null, mark });
export const cellOf = (value: CellValue | null, mark: CellMark): Cell => ({
  value,
  text: null,
  fault: null,
  mark,
});

/** A cell as somebody types it, in the notation of the locale. */
export function parseCell(
  id: CellId,
  text: string,
  locale: Locale,
  words: UnaccountedWords,
  mark: CellMark = "typed",
): Cell {
  const typed = text.trim();
  if (typed === "") return emptyCell(mark);
  const parsed = read(id, typed, locale, words);
  return "fault" in parsed
    ? { value: null, text, fault: parsed.fault, mark }
    : cellOf(parsed.value, mark);
}

type Read = { value: CellValue } | { fault: CellFault };

function read(id: CellId, typed: string, locale: Locale, words: UnaccountedWords): Read {
  if (id === "start") {
    const time = parseTime(typed);
    return time === null ? { fault: "not-a-time" } : { value: time };
  }
  if (id === "unaccounted") return readUnaccounted(typed, locale, words);
  if (id === "reading") return readReading(typed, locale);
  if (id === "worn" || id.startsWith("worn:")) {
    const share = settle(parseNumber(typed.replace(/\s*%$/, ""), locale), "not-a-number");
    if ("fault" in share) return share;
    return share.value >= 0 && share.value <= 100 ? share : { fault: "not-a-share" };
  }
  const minutes = settle(parseDuration(typed, locale), "not-a-duration");
  if (!("value" in minutes)) return minutes;
  if (minutes.value < 0) return { fault: "negative" };
  // A length out of range is said of the shift, with what it may be.
  return id !== "length" && minutes.value > DAY_MIN ? { fault: "more-than-a-day" } : minutes;
}

function settle(
  parsed: Parsed<number>,
  otherwise: CellFault,
): { value: number } | { fault: CellFault } {
  if (parsed.kind === "ok") return { value: parsed.value };
  return { fault: parsed.kind === "ambiguous" ? "ambiguous" : otherwise };
}

const levelOrFault = (text: string, locale: Locale): { value: number } | { fault: CellFault } => {
  const level = settle(parseNumber(text.replace(/\s*db(?:\(a\))?$/i, ""), locale), "not-a-number");
  if ("fault" in level) return level;
  return level.value >= QUIETEST_DB && level.value <= LOUDEST_DB
    ? level
    : { fault: "level-out-of-range" };
};

/** `quiet 70`, `like the rest` or `unknown`, each also by its first letter. Bare minutes follow from the rest. */
function readUnaccounted(typed: string, locale: Locale, words: UnaccountedWords): Read {
  const lower = typed.toLocaleLowerCase(locale);
  const [, head = "", tail = ""] = /^([^\d\s]*(?:\s+[^\d\s]+)*)\s*(.*)$/u.exec(lower) ?? [];
  const isWord = (word: string) =>
    head !== "" && word.toLocaleLowerCase(locale).startsWith(head.trim());
  if (tail === "" && (isWord(words.unknown) || head === "?")) return { value: { how: "unknown" } };
  if (tail === "" && isWord(words.likeTheRest)) return { value: { how: "like-the-rest" } };
  if (isWord(words.quiet)) {
    if (tail === "") return { fault: "not-unaccounted" };
    const level = levelOrFault(tail, locale);
    return "fault" in level ? level : { value: { how: "quiet", levelDb: level.value } };
  }
  return { fault: head === "" ? "minutes-follow" : "not-unaccounted" };
}

function readReading(typed: string, locale: Locale): Read {
  if (typed.endsWith("%")) {
    const dose = settle(parseNumber(typed.slice(0, -1), locale), "not-a-reading");
    if ("fault" in dose) return dose;
    return dose.value >= 0 && dose.value <= 1_000_000
      ? { value: { kind: "dose", dosePct: dose.value } }
      : { fault: "negative" };
  }
  const level = levelOrFault(typed, locale);
  if ("fault" in level) return level.fault === "not-a-number" ? { fault: "not-a-reading" } : level;
  return { value: { kind: "level", levelDb: level.value } };
}

/** A cell's text as it is edited and copied: all digits that are stored, and what can't be read as it was typed. */
export function editText(cell: Cell | undefined, locale: Locale, words: UnaccountedWords): string {
  if (!cell) return "";
  if (cell.text !== null) return cell.text;
  const { value } = cell;
  if (value === null) return "";
  if (typeof value === "string") return value;
  if (typeof value === "number") return editNumber(value, locale);
  if ("how" in value) {
    if (value.how === "quiet") return `${words.quiet} ${editNumber(value.levelDb, locale)}`;
    return value.how === "like-the-rest" ? words.likeTheRest : words.unknown;
  }
  return value.kind === "dose"
    ? `${editNumber(value.dosePct, locale)} %`
    : editNumber(value.levelDb, locale);
}

export const numberIn = (cell: Cell | undefined): number | null =>
  typeof cell?.value === "number" ? cell.value : null;

export const unaccountedIn = (cell: Cell | undefined): Unaccounted =>
  typeof cell?.value === "object" && cell.value !== null && "how" in cell.value
    ? cell.value
    : { how: "unknown" };

export const readingIn = (cell: Cell | undefined): ReadingValue | null =>
  typeof cell?.value === "object" && cell.value !== null && "kind" in cell.value
    ? cell.value
    : null;
