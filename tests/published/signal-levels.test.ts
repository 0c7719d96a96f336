import { describe, expect, test, vi } from "vitest";
import { analyseSound, CalibrationTone, SAMPLE_RATES_HZ } from "../../shared/acoustics/signal";
import { aWeightingDb, cWeightingDb } from "../../shared/acoustics/signal/weighting";

// Minutes of sound on a machine that may have other things to do.
vi.setConfig({ testTimeout: 60_000 });

const REFERENCE_PRESSURE_PA = 20e-6;

function levelsOf(signal: Float32Array, rateHz: number, paPerFullScale: number | null = 1) {
  const analysis = analyseSound({
    rateHz,
    channels: 1,
    paPerFullScale: [paPerFullScale],
    bands: false,
  });
  analysis.feed([signal]);
  return analysis.finish()[0]!;
}

/** Silence, then so many seconds of a sine that starts at zero, then silence. */
function burst(
  rateHz: number,
  frequencyHz: number,
  burstS: number,
  wholeS: number,
  amplitude = 0.5,
): Float32Array {
  const signal = new Float32Array(Math.round(wholeS * rateHz));
  const start = Math.round(0.05 * rateHz);
  const last = Math.round(burstS * rateHz);
  for (let at = 0; at < last; at++)
    signal[start + at] = amplitude * Math.sin((2 * Math.PI * frequencyHz * at) / rateHz);
  return signal;
}

const amplitudeDb = (amplitude: number) =>
  20 * Math.log10(amplitude / Math.SQRT2 / REFERENCE_PRESSURE_PA);

describe("a steady sine of 1 kHz", () => {
  test.each(SAMPLE_RATES_HZ)(
    "at a rate of %d Hz reads its level under every weighting",
    (rateHz) => {
      const paPerFullScale = 20;
      const levelDb = 94;
      const amplitude =
        (Math.SQRT2 * REFERENCE_PRESSURE_PA * 10 ** (levelDb / 20)) / paPerFullScale;
      const tone = (riseS: number) =>
        Float32Array.from(
          { length: 20 * rateHz },
          (_, at) =>
            (at < riseS * rateHz ? at / (riseS * rateHz) : 1) *
            amplitude *
            Math.sin((2 * Math.PI * 1000 * at) / rateHz),
        );
      const levels = levelsOf(tone(0), rateHz, paPerFullScale);
      expect(levels.reference).toBe("absolute");
      for (const name of ["laeqDb", "lceqDb", "lzeqDb", "lafMaxDb", "lasMaxDb"] as const)
        expect(Math.abs(levels[name]! - levelDb), name).toBeLessThan(0.05);
      expect(levels.lcMinusLaDb).toBeCloseTo(0, 2);
      // The crest of a sine is √2; one that starts at once overshoots.
      const { lcPeakDb } = levelsOf(tone(0.1), rateHz, paPerFullScale);
      expect(Math.abs(lcPeakDb! - levelDb - 20 * Math.log10(Math.SQRT2))).toBeLessThan(0.02);
      expect(levels.history.laeq1sDb).toHaveLength(20);
      for (const secondDb of levels.history.laeq1sDb.slice(1))
        expect(Math.abs(secondDb! - levelDb)).toBeLessThan(0.005);
      // S rises as 1 − e^(−t/τ), τ = 1 s.
      for (const [second, slowDb] of levels.history.las1sDb.entries())
        expect(slowDb!).toBeCloseTo(levelDb + 10 * Math.log10(1 - Math.exp(-second - 1)), 1);
    },
  );

  test("without a sensitivity is relative to full scale: the same differences, another zero", () => {
    const signal = burst(48_000, 1000, 3, 4);
    const relative = levelsOf(signal, 48_000, null);
    const absolute = levelsOf(signal, 48_000, 2);
    expect(relative.reference).toBe("relative");
    const shiftDb = 20 * Math.log10(2 / REFERENCE_PRESSURE_PA);
    expect(absolute.laeqDb! - relative.laeqDb!).toBeCloseTo(shiftDb, 9);
    expect(absolute.lcMinusLaDb).toBeCloseTo(relative.lcMinusLaDb!, 9);
  });

  test("fed in pieces of any length gives the same as fed whole", () => {
    const signal = burst(44_100, 1000, 1, 2.37);
    const options = { rateHz: 44_100, channels: 1, paPerFullScale: [1], bands: true } as const;
    const whole = analyseSound(options);
    whole.feed([signal]);
    const pieces = analyseSound(options);
    for (let at = 0, length = 1; at < signal.length; at += length, length = (length * 7) % 9973)
      pieces.feed([signal.subarray(at, at + length)]);
    expect(pieces.finish()).toEqual(whole.finish());
  });

  test("nothing but zeros has no level, which is not 0 dB", () => {
    const levels = levelsOf(new Float32Array(48_000), 48_000);
    expect(levels.laeqDb).toBeNull();
    expect(levels.lcPeakDb).toBeNull();
    expect(levels.history.laeq1sDb).toEqual([null]);
  });

  test("a recorder's offset is no sound", () => {
    const signal = burst(48_000, 1000, 3, 4);
    const shifted = signal.map((value) => value + 0.1);
    const levels = levelsOf(shifted, 48_000);
    expect(levels.lzeqDb).toBeCloseTo(levelsOf(signal, 48_000).lzeqDb!, 2);
  });
});

