import type { FigureCell } from "../../shared/schemas/site-figures";

/** Fewer people than that are not counted out loud: who knows the crew would know whom. */
export const FEWEST = 5;

/** What the counts of a row have to do with one another; the first cell is what the others are parts of. */
export interface RowShape {
  /** Cells that make up the first one together. */
  readonly parts: readonly number[];
  /** Cells of which the second counts some of the first's people: the rest of them could be had by subtraction. */
  readonly nested: readonly (readonly [number, number])[];
}

interface Cell {
  readonly count: number;
  shown: "yes" | "few" | "withheld";
}

const isFew = (count: number) => count > 0 && count < FEWEST;
const smallest = (cells: readonly Cell[]) =>
  cells
    .filter(({ shown, count }) => shown === "yes" && count > 0)
    .sort((a, b) => a.count - b.count)[0];

/**
 * Cells that add up to a known sum: whether those not shown could be worked out from it. One alone is the difference; several
 * of fewer than five are known where their sum leaves one way only, and small as a whole where it is itself fewer than five.
 */
function isWorkedOut(cells: readonly Cell[]): boolean {
  const hidden = cells.filter(({ shown, count }) => shown !== "yes" && count > 0);
  if (hidden.length < 2) return hidden.length === 1;
  if (hidden.some(({ shown }) => shown === "withheld")) return false;
  const sum = hidden.reduce((total, { count }) => total + count, 0);
  return sum < FEWEST || sum === hidden.length || sum === hidden.length * (FEWEST - 1);
}

/** Hides more until nothing can be worked out: another of the cells, or else what they add up to. True: something changed. */
function hideMore(cells: readonly Cell[], sum: Cell): boolean {
  if (sum.shown !== "yes" || !isWorkedOut(cells)) return false;
  (smallest(cells) ?? sum).shown = "withheld";
  return true;
}

/** More people than any site has. */
const MOST = 1e9;

interface Sum {
  readonly of: readonly Cell[];
  readonly is: Cell;
}

/** The least and the most that each cell can be for whoever sees what is shown and knows which cells add up to which. */
function bounds(sums: readonly Sum[]): Map<Cell, [number, number]> {
  const known = new Map<Cell, [number, number]>();
  const start = ({ shown, count }: Cell): [number, number] =>
    shown === "yes" ? [count, count] : [0, shown === "few" ? FEWEST - 1 : MOST];
  for (const { of, is } of sums) for (const cell of [...of, is]) known.set(cell, start(cell));
  const narrow = (cell: Cell, least: number, most: number): boolean => {
    const [low, high] = known.get(cell) ?? start(cell);
    if (least <= low && most >= high) return false;
    known.set(cell, [Math.max(low, least), Math.min(high, most)]);
    return true;
  };
  const at = (cell: Cell) => known.get(cell) ?? start(cell);
  let isNarrower = true;
  while (isNarrower) {
    isNarrower = false;
    for (const { of, is } of sums) {
      const least = of.reduce((total, cell) => total + at(cell)[0], 0);
      const most = of.reduce((total, cell) => total + at(cell)[1], 0);
      if (narrow(is, least, most)) isNarrower = true;
      const [low, high] = at(is);
      for (const cell of of) {
        const [own, ownMost] = at(cell);
        if (narrow(cell, low - (most - ownMost), high - (least - own))) isNarrower = true;
      }
    }
  }
  return known;
}

/** Where a person stands in several rows, or in none, they do not add up: nobody works anything out of that. */
const holds = ({ of, is }: Sum) => of.reduce((total, { count }) => total + count, 0) === is.count;

/** Where several sums together leave a cell that is not shown one value only, hides one more. True: something changed. */
function hideWhatSumsLeave(sums: readonly Sum[]): boolean {
  const known = bounds(sums);
  const isGiven = (cell: Cell) => {
    const [low, high] = known.get(cell) ?? [0, 1];
    return cell.shown !== "yes" && cell.count > 0 && low === high;
  };
  const given = sums.filter(({ of, is }) => [...of, is].some(isGiven));
  const next =
    smallest(given.flatMap(({ of, is }) => [...of, is])) ?? smallest(sums.map(({ is }) => is));
  if (given.length === 0 || !next) return false;
  next.shown = "withheld";
  return true;
}

/**
 * Counts of people as they may be shown: fewer than five are not, and neither is what would give them away by subtraction,
 * within a row, or from the total over a table's rows. Tables may count one person in several rows; they are treated as if
 * nobody were. Zero is shown, but in a row about fewer than five; there it is not kept from whoever works it out.
 */
export function protectCounts(
  shape: RowShape,
  tables: readonly (readonly (readonly number[])[])[],
  total: readonly number[] | null = null,
): { tables: FigureCell[][][]; total: FigureCell[] | null } {
  const open = (counts: readonly number[]): Cell[] =>
    counts.map((count) => ({
      count,
      shown: isFew(count) || (isFew(counts[0] ?? 0) && count < FEWEST) ? "few" : "yes",
    }));
  const openTables = tables.map((rows) => rows.map(open));
  const openTotal = total && open(total);
  const everyRow = [...openTables.flat(), ...(openTotal ? [openTotal] : [])];
  const partsOf = (row: readonly Cell[]) => shape.parts.flatMap((at) => row[at] ?? []);
  const sums: Sum[] = [
    ...everyRow.flatMap((row) =>
      row[0] && shape.parts.length > 0 ? { of: partsOf(row), is: row[0] } : [],
    ),
    ...(openTotal ?? []).flatMap((is, at) =>
      openTables.map((rows) => ({ of: rows.flatMap((row) => row[at] ?? []), is })),
    ),
  ];

  const hideRests = () => {
    let isChanged = false;
    for (const row of everyRow)
      for (const [whole, part] of shape.nested) {
        const [a, b] = [row[whole], row[part]];
        if (a?.shown !== "yes" || b?.shown !== "yes" || !isFew(Math.abs(a.count - b.count)))
          continue;
        b.shown = "withheld";
        isChanged = true;
      }
    for (const { of, is } of sums) if (hideMore(of, is)) isChanged = true;
    return isChanged;
  };
  const exact = sums.filter(holds);
  while (hideRests() || hideWhatSumsLeave(exact));

  const close = (row: readonly Cell[]) =>
    row.map(({ count, shown }): FigureCell => (shown === "yes" ? count : shown));
  return {
    tables: openTables.map((rows) => rows.map(close)),
    total: openTotal && close(openTotal),
  };
}
