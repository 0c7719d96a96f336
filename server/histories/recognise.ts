import {
  type DateOrder,
  readDate,
  readTime,
  readValue,
  signAfter,
  splitLine,
} from "../../shared/history-file/cells";
import type { HistoryChannel, HistoryMapping, ProposedMapping } from "../../shared/schemas/history";

type Delimiter = HistoryMapping["delimiter"];
type Unit = HistoryMapping["levels"][number]["unit"];

const plainHead = (head: string) =>
  head
    .toLowerCase()
    .replace(/\(.*?\)|\[.*?\]/g, "")
    .replace(/db\s*[acz]?\s*$/, "")
    .replace(/[^a-zäöüéµ]/g, "");

/** What a column of levels is by the symbol in its head: the symbols of the standards, in the ways they are typed. */
export function channelOfHead(head: string): HistoryChannel | null {
  const plain = plainHead(head);
  if (/^l?c(p|z)?(peak|pk)$|^l(peak|pk)c?$|^l?cpeak|^peakc?$/.test(plain)) return "lcpeak";
  if (/^l?z(peak|pk)|^lin(peak|pk)$|^l?(unw|lin)peak$/.test(plain)) return "lzpeak";
  if (/^l?p?as(max|mx)/.test(plain)) return "las-max";
  if (/^l?p?af(max|mx)/.test(plain)) return "laf-max";
  if (/^l?p?as$|^lpas|^slow$/.test(plain)) return "las";
  if (/^l?ceq/.test(plain)) return "lceq";
  if (/^l?(p?a)?eq(t|s|min)?$|^lat$|^laeq/.test(plain)) return "laeq";
  return null;
}

type TimeHead = "date-time" | "date" | "time" | "elapsed" | null;

function timeHead(head: string): TimeHead {
  const plain = plainHead(head);
  const isDate = /date|datum|fecha|jour/.test(plain);
  const isTime = /time|zeit|uhr|hora|heure|clock/.test(plain);
  if (/elapsed|duration|dauer|verstrichen|laufzeit|seit|^ts?$|^s$|sekunde|seconds?$/.test(plain))
    return "elapsed";
  if (/timestamp|zeitstempel/.test(plain) || (isDate && isTime)) return "date-time";
  if (isDate) return "date";
  return isTime ? "time" : null;
}

/** What a cell looks like by itself. */
function shapeOf(
  cell: string,
  decimal: "." | ",",
): "date-time" | "date" | "time" | "number" | "mark" | "text" | "empty" {
  if (cell === "") return "empty";
  const date = readDate(cell, "ymd") ?? readDate(cell, "dmy") ?? readDate(cell, "mdy");
  // Eight digits are a date only with something that says so; as a plain number they are one.
  if (date && !/^\d+$/.test(cell)) {
    if (date.rest === "") return "date";
    if (readTime(date.rest)) return "date-time";
  }
  if (/:/.test(cell) && readTime(cell)) return "time";
  const value = readValue(cell, { decimal, overRange: [], underRange: [] });
  if (typeof value === "number") return "number";
  if (value !== "unreadable") return "mark";
  // A level with the instrument's own sign after it, as "104.2*".
  return signAfter(cell) === null ? "text" : "mark";
}

function delimiterOf(lines: readonly string[]): Delimiter {
  const candidates: Delimiter[] = ["\t", ";", "|", ",", " "];
  let best: { delimiter: Delimiter; score: number } = { delimiter: ",", score: -1 };
  for (const delimiter of candidates) {
    const counts = new Map<number, number>();
    for (const line of lines) {
      const cells = splitLine(line, delimiter).length;
      counts.set(cells, (counts.get(cells) ?? 0) + 1);
    }
    const [cells = 1, count = 0] = [...counts].toSorted((a, b) => b[1] - a[1])[0] ?? [];
    if (cells < 2) continue;
    // As many cells in as many lines as possible; the rarer marks stand before the comma and the space.
    const score =
      count / lines.length - (delimiter === "," ? 0.01 : 0) - (delimiter === " " ? 0.3 : 0);
    if (score > best.score + 1e-9) best = { delimiter, score };
  }
  return best.delimiter;
}

function decimalOf(rows: readonly (readonly string[])[], delimiter: Delimiter): "." | "," {
  let [commas, points] = [0, 0];
  for (const cell of rows.flat()) {
    if (/^[+-]?\d{1,3},\d+$/.test(cell)) commas += 1;
    else if (/^[+-]?\d{1,3}\.\d+$/.test(cell)) points += 1;
  }
  if (commas === points) return delimiter === ";" && commas > 0 ? "," : ".";
  return commas > points ? "," : ".";
}

function dateOrderOf(cells: readonly string[]): DateOrder {
  const parts = cells.flatMap((cell) => {
    const found = /^(\d{1,4})([-./])(\d{1,2})[-./](\d{1,4})/.exec(cell);
    return found ? [{ first: found[1]!, mark: found[2]!, second: Number(found[3]) }] : [];
  });
  if (parts.length === 0 || parts.some(({ first }) => first.length === 4)) return "ymd";
  if (parts.some(({ first }) => Number(first) > 12)) return "dmy";
  if (parts.some(({ second }) => second > 12)) return "mdy";
  return "dmy";
}

/** The unit that a column's values can be in, by where they lie. */
export function unitOfValues(values: readonly number[]): Unit {
  const sorted = values.toSorted((a, b) => a - b);
  const median = sorted[Math.floor(sorted.length / 2)];
  if (median === undefined) return "dB";
  if (median > 200) return "dB/10";
  return median > 0 && sorted.at(-1)! < 20 ? "Pa" : "dB";
}