/**
 * IEC 61672-1:2013, Table 4: response to bursts of 4 kHz, A-weighted, relative to the steady tone, with the acceptance
 * limits of class 1. From memory; the responses follow from 10 lg(1 − e^(−T/τ)) and 10 lg(T/1 s).
 */
const TABLE_4: [ms: number, fast: string, above: number, below: number, exposure: string][] = [
  [1000, "0.0", 0.5, 0.5, "0.0"],
  [500, "-0.1", 0.5, 0.5, "-3.0"],
  [200, "-1.0", 0.5, 0.5, "-7.0"],
  [100, "-2.6", 1.0, 1.0, "-10.0"],
  [50, "-4.8", 1.0, 1.0, "-13.0"],
  [20, "-8.3", 1.0, 1.0, "-17.0"],
  [10, "-11.1", 1.0, 1.0, "-20.0"],
  [5, "-14.1", 1.0, 1.0, "-23.0"],
  [2, "-18.0", 1.0, 1.5, "-27.0"],
  [1, "-21.0", 1.0, 2.0, "-30.0"],
  [0.5, "-24.0", 1.0, 2.5, "-33.0"],
  [0.25, "-27.0", 1.0, 3.0, "-36.0"],
];
const TABLE_4_SLOW: [ms: number, slow: string, above: number, below: number][] = [
  [1000, "-2.0", 0.5, 0.5],
  [500, "-4.1", 0.5, 0.5],
  [200, "-7.4", 0.5, 0.5],
  [100, "-10.2", 1.0, 1.0],
  [50, "-13.1", 1.0, 1.0],
  [20, "-17.0", 1.0, 1.5],
  [10, "-20.0", 1.0, 2.0],
  [5, "-23.0", 1.0, 2.5],
  [2, "-27.0", 1.0, 3.0],
];

describe("IEC 61672-1 Table 4, bursts of 4 kHz", () => {
  const steadyDb = amplitudeDb(0.5) + aWeightingDb(4000);
  describe.each([44_100, 48_000, 96_000])("at a rate of %d Hz", (rateHz) => {
    test.each(TABLE_4)(
      "%d ms: F reads %s, exposure included",
      (ms, fast, above, below, exposure) => {
        const wholeS = 3;
        const { lafMaxDb, laeqDb } = levelsOf(burst(rateHz, 4000, ms / 1000, wholeS), rateHz);
        const responseDb = lafMaxDb! - steadyDb;
        expect(responseDb - Number(fast)).toBeLessThanOrEqual(above);
        expect(Number(fast) - responseDb).toBeLessThanOrEqual(below);
        const exposureDb = laeqDb! + 10 * Math.log10(wholeS) - steadyDb;
        expect(exposureDb - Number(exposure)).toBeLessThanOrEqual(above);
        expect(Number(exposure) - exposureDb).toBeLessThanOrEqual(below);
        // Bursts of many periods: the exact response of the detector.
        if (ms >= 10) expect(responseDb).toBeCloseTo(10 * Math.log10(1 - Math.exp(-ms / 125)), 1);
      },
    );

    test.each(TABLE_4_SLOW)("%d ms: S reads %s", (ms, slow, above, below) => {
      const { lasMaxDb } = levelsOf(burst(rateHz, 4000, ms / 1000, 3), rateHz);
      const responseDb = lasMaxDb! - steadyDb;
      expect(responseDb - Number(slow)).toBeLessThanOrEqual(above);
      expect(Number(slow) - responseDb).toBeLessThanOrEqual(below);
      if (ms >= 10) expect(responseDb).toBeCloseTo(10 * Math.log10(1 - Math.exp(-ms / 1000)), 1);
    });
  });
});

/** IEC 61672-1:2013, Table 5: C-weighted peak over the steady C-weighted level, class 1. From memory. */
const TABLE_5: [
  frequencyHz: number,
  cycles: number,
  sign: number,
  printed: string,
  limit: number,
][] = [
  [31.5, 1, 1, "2.5", 2.0],
  [500, 1, 1, "3.5", 1.0],
  [8000, 1, 1, "3.4", 2.0],
  [500, 0.5, 1, "2.4", 1.0],
  [500, 0.5, -1, "2.4", 1.0],
];

