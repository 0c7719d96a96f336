import type { SourceId } from "./sources";
import type {
  AttenuationMethod,
  CriterionResult,
  ProtectorWord,
  Reason,
  UncertaintyReason,
  Verdict,
} from "./types";

/** On which side of the true number a number stands, where it is not the true one. */
export type Bound = "upper" | "lower";

/** A message of the catalogue (its English text is its id) and what stands in its places. */
export interface WorkingText {
  readonly id: string;
  readonly values?: Readonly<Record<string, WorkingValue>>;
}

/** A number or a word, unrounded; whoever shows it rounds it by its kind. */
export type WorkingValue =
  | { readonly kind: "level"; readonly db: number; readonly bound?: Bound }
  | { readonly kind: "difference"; readonly db: number }
  | { readonly kind: "minutes"; readonly min: number }
  | { readonly kind: "share"; readonly pct: number }
  | { readonly kind: "dose"; readonly pct: number; readonly bound?: Bound }
  /** Shown as a mantissa and a power of ten. */
  | { readonly kind: "scientific"; readonly number: number }
  /** A constant or an intermediate number, to four figures. */
  | { readonly kind: "number"; readonly number: number }
  | { readonly kind: "verdict"; readonly verdict: Verdict; readonly isClear: boolean }
  | { readonly kind: "protector-word"; readonly word: ProtectorWord }
  | { readonly kind: "method"; readonly method: AttenuationMethod }
  | { readonly kind: "reason"; readonly reason: Reason | UncertaintyReason }
  /** ISO date. */
  | { readonly kind: "date"; readonly date: string }
  /** A name that somebody gave: not translated. */
  | { readonly kind: "name"; readonly name: string }
  | { readonly kind: "text"; readonly text: WorkingText }
  /** A document and its clause, shown in short. */
  | { readonly kind: "source"; readonly source: WorkingSource }
  | { readonly kind: "list"; readonly values: readonly WorkingValue[] }
  | { readonly kind: "math"; readonly parts: readonly MathPart[] };

/** What an equation is drawn from, in order. */
export type MathPart =
  | { readonly kind: "sign"; readonly text: string }
  | {
      readonly kind: "symbol";
      readonly base: string;
      readonly sub?: string;
      readonly isAtEar?: boolean;
    }
  | { readonly kind: "value"; readonly value: WorkingValue; readonly isResult?: boolean }
  | { readonly kind: "sum" }
  | {
      readonly kind: "fraction";
      readonly over: readonly MathPart[];
      readonly under: readonly MathPart[];
    }
  | { readonly kind: "power"; readonly base: string; readonly exponent: readonly MathPart[] };

export interface WorkingEquation {
  readonly number: number;
  /** What it is about, where a step has several: a task, a reading, a shift. */
  readonly label: WorkingValue | null;
  readonly parts: readonly MathPart[];
}

export interface WorkingColumn {
  readonly id: string;
  readonly title: WorkingText | null;
  /** Where the title is a formula. */
  readonly symbol: readonly MathPart[] | null;
  readonly isNumeric: boolean;
}

export interface WorkingRow {
  /** Timed task, criterion or method that the row is about. */
  readonly id: string;
  readonly cells: readonly (WorkingValue | null)[];
  readonly isTotal: boolean;
  /** The row that governs or decides. */
  readonly isEmphasized: boolean;
}

export interface WorkingTable {
  /** Where a step has several. */
  readonly title: WorkingText | null;
  readonly columns: readonly WorkingColumn[];
  readonly rows: readonly WorkingRow[];
}

/** A record that a step rests on. */
export interface WorkingRecord {
  readonly kind:
    | "shift-revision"
    | "level-revision"
    | "reading"
    | "run"
    | "protector-revision"
    | "assignment"
    | "wearing-round";
  readonly id: string;
}

export interface WorkingSource {
  /** Null where a rule set is cited itself. */
  readonly id: SourceId | null;
  /** As the document numbers it; its words (App., Table) are a message of the catalogue. */
  readonly clause: string;
}

/** A part of a step that is opened when wanted. */
export interface WorkingDetail {
  readonly id: string;
  readonly title: WorkingText;
  readonly tables: readonly WorkingTable[];
  readonly equations: readonly WorkingEquation[];
}

export interface WorkingStep {
  readonly number: number;
  readonly title: WorkingText;
  readonly tables: readonly WorkingTable[];
  readonly equations: readonly WorkingEquation[];
  readonly details: readonly WorkingDetail[];
  /** Parts of a whole, percent, in the order in which a bar shows them. */
  readonly shares: readonly { readonly label: WorkingText; readonly pct: number }[];
  readonly notes: readonly WorkingText[];
  readonly sources: readonly WorkingSource[];
  readonly records: readonly WorkingRecord[];
}

/** One of the lines at the head: the ear, the protector, the noise without it, and what has a figure of its own. */
export interface WorkingLine {
  readonly id: "at-the-ear" | "protector" | "without-protection" | `criterion-${string}`;
  readonly title: WorkingText;
  readonly level: WorkingValue | null;
  readonly uncertainty: WorkingValue | null;
  readonly outcome: WorkingValue | null;
  readonly remark: WorkingText | null;
}

