import { describe, expect, test } from "vitest";
import {
  activeAttenuationDb,
  bandCancellationDb,
  breakEvenHz,
  breakEvenPhaseRad,
  cancellationDb,
  poweredShare,
} from "../../shared/acoustics/protection/active";
import { type ActivePart, OCTAVE_BANDS_HZ } from "../../shared/acoustics/types";
import "../setup/printed";

const degrees = (phaseDeg: number) => (phaseDeg * Math.PI) / 180;

describe("two waves of opposite sign, closed form (computed)", () => {
  test.each([
    [1, 5, "21.186"],
    [1, 10, "15.173"],
    [1, 18, "10.093"],
    [1, 30, "5.719"],
    [1, 60, "0.0"],
    [1, 90, "-3.01"],
    [1, 180, "-6.021"],
    [0.9, 0, "20.0"],
    [1.1, 0, "20.0"],
    [0.9, 5, "17.734"],
    [1.1, 5, "17.359"],
    [0.8912509, 0, "19.271"],
    [0.95, 10, "15.036"],
    [0.7, 20, "7.584"],
    [0.5, 0, "6.021"],
    [0.5, 60, "1.249"],
    [2, 0, "-0.0"],
  ])("gain %d, phase %d°: %s dB", (gain, phaseDeg, printedDb) => {
    expect(cancellationDb(gain, degrees(phaseDeg))).toAgreeWithPrinted(printedDb);
  });

  test("a perfect opposite leaves nothing", () => {
    expect(cancellationDb(1, 0)).toBe(Number.POSITIVE_INFINITY);
  });

  test.each([
    [0, "60.0", null, "6.021", "0.16667"],
    [3, "41.461", "-10.691", "4.649", "0.11517"],
    [6, "29.025", "-6.041", "3.529", "0.08063"],
    [10, "18.195", "-3.302", "2.387", "0.05054"],
    [15, "10.202", "-1.701", "1.422", "0.02834"],
    [20, "5.732", "-0.915", "0.828", "0.01592"],
    [25, "3.222", "-0.503", "0.475", "0.00895"],
    [30, "1.812", "-0.279", "0.27", "0.00503"],
    [40, "0.573", "-0.087", "0.086", "0.00159"],
  ])(
    "%d dB is kept up to %s°, gain %s to %s dB, f·τ %s",
    (attenuationDb, phaseDeg, lowDb, highDb, turns) => {
      const near = (gain: number, phaseRad: number) =>
        expect(10 ** (-cancellationDb(gain, phaseRad) / 20)).toBeCloseTo(
          10 ** (-attenuationDb / 20),
          3,
        );
      near(1, degrees(Number(phaseDeg)));
      near(1, 2 * Math.PI * Number(turns));
      near(10 ** (Number(highDb) / 20), 0);
      if (lowDb !== null) near(10 ** (Number(lowDb) / 20), 0);
    },
  );

  test("published (confirmed): 1 dB of level error leaves about 20 dB, 10° about 15 dB", () => {
    expect(cancellationDb(10 ** (-1 / 20), 0)).toAgreeWithPrinted("19.27");
    expect(cancellationDb(1, degrees(10))).toAgreeWithPrinted("15.17");
  });

  test("breaks even where cos φ = g/2: 60° at a gain of 1, never at 2", () => {
    expect((breakEvenPhaseRad(1)! * 180) / Math.PI).toAgreeWithPrinted("60.000");
    expect(breakEvenPhaseRad(2)).toBeNull();
    expect(cancellationDb(0.8, breakEvenPhaseRad(0.8)!)).toBeCloseTo(0, 12);
  });
});

const DELAY_100_US = 100e-6;

describe("a canceller late by 100 µs (computed)", () => {
  test.each([
    [63, "28.05", "23.992"],
    [125, "22.1", "20.779"],
    [250, "16.087", "15.868"],
    [500, "10.093", "10.2"],
    [1000, "4.18", "4.373"],
    [2000, "-1.405", "-1.19"],
  ])("at %d Hz %s dB with a gain of 1, %s dB with 0.95", (hz, atOneDb, atLessDb) => {
    const phaseRad = 2 * Math.PI * hz * DELAY_100_US;
    expect(cancellationDb(1, phaseRad)).toAgreeWithPrinted(atOneDb);
    expect(cancellationDb(0.95, phaseRad)).toAgreeWithPrinted(atLessDb);
  });

  test("the closed form over an octave is the mean of its frequencies' residual power", () => {
    for (const [band, midHz] of OCTAVE_BANDS_HZ.entries()) {
      const exactHz = 1000 * 10 ** (0.3 * (band - 4));
      expect(Math.abs(exactHz / midHz - 1)).toBeLessThan(0.01);
      const [fromHz, toHz] = [exactHz / 10 ** 0.15, exactHz * 10 ** 0.15];
      let residual = 0;
      const steps = 20_000;
      for (let step = 0; step < steps; step++) {
        const hz = fromHz + ((step + 0.5) / steps) * (toHz - fromHz);
        residual += 10 ** (-cancellationDb(0.9, 2 * Math.PI * hz * DELAY_100_US) / 10);
      }
      const meanDb = -10 * Math.log10(residual / steps);
      expect(bandCancellationDb(band, DELAY_100_US, 0.9)).toBeCloseTo(meanDb, 5);
    }
  });
});

