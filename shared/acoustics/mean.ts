/** Arithmetic mean. NaN of nothing: whoever calls it knows that there is something. */
export function arithmeticMean(values: readonly number[]): number {
  let sum = 0;
  for (const value of values) sum += value;
  return sum / values.length;
}
