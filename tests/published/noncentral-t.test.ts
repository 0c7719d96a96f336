import { describe, expect, test } from "vitest";
import {
  fTail,
  normalQuantile,
  normalShare,
  studentQuantile,
} from "../../shared/acoustics/distributions";
import {
  exceedanceBound,
  noncentralTQuantile,
  noncentralTShare,
  toleranceFactor,
} from "../../shared/acoustics/noncentral-t";
import "../setup/printed";

describe("printed tables of the distributions (handbooks, from memory)", () => {
  test.each([
    [0.9, "1.2816"],
    [0.95, "1.6449"],
    [0.975, "1.9600"],
    [0.99, "2.3263"],
    [0.05, "-1.6449"],
  ])("normal, %d: %s", (share, printed) => {
    expect(normalQuantile(share)).toAgreeWithPrinted(printed);
  });

  test.each([
    [0, "0.5000"],
    [1, "0.8413"],
    [1.96, "0.9750"],
    [-3, "0.0013"],
  ])("share below %d: %s", (x, printed) => {
    expect(normalShare(x)).toAgreeWithPrinted(printed);
  });

  test.each([
    [0.95, 1, "6.314"],
    [0.95, 2, "2.920"],
    [0.975, 5, "2.571"],
    [0.995, 10, "3.169"],
    [0.975, 30, "2.042"],
    [0.025, 5, "-2.571"],
  ])("Student's t, %d with %d degrees: %s", (share, degrees, printed) => {
    expect(studentQuantile(share, degrees)).toAgreeWithPrinted(printed);
  });

  test.each([
    [6.61, 1, 5],
    [3.1, 3, 20],
    [2.87, 4, 20],
    [4.1, 2, 10],
  ])("F of 5 %%: %d with %d and %d degrees", (f, above, below) => {
    expect(fTail(f, above, below)).toBeCloseTo(0.05, 3);
  });
});

describe("non-central t", () => {
  test("without noncentrality it is Student's", () => {
    for (const degrees of [1, 2, 5, 29, 300])
      for (const share of [0.05, 0.5, 0.95])
        expect(noncentralTShare(studentQuantile(share, degrees), degrees, 0)).toBeCloseTo(share, 8);
  });

  test("P(T ≤ 0) = Φ(−δ), whatever the degrees", () => {
    for (const degrees of [1, 4, 50])
      for (const noncentrality of [-1, 0.5, 2.5])
        expect(noncentralTShare(0, degrees, noncentrality)).toBeCloseTo(
          normalShare(-noncentrality),
          10,
        );
  });

  /** Computed elsewhere by another algorithm (a statistics library's non-central t). */
  test.each([
    [5, 1.6, 0.95, 4.5512681],
    [2, 2.849, 0.95, 13.2605334],
    [29, 9.0095, 0.95, 12.1588768],
    [9, 5.2, 0.05, 3.21576002],
  ])("quantile with %d degrees and δ = %d at %d", (degrees, noncentrality, share, expected) => {
    expect(
      Math.abs(noncentralTQuantile(share, degrees, noncentrality) - expected),
    ).toBeLessThanOrEqual(1e-6);
  });
});

describe("one-sided tolerance factors, 95 % of the population with 95 % confidence", () => {
  /** Computed elsewhere from the non-central t; n = 6 and n = 10 agree with handbooks (from memory). */
  const K: readonly (readonly [number, number])[] = [
    [3, 7.6559],
    [4, 5.143875],
    [5, 4.202681],
    [6, 3.707684],
    [7, 3.399469],
    [8, 3.187294],
    [9, 3.031238],
    [10, 2.910963],
    [11, 2.814994],
    [12, 2.736343],
    [13, 2.670504],
    [14, 2.614434],
    [15, 2.566],
    [16, 2.523659],
    [17, 2.486264],
    [18, 2.452947],
    [19, 2.423036],
    [20, 2.396002],
    [21, 2.371422],
    [22, 2.348955],
    [23, 2.328323],
    [24, 2.309294],
    [25, 2.291675],
    [26, 2.275305],
    [27, 2.260045],
    [28, 2.245779],
    [29, 2.232406],
    [30, 2.219838],
    [35, 2.16672],
    [40, 2.125494],
    [50, 2.064993],
    [60, 2.022159],
  ];

  test.each(K)("n = %d: %d", (count, expected) => {
    expect(Math.abs(toleranceFactor(count) - expected)).toBeLessThanOrEqual(1e-6);
  });

  /** Handbook tables for other shares, confidence 95 %, from memory. */
  test.each([
    [2, 0.95, "26.260"],
    [5, 0.9, "3.407"],
    [10, 0.9, "2.355"],
    [20, 0.9, "1.926"],
    [5, 0.99, "5.741"],
    [10, 0.99, "3.981"],
  ])("n = %d, share %d: %s", (count, share, printed) => {
    expect(toleranceFactor(count, share)).toAgreeWithPrinted(printed);
  });

  test("the exceedance of the tolerance limit is bounded by just 5 %", () => {
    for (const count of [2, 3, 6, 12, 30, 200])
      expect(exceedanceBound(count, toleranceFactor(count))).toBeCloseTo(0.05, 8);
  });

  test("the bound falls with distance and with the number of samples", () => {
    expect(exceedanceBound(6, 1)).toBeGreaterThan(exceedanceBound(6, 2));
    expect(exceedanceBound(6, 2)).toBeGreaterThan(exceedanceBound(24, 2));
    expect(exceedanceBound(6, 2)).toBeGreaterThan(normalShare(-2));
    expect(exceedanceBound(3, -50)).toBeGreaterThan(0.999);
    expect(exceedanceBound(3, 1e9)).toBeLessThan(1e-6);
  });
});