const ACTIVE: ActivePart = {
  attenuationDb: null,
  delayS: DELAY_100_US,
  gain: 1,
  maximumDb: 25,
  bandwidthHz: null,
  saturatesAboveDb: null,
  batteryMin: null,
};

describe("what a device is credited", () => {
  test("capped at its maximum, gone past the first break-even, noise added above", () => {
    const [at63, at125, , , at1k, at2k] = activeAttenuationDb(ACTIVE)!;
    expect(at63).toBeLessThanOrEqual(25);
    expect(at125).toBeGreaterThan(20);
    expect(at1k).toBeGreaterThan(3);
    expect(at2k).toBeLessThan(0);
  });

  test('no credit where the formula repeats: 250 µs "cancels" at 4 kHz', () => {
    expect(cancellationDb(1, 2 * Math.PI * 4000 * 250e-6)).toBeGreaterThan(100);
    const late = activeAttenuationDb({ ...ACTIVE, delayS: 250e-6 })!;
    expect(breakEvenHz(250e-6, 1)).toAgreeWithPrinted("667");
    // Nothing is added to the wave: it breaks even nowhere, and adds no noise.
    expect(breakEvenHz(250e-6, 0)).toBeNull();
    for (const band of [5, 6, 7]) expect(late[band]).toBeLessThanOrEqual(0);
  });

  test("past the break-even only added noise counts, frequency by frequency (summed by hand)", () => {
    const [delayS, gain] = [500e-6, 0.95];
    const found = activeAttenuationDb({ ...ACTIVE, delayS, gain, maximumDb: null })!;
    const evenHz = breakEvenHz(delayS, gain)!;
    for (const band of [4, 5, 6, 7]) {
      const midHz = 1000 * 10 ** (0.3 * (band - 4));
      const [fromHz, toHz] = [midHz / 10 ** 0.15, midHz * 10 ** 0.15];
      const steps = 20_000;
      let sum = 0;
      for (let step = 0; step < steps; step += 1) {
        const hz = fromHz + ((step + 0.5) / steps) * (toHz - fromHz);
        const residual = 10 ** (-cancellationDb(gain, 2 * Math.PI * hz * delayS) / 10);
        sum += hz < evenHz ? residual : Math.max(1, residual);
      }
      expect(found[band]).toBeCloseTo(-10 * Math.log10(sum / steps), 4);
    }
  });

  test("none above the stated bandwidth, but the noise it adds there counts", () => {
    const narrow = activeAttenuationDb({ ...ACTIVE, bandwidthHz: 500 })!;
    expect(narrow[4]).toBeLessThanOrEqual(0);
    expect(narrow[5]).toBeLessThan(0);
  });

  test("a test report's bands are taken as they are, within maximum and bandwidth", () => {
    const report = {
      ...ACTIVE,
      attenuationDb: [12, 18, 30, 15, 4, -2, 3, 0],
      bandwidthHz: 2000,
    } as const;
    expect(activeAttenuationDb(report)).toEqual([12, 18, 25, 15, 4, -2, 0, 0]);
  });

  test("nothing stated is nothing known", () => {
    expect(activeAttenuationDb({ ...ACTIVE, delayS: null })).toBeNull();
  });
});

describe("common practice, no source", () => {
  test("an opposite wave 5 ms late does nothing useful at 300 Hz and can double the pressure", () => {
    expect(cancellationDb(1, 2 * Math.PI * 300 * 5e-3)).toAgreeWithPrinted("-6.0");
    expect(bandCancellationDb(2, 5e-3, 1)).toBeLessThan(0);
  });

  test("the error that leaves 20 dB at 200 Hz leaves nothing at several kilohertz", () => {
    const delayS = 0.01592 / 200; // f·τ at 20 dB
    expect(cancellationDb(1, 2 * Math.PI * 200 * delayS)).toAgreeWithPrinted("20.0");
    expect(cancellationDb(1, 2 * Math.PI * 4000 * delayS)).toBeLessThan(0);
  });
});

test.each([
  [480, 360, 1],
  [480, 480, 1],
  [240, 480, 0.5],
])(
  "a battery of %d min lasts for %d min of wearing by a share of %d",
  (batteryMin, wornMin, share) => {
    expect(poweredShare(batteryMin, wornMin)).toBe(share);
  },
);
