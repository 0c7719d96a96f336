import type { Verdict } from "../../shared/acoustics/types";
import type { Locale } from "../../shared/i18n";

/** A cell's text in lines; the first may say a verdict, whose shape stands before it. */
export interface Cell {
  readonly lines: readonly string[];
  readonly verdict?: Verdict;
  /** Line with the verdict. */
  readonly verdictLine?: number;
  readonly isStrong?: boolean;
}

export interface Column {
  readonly head: string;
  /** Share of the page's width. */
  readonly width: number;
  readonly isFigure?: boolean;
  /** Small: ids and hashes. */
  readonly isId?: boolean;
}

/** What a picture draws with: places in points from its upper left corner. */
export interface Pencil {
  readonly widthPt: number;
  line(x1: number, y1: number, x2: number, y2: number, look?: LineLook): void;
  box(x: number, y: number, width: number, height: number, fill: Ink): void;
  text(text: string, x: number, y: number, align?: "left" | "center" | "right"): void;
}

export type Ink = "ink" | "muted" | "hair" | "bar" | "pale";
export interface LineLook {
  readonly ink?: Ink;
  readonly widthPt?: number;
  readonly dash?: readonly [number, number];
}

export type Block =
  | { readonly kind: "heading"; readonly text: string }
  | { readonly kind: "text"; readonly text: string; readonly isQuiet?: boolean }
  | { readonly kind: "facts"; readonly rows: readonly (readonly [label: string, value: string])[] }
  | {
      readonly kind: "table";
      /** What it is a table of, for who hears it read. */
      readonly summary: string;
      readonly columns: readonly Column[];
      readonly rows: readonly (readonly (string | Cell)[])[];
      /** In place of rows, where there are none. */
      readonly empty: string;
    }
  | {
      readonly kind: "picture";
      /** Says in words what it shows: a table with the same figures follows it. */
      readonly alt: string;
      readonly heightPt: number;
      readonly draw: (pencil: Pencil) => void;
    };

/** A report as what it says, in its reader's language and rounded as screens round; `layOut` makes pages of it. */
export interface Report {
  readonly language: Locale;
  readonly title: string;
  /** One sentence under the title that says what matters. */
  readonly lead: string;
  readonly blocks: readonly Block[];
  /** At the foot of each page: whose it is and as of when, then the head of the trail. */
  readonly foot: readonly [whose: string, trail: string];
  /** "Page 2 of 7" in the report's language. */
  readonly pageOf: (page: number, pages: number) => string;
  /** When it was made, for the file's own record of itself. */
  readonly madeAt: Date;
  readonly author: string;
}