describe("the C-weighted peak", () => {
  describe.each(SAMPLE_RATES_HZ)("at a rate of %d Hz", (rateHz) => {
    test.each(TABLE_5)(
      "IEC 61672-1 Table 5: %d Hz, %d cycle, sign %d: %s",
      (frequencyHz, cycles, sign, printed, limit) => {
        const signal = burst(rateHz, frequencyHz, cycles / frequencyHz, 1, sign * 0.5);
        const steadyDb = amplitudeDb(0.5) + cWeightingDb(frequencyHz);
        const overDb = levelsOf(signal, rateHz).lcPeakDb! - steadyDb;
        expect(Math.abs(overDb - Number(printed))).toBeLessThanOrEqual(limit);
      },
    );

    // Hand calculation: at a quarter of the rate and 45° every sample is 3 dB under the crest.
    test("is found between the samples", () => {
      const frequencyHz = rateHz / 4;
      const signal = Float32Array.from({ length: rateHz }, (_, at) => {
        const rise = Math.min(1, at / (0.1 * rateHz));
        return rise * 0.5 * Math.sin((Math.PI / 2) * at + Math.PI / 4);
      });
      const { lcPeakDb } = levelsOf(signal, rateHz);
      if (frequencyHz > 20_000) return;
      const crestDb = amplitudeDb(0.5) + cWeightingDb(frequencyHz) + 20 * Math.log10(Math.SQRT2);
      expect(Math.abs(lcPeakDb! - crestDb)).toBeLessThan(0.15);
    });
  });

  test("of a single sample at full scale is held by every rate", () => {
    // An impulse's C-weighted peak is lower than the impulse, for what lies above 8 kHz is taken away, but not by much.
    for (const rateHz of SAMPLE_RATES_HZ) {
      const signal = new Float32Array(rateHz);
      signal[rateHz / 2] = 1;
      const peakDb = levelsOf(signal, rateHz, null).lcPeakDb!;
      expect(peakDb).toBeLessThan(0);
      expect(peakDb).toBeGreaterThan(-20);
    }
  });
});

describe("a calibrator's tone", () => {
  const rateHz = 48_000;
  const options = { rateHz, toneLevelDb: 94, frequencyHz: 1000 };

  /** Fumbling, the tone, fumbling again. */
  function recording(frequencyHz: number, amplitudeAt: (second: number) => number): Float32Array {
    let state = 1;
    return Float32Array.from({ length: 12 * rateHz }, (_, at) => {
      state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
      const noise = state / 2 ** 32 - 0.5;
      const second = at / rateHz;
      if (second < 2 || second > 10) return 0.3 * noise;
      return (
        amplitudeAt(second) * Math.sin((2 * Math.PI * frequencyHz * at) / rateHz) + 0.0005 * noise
      );
    });
  }

  function read(signal: Float32Array) {
    const tone = new CalibrationTone(options);
    for (let at = 0; at < signal.length; at += 1000) tone.feed(signal.subarray(at, at + 1000));
    return tone.finish();
  }

  test("gives the sensitivity, its frequency and how steady it is", () => {
    const reading = read(recording(1003.2, () => 0.05));
    if (!reading.found) throw new Error(reading.reason);
    expect(reading.frequencyHz).toBeCloseTo(1003.2, 1);
    expect(reading.levelDb).toBeCloseTo(20 * Math.log10(0.05 / Math.SQRT2), 2);
    // 94 dB are 20 µPa · 10^4.7 = 1.0024 Pa; full scale is √2/0.05 times as much.
    expect(reading.paPerFullScale).toBeCloseTo((1.0023745 * Math.SQRT2) / 0.05, 2);
    expect(reading.spreadDb).toBeLessThan(0.02);
    expect(reading.startS).toBeGreaterThanOrEqual(2);
    expect(reading.durationS).toBeGreaterThan(7.5);
    expect(reading.durationS).toBeLessThanOrEqual(8);
  });

  test("that then is measured with it reads what it was said to give", () => {
    const signal = recording(1000, () => 0.05);
    const reading = read(signal);
    if (!reading.found) throw new Error(reading.reason);
    const tone = signal.subarray(3 * rateHz, 9 * rateHz);
    expect(levelsOf(tone, rateHz, reading.paPerFullScale).history.laeq1sDb[3]).toBeCloseTo(94, 2);
  });

  test.each([
    ["no-tone", 1000, () => 0],
    ["frequency-off", 1050, () => 0.05],
    ["unsteady", 1000, (second: number) => 0.05 * 10 ** ((second - 2) / 20)],
  ] as const)("is refused: %s", (reason, frequencyHz, amplitudeAt) => {
    expect(read(recording(frequencyHz, amplitudeAt))).toMatchObject({ found: false, reason });
  });
});
