import { describe, expect, test } from "vitest";
import { SAMPLE_RATES_HZ } from "../../shared/acoustics/signal";
import { WeightedLevels } from "../../shared/acoustics/signal/weighted-levels";
import { aWeightingDb, cWeightingDb } from "../../shared/acoustics/signal/weighting";

/**
 * IEC 61672-1, Table 3: A and C at the nominal frequencies (67 of 68 cells equal the analytic value at the exact
 * base-ten frequency, rounded; A at 160 Hz lies on the edge) and the acceptance limits of class 1 in the 2013 edition.
 * Limits from memory.
 */
const TABLE_3: [nominal: string, a: string, c: string, above: number, below: number][] = [
  ["10", "-70.4", "-14.3", 3.0, Number.POSITIVE_INFINITY],
  ["12.5", "-63.4", "-11.2", 2.5, Number.POSITIVE_INFINITY],
  ["16", "-56.7", "-8.5", 2.0, 4.0],
  ["20", "-50.5", "-6.2", 2.0, 2.0],
  ["25", "-44.7", "-4.4", 2.0, 1.5],
  ["31.5", "-39.4", "-3.0", 1.5, 1.5],
  ["40", "-34.6", "-2.0", 1.0, 1.0],
  ["50", "-30.2", "-1.3", 1.0, 1.0],
  ["63", "-26.2", "-0.8", 1.0, 1.0],
  ["80", "-22.5", "-0.5", 1.0, 1.0],
  ["100", "-19.1", "-0.3", 1.0, 1.0],
  ["125", "-16.1", "-0.2", 1.0, 1.0],
  ["160", "-13.4", "-0.1", 1.0, 1.0],
  ["200", "-10.9", "0.0", 1.0, 1.0],
  ["250", "-8.6", "0.0", 1.0, 1.0],
  ["315", "-6.6", "0.0", 1.0, 1.0],
  ["400", "-4.8", "0.0", 1.0, 1.0],
  ["500", "-3.2", "0.0", 1.0, 1.0],
  ["630", "-1.9", "0.0", 1.0, 1.0],
  ["800", "-0.8", "0.0", 1.0, 1.0],
  ["1000", "0.0", "0.0", 0.7, 0.7],
  ["1250", "0.6", "0.0", 1.0, 1.0],
  ["1600", "1.0", "-0.1", 1.0, 1.0],
  ["2000", "1.2", "-0.2", 1.0, 1.0],
  ["2500", "1.3", "-0.3", 1.0, 1.0],
  ["3150", "1.2", "-0.5", 1.0, 1.0],
  ["4000", "1.0", "-0.8", 1.0, 1.0],
  ["5000", "0.5", "-1.3", 1.5, 1.5],
  ["6300", "-0.1", "-2.0", 1.5, 2.0],
  ["8000", "-1.1", "-3.0", 1.5, 2.5],
  ["10000", "-2.5", "-4.4", 2.0, 3.0],
  ["12500", "-4.3", "-6.2", 2.0, 5.0],
  ["16000", "-6.6", "-8.5", 2.5, 16.0],
  ["20000", "-9.3", "-11.2", 3.0, Number.POSITIVE_INFINITY],
];

/** The exact frequency of a row: 1000·10^(n/10), the first at 10 Hz. */
const exactHz = (row: number) => 1000 * 10 ** ((row - 20) / 10);

/** What a sine gains in the filters, dB, measured in the second second after they have settled. */
function sineResponseDb(frequencyHz: number, rateHz: number) {
  const levels = new WeightedLevels(rateHz, rateHz);
  const sine = new Float32Array(rateHz);
  const unweighted = new Float64Array(rateHz);
  const energies = [0, 1].map((second) => {
    for (let at = 0; at < rateHz; at++)
      sine[at] = 0.5 * Math.sin((2 * Math.PI * frequencyHz * (second * rateHz + at)) / rateHz);
    levels.process(sine, rateHz, unweighted);
    return { a: levels.aEnergy, c: levels.cEnergy, z: levels.zEnergy };
  });
  const gainDb = (name: "a" | "c" | "z") =>
    10 * Math.log10((energies[1]![name] - energies[0]![name]) / (0.125 * rateHz));
  return { aDb: gainDb("a"), cDb: gainDb("c"), zDb: gainDb("z") };
}

describe("IEC 61672-1 Table 3", () => {
  test.each(TABLE_3.map((row, index) => [...row, index] as const))(
    "the analytic form at %s Hz is the printed A %s and C %s",
    (nominal, a, c, _above, _below, index) => {
      // −13.350: printed −13.4, a rounding of the half away from zero.
      const aDb = aWeightingDb(exactHz(index)) - (nominal === "160" ? 0.001 : 0);
      expect(aDb).toAgreeWithPrinted(a);
      expect(cWeightingDb(exactHz(index))).toAgreeWithPrinted(c);
    },
  );

  describe.each(SAMPLE_RATES_HZ)("a sine through the filters at a rate of %d Hz", (rateHz) => {
    test.each(TABLE_3.map((row, index) => [...row, index] as const))(
      "%s Hz: A %s and C %s inside class 1",
      (_nominal, a, c, above, below, index) => {
        const frequencyHz = exactHz(index);
        const { aDb, cDb, zDb } = sineResponseDb(frequencyHz, rateHz);
        for (const [gainDb, wantedDb] of [
          [aDb, Number(a)],
          [cDb, Number(c)],
          [zDb, 0],
        ] as const) {
          expect(gainDb - wantedDb).toBeLessThanOrEqual(above);
          expect(wantedDb - gainDb).toBeLessThanOrEqual(below);
        }
        // Far closer than the standard asks, against its analytic form; below 20 Hz the removal of the offset shows.
        const withinDb = frequencyHz < 19 ? 0.1 : 0.05;
        expect(Math.abs(aDb - aWeightingDb(frequencyHz))).toBeLessThan(withinDb);
        expect(Math.abs(cDb - cWeightingDb(frequencyHz))).toBeLessThan(withinDb);
        expect(Math.abs(zDb)).toBeLessThan(withinDb);
      },
    );
  });
});
