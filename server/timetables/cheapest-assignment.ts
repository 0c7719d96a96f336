/**
 * One column for each row, no column twice, at the least cost in all (shortest augmenting paths with potentials). `cost` has
 * at least as many columns as rows; Infinity is never chosen. Null where there is no choice without it.
 */
export function cheapestAssignment(cost: readonly Float64Array[]): number[] | null {
  const rows = cost.length;
  const columns = cost[0]?.length ?? 0;
  const rowPrice = new Float64Array(rows + 1);
  const columnPrice = new Float64Array(columns + 1);
  /** The row of each column; 0 is none. Places count from 1. */
  const rowOf = new Int32Array(columns + 1);
  const cameFrom = new Int32Array(columns + 1);
  for (let row = 1; row <= rows; row++) {
    rowOf[0] = row;
    let at = 0;
    const least = new Float64Array(columns + 1).fill(Number.POSITIVE_INFINITY);
    const isSeen = new Uint8Array(columns + 1);
    do {
      isSeen[at] = 1;
      const own = rowOf[at]!;
      const ownCost = cost[own - 1]!;
      let step = Number.POSITIVE_INFINITY;
      let next = -1;
      for (let column = 1; column <= columns; column++) {
        if (isSeen[column]) continue;
        const reduced = ownCost[column - 1]! - rowPrice[own]! - columnPrice[column]!;
        if (reduced < least[column]!) {
          least[column] = reduced;
          cameFrom[column] = at;
        }
        if (least[column]! < step) {
          step = least[column]!;
          next = column;
        }
      }
      if (next < 0) return null;
      for (let column = 0; column <= columns; column++) {
        if (isSeen[column]) {
          rowPrice[rowOf[column]!]! += step;
          columnPrice[column]! -= step;
        } else least[column]! -= step;
      }
      at = next;
    } while (rowOf[at] !== 0);
    do {
      const before = cameFrom[at]!;
      rowOf[at] = rowOf[before]!;
      at = before;
    } while (at !== 0);
  }
  const chosen = new Array<number>(rows).fill(-1);
  for (let column = 1; column <= columns; column++)
    if (rowOf[column]! > 0) chosen[rowOf[column]! - 1] = column - 1;
  return chosen;
}
