/**
 * Coefficients x that bring Σ x_k·columns_k nearest to the wanted values in the sense of least squares. Columns are
 * brought to one size first: powers of a small number would otherwise spoil the normal equations.
 *
 * @throws RangeError when the columns do not determine the coefficients.
 */
export function leastSquares(
  columns: readonly Float64Array[],
  wanted: Float64Array,
): readonly number[] {
  const sizes = columns.map((column) => Math.sqrt(dot(column, column)));
  const rows = columns.map((column, row) => [
    ...columns.map((other, place) => dot(column, other) / (sizes[row]! * sizes[place]!)),
    dot(column, wanted) / sizes[row]!,
  ]);
  return solve(rows).map((value, place) => value / sizes[place]!);
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let index = 0; index < a.length; index++) sum += a[index]! * b[index]!;
  return sum;
}

/** Gaussian elimination with pivots; each row ends in its right-hand side. */
function solve(rows: number[][]): number[] {
  const count = rows.length;
  for (let step = 0; step < count; step++) {
    let pivot = step;
    for (let row = step + 1; row < count; row++)
      if (Math.abs(rows[row]![step]!) > Math.abs(rows[pivot]![step]!)) pivot = row;
    [rows[step], rows[pivot]] = [rows[pivot]!, rows[step]!];
    const head = rows[step]!;
    if (!(Math.abs(head[step]!) > 1e-14)) throw new RangeError("the fit is not determined");
    for (let row = step + 1; row < count; row++) {
      const factor = rows[row]![step]! / head[step]!;
      for (let place = step; place <= count; place++) rows[row]![place]! -= factor * head[place]!;
    }
  }
  const result = new Array<number>(count).fill(0);
  for (let row = count - 1; row >= 0; row--) {
    let value = rows[row]![count]!;
    for (let place = row + 1; place < count; place++) value -= rows[row]![place]! * result[place]!;
    result[row] = value / rows[row]![row]!;
  }
  return result;
}
