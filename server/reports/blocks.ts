import type { Verdict } from "../../shared/acoustics/types";
import type { Locale } from "../../shared/i18n";

/** A cell's text in lines; the first may say a verdict, whose shape stands before it. */
export interface Cell {
  readonly lines: readonly string[];
  readonly verdict?: Verdict;
  /** Line with the verdict. */
  readonly verdictLine?: number;
  readonly isStrong?: boolean | "first line";
  /** Stands over the lines, which say the same: who hears the page read is told only by them. */
  readonly picture?: Picture;
}

export interface Picture {
  readonly heightPt: number;
  readonly draw: (pencil: Pencil) => void;
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
  /** Filled, of at least three corners. */
  shape(corners: readonly (readonly [x: number, y: number])[], fill: Ink): void;
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
      /** Ruled, with room to write in by hand. */
      readonly isForm?: boolean;
    }
  | ({
      readonly kind: "picture";
      /** Says in words what it shows: a table with the same figures follows it. */
      readonly alt: string;
    } & Picture)
  | {
      /** To be ticked by hand: a box before each text, or after it one for each answer. */
      readonly kind: "checks";
      readonly rows: readonly {
        readonly text: string;
        readonly answers?: readonly { readonly text: string; readonly isTicked: boolean }[];
      }[];
    }
  | {
      /** Lines side by side to write on, each with what belongs there beneath it and what is known already on it. */
      readonly kind: "blanks";
      readonly blanks: readonly { readonly label: string; readonly value?: string }[];
      readonly roomPt: number;
    }
  /** An empty frame to write in. */
  | { readonly kind: "room"; readonly heightPt: number };

/** Pages that belong together: they begin a page, have a title and are counted by themselves. */
export interface Sheet {
  readonly language: Locale;
  /** In larger letters, for who reads it standing. */
  readonly isLarge?: boolean;
  readonly title: string;
  /** One sentence under the title that says what matters. */
  readonly lead: string;
  readonly blocks: readonly Block[];
  /** At the foot of each page: whose it is and as of when, then the head of the trail. */
  readonly foot: readonly [whose: string, trail: string];
  /** "Page 2 of 7" in the sheet's language. */
  readonly pageOf: (page: number, pages: number) => string;
}

/** A report as what it says, in its reader's language and rounded as screens round; `layOut` makes pages of it. */
export interface Report extends Sheet {
  /** What follows it in the same file, each for a reader of its own. */
  readonly more?: readonly Sheet[];
  /** What the file is called where its first sheet's title doesn't say it. */
  readonly fileTitle?: string;
  /** When it was made, for the file's own record of itself. */
  readonly madeAt: Date;
  readonly author: string;
}
