import { expect, test } from "vitest";
import type { ActivePart, OctaveBandValues } from "../../../shared/acoustics/types";
import { noiseOf } from "./active-in-noise";
import { collapse, outcomeOf, startOf, triedPart } from "./experiment";

const flat = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];

const noise = noiseOf({ levelDb: 97, lcMinusLaDb: null, octaveBandsDb: flat(90) });
const cup = { meanDb: flat(24), sdDb: flat(4) };
const part: ActivePart = {
  attenuationDb: flat(5),
  delayS: null,
  gain: null,
  maximumDb: null,
  bandwidthHz: null,
  saturatesAboveDb: 80,
  batteryMin: null,
};

test("a gain of one half without a delay leaves half the wave in every band: 6.02 dB", () => {
  const { furtherDb, bands, breakEvenHz } = outcomeOf(noise, cup, part, 1, {
    delayUs: 0,
    gain: 0.5,
  });
  expect(furtherDb).toBeCloseTo(20 * Math.log10(2), 9);
  for (const { creditedDb } of bands) expect(creditedDb).toBeCloseTo(20 * Math.log10(2), 9);
  expect(breakEvenHz).toBeNull();
});

test("an exact gain 100 µs late breaks even where the wave is 60° late: at 1,667 Hz", () => {
  const { breakEvenHz, bands } = outcomeOf(noise, cup, part, 1, { delayUs: 100, gain: 1 });
  expect(breakEvenHz).toBeCloseTo(1 / (6 * 100e-6), 6);
  expect(bands.at(-1)?.creditedDb).toBeLessThanOrEqual(0);
});

test("the rating collapses with the delay, and some milliseconds make it louder than with the part off", () => {
  const points = collapse(noise, cup, part, 1, 0.95);
  expect(points[0]?.delayUs).toBe(0);
  expect(points.at(-1)?.delayUs).toBe(1000);
  // 1 − 0.95 leaves a twentieth of the wave: 26 dB.
  expect(points[0]?.furtherDb).toBeCloseTo(-20 * Math.log10(0.05), 9);
  expect(points[4]!.furtherDb).toBeLessThan(points[1]!.furtherDb);
  expect(points.at(-1)!.furtherDb).toBeLessThan(0);
});

test("without a spectrum only the part’s own bands are known", () => {
  const outcome = outcomeOf(noiseOf(null), cup, part, 1, { delayUs: 50, gain: 1 });
  expect(outcome.furtherDb).toBeNull();
  expect(outcome.bands[0]).toMatchObject({ passiveADb: null, activeADb: null });
  expect(collapse(noiseOf(null), cup, part, 1, 1)).toEqual([]);
});

test("what is tried stands in place of the report and is not asked whether it saturates", () => {
  expect(triedPart(part, { delayUs: 250, gain: 1.1 })).toEqual({
    ...part,
    attenuationDb: null,
    delayS: 250 / 1e6,
    gain: 1.1,
    saturatesAboveDb: null,
  });
  expect(startOf({ ...part, delayS: 0.0002, gain: 0.9 })).toEqual({ delayUs: 200, gain: 0.9 });
});
