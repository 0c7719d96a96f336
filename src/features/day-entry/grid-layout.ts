import type { ColumnId, GridColumn } from "./columns";
import { syllables } from "./syllables";

type Widths = Readonly<Record<Exclude<ColumnId, `task:${string}` | "result">, number>> & {
  readonly who: number;
  readonly ear: number;
  readonly strip: number;
  readonly outside: number;
  readonly word: number;
};

/** Widths that the fixed columns need, px; the protector's is the least and takes what is left. */
const WIDE_PX: Widths = {
  who: 146,
  start: 60,
  length: 52,
  unaccounted: 80,
  sum: 48,
  reading: 110,
  protector: 104,
  worn: 60,
  ear: 120,
  strip: 178,
  outside: 118,
  word: 124,
};
/** Under a rule of doses: a figure and its verdict beside one another, and at the ear neither verdict nor uncertainty. */
const DOSE_PX: Pick<Widths, "ear" | "outside" | "word"> = { ear: 96, outside: 138, word: 132 };
/** "Sedge band: Teardown" in one line: room to spare goes there first. */
const PROTECTOR_WISH_PX = 152;
/** The deciding task and its level have one line: half of what is left then goes there, up to this. */
const MOST_WORD_PX = 156;
const NARROW_PX: Widths = {
  who: 138,
  start: 58,
  length: 50,
  unaccounted: 74,
  sum: 46,
  reading: 80,
  protector: 90,
  worn: 58,
  ear: 0,
  strip: 178,
  outside: 0,
  word: 116,
};

/** Five digits and the room beside them. */
const LEAST_TASK_PX = 50;
const BESIDE_PX = 9;

/** About how wide a text is in the bold type of a task's head, px: enough to say whether a word has room. */
function textPx(text: string): number {
  let px = 0;
  for (const letter of text) {
    if (/[ijltI.,'|]/.test(letter)) px += 4;
    else if (/[fr\-()]/.test(letter)) px += 5;
    else if (/[mwMW]/.test(letter)) px += 10.5;
    else px += /\p{Lu}/u.test(letter) ? 8.4 : 7.2;
  }
  return px;
}

const wordsOf = (name: string) => name.split(/\s+|(?<=-)/).filter((word) => word !== "");
const widest = (pieces: readonly string[]) =>
  Math.ceil(Math.max(LEAST_TASK_PX, ...pieces.map((piece) => textPx(piece) + BESIDE_PX)));

/** With every word whole, px. */
const wholePx = (name: string) => widest(wordsOf(name));
/** With words broken where they may be, px. */
const brokenPx = (name: string) =>
  widest(
    wordsOf(name).flatMap((word) => {
      const parts = syllables(word);
      return parts.map((part, at) => (at < parts.length - 1 ? `${part}-` : part));
    }),
  );

export interface GridLayout {
  /** All that is worked out stands beside the strip; else only the strip and the words. */
  readonly isWide: boolean;
  readonly fixedPx: Widths;
  readonly tasksPx: ReadonlyMap<string, number>;
  /** Tasks whose name has to be broken within a word. */
  readonly broken: ReadonlySet<string>;
  readonly minWidthPx: number;
}

/**
 * Widths of the columns in the room that there is. Task heads give way first, longest last: their words are broken before
 * the worked-out half loses its figures, and that before anything has to be scrolled to.
 */
export function gridLayout(
  columns: readonly GridColumn[],
  roomPx: number | null,
  isOfDoses = false,
): GridLayout {
  const widePx = isOfDoses ? { ...WIDE_PX, ...DOSE_PX } : WIDE_PX;
  const tasks = columns.flatMap(({ task }) => (task ? [task] : []));
  const needs = tasks.map(({ id, name }) => {
    const leastPx = brokenPx(name);
    return { id, leastPx, wishPx: Math.max(leastPx, wholePx(name)) };
  });
  const leastPx = needs.reduce((sum, need) => sum + need.leastPx, 0);
  const sumOf = (widths: Widths) => Object.values(widths).reduce((sum, px) => sum + px, 0);
  const isWide = roomPx === null || sumOf(widePx) + leastPx <= roomPx;
  const neededPx = isWide ? widePx : NARROW_PX;
  // Where it has to be scrolled all the same, nothing is broken for it.
  const hasRoom = roomPx !== null && sumOf(neededPx) + leastPx <= roomPx;
  let sparePx = hasRoom ? roomPx - sumOf(neededPx) - leastPx : Number.POSITIVE_INFINITY;
  const tasksPx = new Map<string, number>();
  const broken = new Set<string>();
  for (const { id, leastPx: px, wishPx } of needs.toSorted(
    (a, b) => a.wishPx - a.leastPx - (b.wishPx - b.leastPx),
  )) {
    const isWhole = wishPx - px <= sparePx;
    if (isWhole) sparePx -= wishPx - px;
    else broken.add(id);
    tasksPx.set(id, isWhole ? wishPx : px);
  }
  const leftPx = Math.max(0, sparePx - Math.max(0, PROTECTOR_WISH_PX - neededPx.protector));
  const word =
    isWide && hasRoom
      ? Math.min(MOST_WORD_PX, neededPx.word + Math.floor(leftPx / 2))
      : neededPx.word;
  const fixedPx = { ...neededPx, word };
  const minWidthPx = [...tasksPx.values()].reduce((sum, px) => sum + px, sumOf(fixedPx));
  return { isWide, fixedPx, tasksPx, broken, minWidthPx };
}