/** A day's result taken apart: what went in, by which clause, with the numbers put in. Nothing is left to compute. */
export interface Working {
  readonly methodVersion: number;
  readonly date: string;
  readonly governing: {
    readonly key: string;
    readonly version: number;
    readonly title: string;
    readonly citation: string;
  };
  readonly lines: readonly WorkingLine[];
  readonly steps: readonly WorkingStep[];
}

export function text(id: string, values?: Readonly<Record<string, WorkingValue>>): WorkingText {
  return values ? { id, values } : { id };
}

export function column(id: string, title: WorkingText | null, isNumeric: boolean): WorkingColumn {
  return { id, title, symbol: null, isNumeric };
}

export function symbolColumn(
  id: string,
  title: WorkingText | null,
  parts: readonly MathPart[],
): WorkingColumn {
  return { id, title, symbol: parts, isNumeric: true };
}

export function row(id: string, cells: readonly (WorkingValue | null)[]): WorkingRow {
  return { id, cells, isTotal: false, isEmphasized: false };
}

export function level(db: number): WorkingValue;
export function level(db: number | null): WorkingValue | null;
export function level(db: number | null): WorkingValue | null {
  return db === null ? null : { kind: "level", db };
}

export function difference(db: number): WorkingValue;
export function difference(db: number | null): WorkingValue | null;
export function difference(db: number | null): WorkingValue | null {
  return db === null ? null : { kind: "difference", db };
}

export function minutes(min: number): WorkingValue {
  return { kind: "minutes", min };
}

export function share(pct: number | null): WorkingValue | null {
  return pct === null ? null : { kind: "share", pct };
}

export function number(of: number): WorkingValue {
  return { kind: "number", number: of };
}

export function name(of: string): WorkingValue {
  return { kind: "name", name: of };
}

export function date(of: string): WorkingValue {
  return { kind: "date", date: of };
}

export function reason(of: Reason | UncertaintyReason): WorkingValue {
  return { kind: "reason", reason: of };
}

export function word(of: ProtectorWord | null): WorkingValue | null {
  return of === null ? null : { kind: "protector-word", word: of };
}

export function verdict(result: CriterionResult): WorkingValue {
  return { kind: "verdict", verdict: result.verdict, isClear: result.isClear };
}

export function sign(signs: string): MathPart {
  return { kind: "sign", text: signs };
}

export function symbol(base: string, sub?: string, isAtEar?: boolean): MathPart {
  return { kind: "symbol", base, ...(sub ? { sub } : {}), ...(isAtEar ? { isAtEar } : {}) };
}

export function value(of: WorkingValue, isResult?: boolean): MathPart {
  return { kind: "value", value: of, ...(isResult ? { isResult } : {}) };
}

export function fraction(over: readonly MathPart[], under: readonly MathPart[]): MathPart {
  return { kind: "fraction", over, under };
}

export function power(base: string, exponent: readonly MathPart[]): MathPart {
  return { kind: "power", base, exponent };
}

export function unique<T>(items: readonly T[]): T[] {
  const seen = new Map(items.map((item) => [JSON.stringify(item), item]));
  return [...seen.values()];
}

export function dose(pct: number): WorkingValue {
  return { kind: "dose", pct };
}

/** A number with the side on which it stands; plain where it is the true one. */
export function bounded<V extends WorkingValue>(of: V, bound: Bound | null): V {
  return bound === null ? of : { ...of, bound };
}

export function scientific(of: number): WorkingValue {
  return { kind: "scientific", number: of };
}

/** Where a row has documents of its own; null where there is nothing to cite. */
export function cited(sources: readonly WorkingSource[]): WorkingValue | null {
  const values = sources.flatMap((source) =>
    source.id === null ? [] : [{ kind: "source", source } as const],
  );
  return values.length === 0 ? null : { kind: "list", values };
}

export function words(of: WorkingText): WorkingValue {
  return { kind: "text", text: of };
}

export function table(
  columns: readonly WorkingColumn[],
  rows: readonly WorkingRow[],
  title: WorkingText | null = null,
): WorkingTable {
  return { title, columns, rows };
}

/** How a figure stands to the number that is known of it. */
export const relationOf = (bound: Bound | null): string =>
  bound === null ? "=" : bound === "upper" ? "≤" : "≥";

/** An equation whose result is only a bound: its first sign says so. */
export function related(parts: readonly MathPart[], bound: Bound | null): readonly MathPart[] {
  const at = parts.findIndex((part) => part.kind === "sign" && part.text.startsWith("="));
  return parts.map((part, index) =>
    index === at && part.kind === "sign" ? sign(relationOf(bound) + part.text.slice(1)) : part,
  );
}

/** Several parts between their signs: a + b + c. */
export function between(parts: readonly (readonly MathPart[])[], by: string): MathPart[] {
  return parts.flatMap((part, index) => (index === 0 ? part : [sign(by), ...part]));
}

export const SUM: MathPart = { kind: "sum" };
export const MINUTES_OVER_T0: MathPart = fraction([symbol("T", "m")], [symbol("T", "0")]);

/** An equation before it has its number. */
export interface Line {
  readonly label: WorkingValue | null;
  readonly parts: readonly MathPart[];
}

export function line(parts: readonly MathPart[], label: WorkingValue | null = null): Line {
  return { label, parts };
}
