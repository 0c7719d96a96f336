import type { I18n } from "@lingui/core";
import type { Working, WorkingTable, WorkingValue } from "../../../shared/acoustics/working";
import { guardFormula } from "../../../shared/format/csv";
import type { Locale } from "../../../shared/i18n/index";
import { mathText, sourceText, workingText, workingValueText } from "./working-words";

const field = (text: string): string =>
  /[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;

interface Stored {
  number: number;
  unit: string;
}

/** The number as it is stored, unrounded, with its unit; null where the value is words. */
function stored(value: WorkingValue): Stored | null {
  switch (value.kind) {
    case "level":
    case "difference":
      return { number: value.db, unit: "dB" };
    case "minutes":
      return { number: value.min, unit: "min" };
    case "share":
    case "dose":
      return { number: value.pct, unit: "%" };
    case "scientific":
    case "number":
      return { number: value.number, unit: "1" };
    default:
      return null;
  }
}

/**
 * The working as CSV (RFC 4180): a line for each cell and equation, numbers unrounded with a decimal point, and at the end
 * the count of its lines.
 */
export function workingCsv(
  i18n: I18n,
  locale: Locale,
  working: Working,
  workingId: string,
): string {
  const lines: string[][] = [
    ["working", "step", "title", "part", "row", "column", "value", "unit"],
  ];
  const add = (
    step: string,
    title: string,
    part: string,
    row: string,
    column: string,
    value: WorkingValue | null,
  ) => {
    if (value === null) return;
    const number = stored(value);
    lines.push([
      workingId,
      step,
      guardFormula(title),
      part,
      guardFormula(row),
      guardFormula(column),
      number ? String(number.number) : guardFormula(workingValueText(i18n, locale, value)),
      number?.unit ?? "",
    ]);
  };
  const text = (value: string): WorkingValue => ({ kind: "name", name: value });
  const addTable = (step: string, title: string, { title: of, columns, rows }: WorkingTable) => {
    const about = of ? `${workingText(i18n, locale, of)}: ` : "";
    const heads = columns.map((column) =>
      [
        column.title && workingText(i18n, locale, column.title),
        column.symbol && mathText(i18n, locale, column.symbol),
      ]
        .filter(Boolean)
        .join(" "),
    );
    for (const row of rows) {
      const [first] = row.cells;
      const name = first ? workingValueText(i18n, locale, first) : row.id;
      row.cells.forEach((cell, index) => {
        if (index === 0) return;
        add(step, title, "table", `${about}${name}`, heads[index] ?? "", cell);
        if (cell?.kind === "level" && cell.bound)
          add(step, title, "bound", `${about}${name}`, heads[index] ?? "", text(cell.bound));
      });
    }
  };
  add("0", "", "rule set", "", "", text(`${working.governing.key}, ${working.governing.version}`));
  add("0", "", "method version", "", "", { kind: "number", number: working.methodVersion });
  add("0", "", "date", "", "", text(working.date));
  for (const line of working.lines) {
    const title = workingText(i18n, locale, line.title);
    add("0", title, "level", "", "", line.level);
    if (line.level?.kind === "level" && line.level.bound)
      add("0", title, "bound", "", "", text(line.level.bound));
    add("0", title, "uncertainty", "", "", line.uncertainty);
    add("0", title, "verdict", "", "", line.outcome);
    if (line.remark) add("0", title, "remark", "", "", { kind: "text", text: line.remark });
  }
  for (const step of working.steps) {
    const number = String(step.number);
    const title = workingText(i18n, locale, step.title);
    for (const { tables, equations } of [step, ...step.details]) {
      for (const table of tables) addTable(number, title, table);
      for (const { number: equation, label, parts } of equations)
        add(
          number,
          title,
          `equation ${equation}`,
          label ? workingValueText(i18n, locale, label) : "",
          "",
          text(mathText(i18n, locale, parts)),
        );
    }
    for (const share of step.shares)
      add(number, title, "share", workingText(i18n, locale, share.label), "", {
        kind: "share",
        pct: share.pct,
      });
    for (const note of step.notes) add(number, title, "note", "", "", { kind: "text", text: note });
    for (const source of step.sources)
      add(number, title, "source", "", "", text(sourceText(i18n, source)));
  }
  lines.push([workingId, "", "", "lines", "", "", String(lines.length - 1), "1"]);
  return `${lines.map((line) => line.map(field).join(",")).join("\r\n")}\r\n`;
}
