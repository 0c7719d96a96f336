import type { ImportIssue } from "../../shared/schemas/import";
import type { ImportColumn } from "./columns";
import type { CsvFile, CsvLine } from "./read-csv";

const isFormula = (text: string) => /^['=+@]/.test(text) || /^-[^\d]/.test(text);

/**
 * Reads the cells of one file. A decimal comma counts where the comma does not part the columns; what could be either a
 * decimal or a thousand is refused, never guessed.
 */
export class Cells {
  readonly issues: ImportIssue[] = [];
  /** Codes by line and column. */
  private readonly refused = new Map<string, Set<string>>();
  private readonly refusedLines = new Set<number>();
  private readonly hasDecimalCommas: boolean;

  constructor(
    private readonly file: Pick<CsvFile, "delimiter" | "lines">,
    columns: readonly ImportColumn[],
  ) {
    const numeric = columns.filter(({ kind }) => kind === "number").map(({ name }) => name);
    this.hasDecimalCommas = file.lines.some(({ cells }) =>
      numeric.some((name) => /^-?\d+,\d+$/.test(cells.get(name) ?? "")),
    );
  }

  refuse({ line }: CsvLine, field: string, code: string, params: ImportIssue["params"] = {}): null {
    const cell = `${line} ${field}`;
    const codes = this.refused.get(cell) ?? new Set();
    if (!codes.has(code)) this.issues.push({ line, field, code, params });
    this.refused.set(cell, codes.add(code));
    this.refusedLines.add(line);
    return null;
  }

  /** What a schema finds in a cell that was refused already only follows from that, and is not said. */
  refuseUnlessRefused(at: CsvLine, field: string, code: string, params: ImportIssue["params"]) {
    if (!this.isRefused(at, field)) this.refuse(at, field, code, params);
  }

  isRefused({ line }: CsvLine, field: string): boolean {
    return this.refused.has(`${line} ${field}`);
  }

  /** Nothing was refused in any of these lines. */
  areGood(lines: readonly CsvLine[]): boolean {
    return !lines.some(({ line }) => this.refusedLines.has(line));
  }

  text({ cells }: CsvLine, field: string): string | null {
    return cells.get(field)?.normalize("NFC") || null;
  }

  needed(at: CsvLine, field: string): string | null {
    return this.text(at, field) ?? this.refuse(at, field, "empty");
  }

  number(at: CsvLine, field: string): number | null {
    const text = at.cells.get(field) ?? "";
    if (text === "") return null;
    if (isFormula(text)) return this.refuse(at, field, "formula-in-number");
    if (/^-?\d+$/.test(text)) return Number(text);
    if (/^-?\d+\.\d+$/.test(text)) {
      return this.hasDecimalCommas && /^-?\d{1,3}\.\d{3}$/.test(text)
        ? this.refuse(at, field, "number-ambiguous", { text })
        : Number(text);
    }
    if (/^-?\d+,\d+$/.test(text)) {
      const isAmbiguous = this.file.delimiter === "," || /^-?\d{1,3},\d{3}$/.test(text);
      return isAmbiguous
        ? this.refuse(at, field, "number-ambiguous", { text })
        : Number(text.replace(",", "."));
    }
    return this.refuse(at, field, "not-a-number", { text: text.slice(0, 40) });
  }

  neededNumber(at: CsvLine, field: string): number | null {
    return at.cells.get(field) ? this.number(at, field) : this.refuse(at, field, "empty");
  }

  date(at: CsvLine, field: string): string | null {
    const text = this.needed(at, field);
    if (text === null) return null;
    const isDate =
      /^\d{4}-\d{2}-\d{2}$/.test(text) &&
      !Number.isNaN(Date.parse(text)) &&
      new Date(text).toISOString().startsWith(text);
    return isDate ? text : this.refuse(at, field, "not-a-date", { text: text.slice(0, 40) });
  }

  time(at: CsvLine, field: string): string | null {
    const text = this.text(at, field);
    if (text === null) return null;
    const found = /^(\d{1,2}):([0-5]\d)(?::00)?$/.exec(text);
    return found && Number(found[1]) < 24
      ? `${found[1]!.padStart(2, "0")}:${found[2]}`
      : this.refuse(at, field, "not-a-time", { text: text.slice(0, 40) });
  }

  choice<Choice extends string>(
    at: CsvLine,
    field: string,
    choices: readonly Choice[],
  ): Choice | null {
    const text = this.text(at, field);
    if (text === null) return null;
    return (
      choices.find((choice) => choice.toLowerCase() === text.toLowerCase()) ??
      this.refuse(at, field, "not-a-choice", { choices: choices.join(", ") })
    );
  }
}
