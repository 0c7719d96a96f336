/** Words beside an upright line, placed so that no two print on each other. */
export interface PlacedLabel {
  /** Where the words begin or, with `isEnd`, where they end. */
  readonly x: number;
  readonly isEnd: boolean;
  /** 0 is the row next to the ticks. */
  readonly row: number;
  /** They have no room beside their own line, which ends above them then. */
  readonly isUnderLine: boolean;
}

interface Span {
  readonly lineX: number;
  readonly fromX: number;
  readonly toX: number;
  readonly row: number;
}

const GAP = 6;

/**
 * Rows for the words of upright lines: each stands beside its line, on the side that has room, in the first row where
 * neither other words nor another's line are in the way.
 */
export function placeLabels(
  labels: readonly { readonly lineX: number; readonly width: number }[],
  widthPx: number,
): PlacedLabel[] {
  const placed: Span[] = [];
  const isInRightHalf = ({ lineX }: { lineX: number }) => lineX > widthPx / 2;
  // From the edge inwards on: a line then passes no words of one placed before it.
  const order = labels
    .map((label, index) => ({ ...label, index, isEnd: isInRightHalf(label) }))
    .toSorted((a, b) => (a.isEnd && b.isEnd ? a.lineX - b.lineX : b.lineX - a.lineX));
  const result: PlacedLabel[] = labels.map(() => ({
    x: 0,
    isEnd: false,
    row: 0,
    isUnderLine: false,
  }));
  for (const { lineX, width, index, isEnd } of order) {
    const x = isEnd
      ? Math.min(widthPx, Math.max(width, lineX - GAP))
      : Math.max(0, Math.min(widthPx - width, lineX + GAP));
    const span = isEnd ? { fromX: x - width, toX: x } : { fromX: x, toX: x + width };
    const isFree = (row: number) =>
      placed.every((other) => {
        if (other.row === row) return span.toX + GAP < other.fromX || other.toX + GAP < span.fromX;
        if (other.row < row) return lineX < other.fromX || lineX > other.toX;
        return other.lineX < span.fromX || other.lineX > span.toX;
      });
    let row = 0;
    while (row < placed.length && !isFree(row)) row += 1;
    placed.push({ lineX, ...span, row });
    const isUnderLine = lineX > span.fromX && lineX < span.toX;
    result[index] = { x, isEnd, row, isUnderLine };
  }
  return result;
}
