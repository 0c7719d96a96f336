import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  HEARING_THRESHOLD_DB,
  hearSignal,
  maskedThresholdDb,
} from "../../shared/acoustics/protection/warning-signal";
import type { ActivePart, OctaveBandValues } from "../../shared/acoustics/types";
import { buildProtection, buildProtector } from "./build-day";

const same = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];
const heardBare = (signal: OctaveBandValues, noise: OctaveBandValues) =>
  hearSignal(signal, noise, null, 90).off!;
const muff = (meanDb: OctaveBandValues, active: ActivePart | null = null) =>
  buildProtection({}, { inner: buildProtector({ bands: { meanDb, sdDb: same(3) }, active }) });

describe("ISO 7731 masked threshold (memory; slope agrees with a public description)", () => {
  test("the band's own noise, or that of the bands below, 7.5 dB less an octave (computed)", () => {
    expect(maskedThresholdDb([80, 60, 70, 50, 50, 50, 50, 20])).toEqual([
      80, 72.5, 70, 62.5, 55, 50, 50, 42.5,
    ]);
  });

  test("masking goes upwards only", () => {
    expect(maskedThresholdDb([null, 30, 30, 30, 30, 30, 30, 90])).toEqual([
      null,
      30,
      30,
      30,
      30,
      30,
      30,
      90,
    ]);
  });
});

describe("10 dB in one octave band", () => {
  const noise: OctaveBandValues = [70, 70, 70, 70, 70, 70, 70, 70];
  const with1k = (db: number): OctaveBandValues => [20, 20, 20, 20, db, 20, 20, 20];

  test.each([
    [80, true],
    [79.9, false],
  ])("%d dB at 1 kHz over 70 dB of noise: %s", (db, isAudible) => {
    const heard = heardBare(with1k(db), noise);
    expect(heard).toMatchObject({ isAudible, bestBandHz: 1000 });
    expect(heard.aboveDb).toBeCloseTo(db - 70, 9);
  });

  test("low rumble masks a signal above it: 110 dB at 250 Hz carries 95 dB to 1 kHz", () => {
    const rumble: OctaveBandValues = [60, 60, 110, 60, 60, 60, 60, 60];
    expect(heardBare(with1k(104), rumble).isAudible).toBe(false);
    expect(heardBare(with1k(105), rumble).isAudible).toBe(true);
  });

  test("below the threshold of hearing nothing is audible, however quiet the rest", () => {
    const silence = same(-40);
    const under = HEARING_THRESHOLD_DB.map((db) => db! - 1) as unknown as OctaveBandValues;
    expect(heardBare(under, silence).isAudible).toBe(false);
    expect(heardBare([null, 60, 5, 5, 5, 5, 5, 5], silence).isAudible).toBe(true);
  });
});

describe("through the protector, band by band", () => {
  // Fan noise with its power low; a 2 kHz signal 12 dB over its masked threshold without a protector.
  const fan: OctaveBandValues = [100, 98, 92, 80, 72, 66, 60, 54];
  const signal: OctaveBandValues = [10, 10, 10, 10, 50, 86, 50, 10];

  test("an even protector changes nothing, a muff that takes the high bands away leaves it masked", () => {
    expect(hearSignal(signal, fan, null, 95).off).toMatchObject({ isAudible: true });
    expect(hearSignal(signal, fan, muff(same(20)), 95).off).toMatchObject({ isAudible: true });
    const cup: OctaveBandValues = [8, 10, 16, 26, 32, 34, 36, 36];
    expect(hearSignal(signal, fan, muff(cup), 95).off).toMatchObject({ isAudible: false });
  });

  test("an active part that takes the rumble away lets it through again; saturated it does not", () => {
    const cup: OctaveBandValues = [8, 10, 16, 26, 32, 34, 36, 36];
    const active: ActivePart = {
      attenuationDb: [16, 18, 16, 8, 0, 0, 0, 0],
      delayS: null,
      gain: null,
      maximumDb: null,
      bandwidthHz: null,
      saturatesAboveDb: 100,
      batteryMin: null,
    };
    const found = hearSignal(signal, fan, muff(cup, active), 95);
    expect(found.off!.isAudible).toBe(false);
    expect(found.on!.isAudible).toBe(true);
    expect(hearSignal(signal, fan, muff(cup, active), 101).on!.isAudible).toBe(false);
  });

  test("property: an even attenuation never changes by how much a signal stands out", () => {
    const band = fc.double({ min: 60, max: 110, noNaN: true });
    const spectrum = fc.tuple(band, band, band, band, band, band, band, band);
    fc.assert(
      fc.property(spectrum, spectrum, fc.integer({ min: 0, max: 15 }), (one, other, db) => {
        const bare = hearSignal(one, other, null, 95).off!;
        const worn = hearSignal(one, other, muff(same(db)), 95).off!;
        expect(worn.aboveDb).toBeCloseTo(bare.aboveDb, 9);
        expect(worn.bestBandHz).toBe(bare.bestBandHz);
      }),
    );
  });

  test("no test data, no word", () => {
    expect(hearSignal(signal, fan, buildProtection({ snrDb: 25 }), 95)).toMatchObject({
      off: null,
      reason: "no-attenuation-data",
    });
    const two = buildProtection({}, { outer: buildProtector({}) });
    expect(hearSignal(signal, fan, two, 95).reason).toBe("combination-not-tested");
    const tested = { ...two, combinationBands: { meanDb: same(30), sdDb: same(3) } };
    expect(hearSignal(signal, fan, tested, 95).off).not.toBeNull();
  });
});
