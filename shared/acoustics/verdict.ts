import type { Criterion } from "./types";

type Comparator = Criterion["comparator"];

/**
 * Binary arithmetic gives 10·lg 10^8.7 as 87.00000000000001. A relative 10⁻¹¹ is that machine's noise and no rounding:
 * it is a billionth of a decibel.
 */
const MACHINE_NOISE = 1e-11;

/** Whether a number is past the value: *exceeds* needs more than the value, *reaches* as much. */
export function isPast(amount: number, value: number, comparator: Comparator): boolean {
  const slack = Math.abs(value) * MACHINE_NOISE;
  return comparator === "exceeds" ? amount > value + slack : amount >= value - slack;
}

/**
 * Verdict on a quantity known to lie between `least` and `most` (equal where it is known), unrounded. Over by the
 * least that is possible; Under where even the most, with its expanded uncertainty, is not past the value.
 *
 * @source iso-9612-2009 15 and C.2: one-sided interval L + U
 */
export function judge(
  least: number,
  most: number,
  value: number,
  comparator: Comparator,
  uncertaintyDb: number | null,
): "over" | "under" | "undecided" {
  if (isPast(least, value, comparator)) return "over";
  return isPast(most + (uncertaintyDb ?? 0), value, comparator) ? "undecided" : "under";
}

/** Over even at L − U. Without an uncertainty nothing is called clear. */
export function isClearlyOver(
  least: number,
  value: number,
  comparator: Comparator,
  uncertaintyDb: number | null,
): boolean {
  return uncertaintyDb !== null && isPast(least - uncertaintyDb, value, comparator);
}