/** Lines in front of the first one with values. */
function firstValues(rows: readonly (readonly string[])[], decimal: "." | ","): number | null {
  const count = (row: readonly string[], ...wanted: ReturnType<typeof shapeOf>[]) =>
    row.filter((cell) => wanted.includes(shapeOf(cell, decimal))).length;
  const isTimed = (row: readonly string[]) => count(row, "date-time", "time") > 0;
  for (const [index, row] of rows.entries()) {
    const isValues =
      (isTimed(row) && count(row, "number", "mark") > 0) || count(row, "number") >= 2;
    const next = rows.slice(index + 1).find((one) => one.some((cell) => cell !== ""));
    if (isValues && (!next || isTimed(next) || count(next, "number") >= 2)) return index;
  }
  return null;
}

/**
 * Date and time of day in two columns, by their heads or by what stands in them. A workbook writes midnight beside a day,
 * and the day zero before a time, so that each of them can look like both.
 */
function splitTime(
  heads: readonly string[],
  shapes: readonly ReturnType<typeof shapeOf>[],
  values: readonly (readonly string[])[],
): { dateColumn: number; timeColumn: number } | null {
  const named = (head: TimeHead, shape: "date" | "time") =>
    shapes.findIndex(
      (found, column) =>
        timeHead(heads[column] ?? "") === head && (found === shape || found === "date-time"),
    );
  const [byHead, byShape] = [named("date", "date"), shapes.indexOf("date-time")];
  const dateColumn = byHead >= 0 ? byHead : byShape;
  const timeColumn = named("time", "time") >= 0 ? named("time", "time") : shapes.indexOf("time");
  if (dateColumn < 0 || timeColumn < 0 || dateColumn === timeColumn || values.length < 2)
    return null;
  // A day whose own time moves on says both by itself.
  const clocks = new Set(values.map((row) => readDate(row[dateColumn] ?? "", "ymd")?.rest ?? ""));
  return clocks.size > 1 ? null : { dateColumn, timeColumn };
}

/** Whether anything in these lines is a number or a time: heads alone are no history. */
export const hasValues = (
  rows: readonly (readonly string[])[],
  decimal: "." | "," = ".",
): boolean =>
  rows.some((row) =>
    row.some((cell) => ["number", "date", "time", "date-time"].includes(shapeOf(cell, decimal))),
  );

/**
 * A mapping that fits the beginning of a file by its heads and its values; null where no time is recognised. Without a
 * level that is recognised it proposes none. Only a proposal: an officer looks at it.
 */
export function recognise(
  rows: readonly (readonly string[])[],
  delimiter: Delimiter,
  sheet: string | null,
  decimal: "." | "," = decimalOf(rows, delimiter),
): ProposedMapping | null {
  const first = firstValues(rows, decimal);
  if (first === null) return null;
  const values = rows.slice(first).filter((row) => row.some((cell) => cell !== ""));
  const heads = first > 0 ? rows[first - 1]! : [];
  const shapes = values[0]!.map((_, column) => {
    const seen = values
      .map((row) => shapeOf(row[column] ?? "", decimal))
      .filter((shape) => shape !== "empty");
    return seen.find((shape) => shape !== "text" && shape !== "mark") ?? seen[0] ?? "empty";
  });
  const find = (shape: (typeof shapes)[number]) => {
    const named = shapes.findIndex(
      (found, column) => found === shape && timeHead(heads[column] ?? "") !== null,
    );
    return named >= 0 ? named : shapes.indexOf(shape);
  };
  const [dateTime, date, clock] = [find("date-time"), find("date"), find("time")];
  const split = splitTime(heads, shapes, values);
  const elapsed = shapes.findIndex(
    (shape, column) => shape === "number" && timeHead(heads[column] ?? "") === "elapsed",
  );
  let time: HistoryMapping["time"];
  if (split) time = { kind: "date-and-time", ...split };
  else if (dateTime >= 0) time = { kind: "date-time", column: dateTime };
  else if (date >= 0 && clock >= 0)
    time = { kind: "date-and-time", dateColumn: date, timeColumn: clock };
  else if (clock >= 0)
    time =
      timeHead(heads[clock] ?? "") === "elapsed"
        ? { kind: "elapsed", column: clock, unit: "hh:mm:ss" }
        : { kind: "time-of-day", column: clock };
  else if (elapsed >= 0)
    time = {
      kind: "elapsed",
      column: elapsed,
      unit: /ms|milli/i.test(heads[elapsed] ?? "") ? "ms" : "s",
    };
  else return null;
  const taken = new Set<HistoryChannel>();
  const levels = shapes.flatMap((shape, column): HistoryMapping["levels"] => {
    const channel =
      shape === "number" && column !== elapsed ? channelOfHead(heads[column] ?? "") : null;
    if (!channel || taken.has(channel)) return [];
    taken.add(channel);
    const numbers = values.flatMap((row) => {
      const value = readValue(row[column] ?? "", { decimal, overRange: [], underRange: [] });
      return typeof value === "number" ? [value] : [];
    });
    const isPascals = /\[?\(?\bPa\b/.test(heads[column] ?? "");
    return [{ column, channel, unit: isPascals ? "Pa" : unitOfValues(numbers) }];
  });
  const dateColumn = split?.dateColumn ?? (dateTime >= 0 ? dateTime : date);
  return {
    sheet,
    delimiter,
    skipLines: first,
    decimal,
    time,
    dateOrder: dateOrderOf(values.map((row) => row[dateColumn] ?? "")),
    startsAt: null,
    clock: "site",
    levels,
    overRange: [],
    underRange: [],
  };
}

export { delimiterOf };
