/** Rows from which on only those in sight are drawn. */
export const MANY_ROWS = 40;
/** Drawn above and below what is in sight. */
const MARGIN_ROWS = 6;

export type Segment =
  | { readonly kind: "row"; readonly index: number }
  | { readonly kind: "gap"; readonly heightPx: number };

/** Top of every row and the end of the last, px. */
export function rowTops(heightsPx: readonly number[]): number[] {
  const tops = [0];
  for (const height of heightsPx) tops.push((tops.at(-1) ?? 0) + height);
  return tops;
}

/** The last row whose top is not below a place. */
function rowAt(tops: readonly number[], y: number): number {
  let low = 0;
  let high = Math.max(0, tops.length - 2);
  while (low < high) {
    const middle = Math.ceil((low + high) / 2);
    if ((tops[middle] ?? 0) <= y) low = middle;
    else high = middle - 1;
  }
  return low;
}

/** What is drawn: the rows in sight, the one with the focus wherever it is, and gaps for the others. */
export function visibleSegments(
  tops: readonly number[],
  scrollTop: number,
  heightPx: number,
  keptRow: number,
): Segment[] {
  const count = tops.length - 1;
  if (count <= 0) return [];
  const first = Math.max(0, rowAt(tops, scrollTop) - MARGIN_ROWS);
  const last = Math.min(count - 1, rowAt(tops, scrollTop + heightPx) + MARGIN_ROWS);
  const indexes: number[] = [];
  if (keptRow >= 0 && keptRow < first) indexes.push(keptRow);
  for (let index = first; index <= last; index += 1) indexes.push(index);
  if (keptRow > last && keptRow < count) indexes.push(keptRow);
  const segments: Segment[] = [];
  let next = 0;
  const gapTo = (index: number) => {
    const heightOfGap = (tops[index] ?? 0) - (tops[next] ?? 0);
    if (heightOfGap > 0) segments.push({ kind: "gap", heightPx: heightOfGap });
  };
  for (const index of indexes) {
    gapTo(index);
    segments.push({ kind: "row", index });
    next = index + 1;
  }
  gapTo(count);
  return segments;
}
