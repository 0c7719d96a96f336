import { describe, expect, test, vi } from "vitest";
import { analyseSound, OCTAVE_BANDS, THIRD_OCTAVE_BANDS } from "../../shared/acoustics/signal";
import { FilterBank } from "../../shared/acoustics/signal/filter-bank";
import { type Band, bandFits } from "../../shared/acoustics/signal/third-octave";

// Minutes of sound on a machine that may have other things to do.
vi.setConfig({ testTimeout: 240_000 });

const OCTAVE_RATIO = 10 ** 0.3;
const LN_RATIO = Math.log(OCTAVE_RATIO);

/**
 * IEC 61260-1:2014, Table 1, class 1: limits of the relative attenuation at exponents of the octave ratio. The values
 * at 0, 1/8, 1/4, 3/8, 1, 2, 3 and 4 agree with a public source of general acoustics; the pair at the band edge is from
 * memory.
 */
const EXPONENTS = [0, 1 / 8, 1 / 4, 3 / 8, 1 / 2, 1, 2, 3, 4];
const MAX_DB = [0.4, 0.5, 0.7, 1.4, 5.3];
const MIN_BEYOND_EDGE_DB = [1.6, 16.6, 40.5, 60, 70];
const MIN_IN_BAND_DB = -0.4;
const EDGE = 4;
/** Limits of the effective bandwidth and of the sum of neighbouring bands, class 1, from memory. */
const BANDWIDTH_WITHIN_DB = 0.4;
const SUM_ABOVE_DB = 0.8;
const SUM_BELOW_DB = 1.8;

/** Octave breakpoints carried over to 1/b octave: formula of the standard, 5.10. */
const breakpoints = (b: number) =>
  EXPONENTS.map(
    (exponent) =>
      1 +
      ((OCTAVE_RATIO ** (1 / (2 * b)) - 1) / (OCTAVE_RATIO ** 0.5 - 1)) *
        (OCTAVE_RATIO ** exponent - 1),
  );

/** On a straight line over the logarithm of frequency, as the standard draws it. */
function interpolate(x: number, xs: readonly number[], ys: readonly number[]): number {
  if (x >= xs.at(-1)!) return ys.at(-1)!;
  const next = xs.findIndex((value) => value > x);
  const share = Math.log(x / xs[next - 1]!) / Math.log(xs[next]! / xs[next - 1]!);
  return ys[next - 1]! + share * (ys[next]! - ys[next - 1]!);
}

function limitsDb(ratio: number, b: number): [min: number, max: number] {
  const omega = ratio < 1 ? 1 / ratio : ratio;
  const points = breakpoints(b);
  const edge = points[EDGE]!;
  // At the edge itself both hold.
  if (Math.abs(omega / edge - 1) < 1e-9) return [MIN_BEYOND_EDGE_DB[0]!, MAX_DB[EDGE]!];
  if (omega < edge)
    return [MIN_IN_BAND_DB, interpolate(Math.max(1, omega), points.slice(0, EDGE + 1), MAX_DB)];
  return [interpolate(omega, points.slice(EDGE), MIN_BEYOND_EDGE_DB), Number.POSITIVE_INFINITY];
}

interface Sweep {
  readonly frequenciesHz: readonly number[];
  /** Power that each band lets through, by frequency. */
  readonly powers: readonly Float64Array[];
}

const BLOCK = 4096;

/** Sines one after another through the whole bank; each is measured when the lowest band has settled. */
function sweep(rateHz: number, stepsAnOctave: number): Sweep {
  const lowest = -6.6 * stepsAnOctave;
  const count = Math.floor(
    (Math.log(rateHz / 2 / 1000) / LN_RATIO - 1e-6) * stepsAnOctave - lowest,
  );
  const frequenciesHz = Array.from(
    { length: count + 1 },
    (_, step) => 1000 * OCTAVE_RATIO ** (Math.round(lowest + step) / stepsAnOctave),
  ).filter((frequencyHz) => frequencyHz < 0.4999 * rateHz);
  const settling = Math.ceil((1.2 * rateHz) / BLOCK);
  const measuring = Math.ceil(rateHz / BLOCK);
  const block = new Float64Array(BLOCK);
  const powers = frequenciesHz.map((frequencyHz) => {
    const bank = new FilterBank(rateHz, BLOCK);
    let before = new Float64Array(bank.bands.length);
    const step = (2 * Math.PI * frequencyHz) / rateHz;
    for (let index = 0; index < settling + measuring; index++) {
      if (index === settling) before = bank.energies.slice();
      for (let at = 0; at < BLOCK; at++) block[at] = Math.sin(step * (index * BLOCK + at));
      bank.process(block);
    }
    return bank.energies.map(
      (energy, band) => (energy - before[band]!) / (measuring * BLOCK * 0.5),
    );
  });
  return { frequenciesHz, powers };
}

const octaveOf = (octave: Band, thirds: readonly Band[], powers: Float64Array) =>
  thirds.reduce(
    (sum, { midHz }, index) =>
      midHz > octave.lowerHz && midHz < octave.upperHz ? sum + powers[index]! : sum,
    0,
  );

describe("IEC 61260-1 mid frequencies", () => {
  // Computed: 1000·10^(3n/10), as the standard defines them.
  test.each([
    [0, "31.623"],
    [1, "63.096"],
    [2, "125.893"],
    [3, "251.189"],
    [4, "501.187"],
    [5, "1000.000"],
    [6, "1995.262"],
    [7, "3981.072"],
    [8, "7943.282"],
    [9, "15848.932"],
  ])("octave %d lies at %s Hz", (index, printed) => {
    expect(OCTAVE_BANDS[index]!.midHz).toAgreeWithPrinted(printed);
  });

  test("third-octave breakpoints follow from those of the octave", () => {
    const printed = ["1.00000", "1.02667", "1.05575", "1.08746", "1.12202", "1.29437", "1.88173"];
    const found = breakpoints(3);
    for (const [index, value] of printed.entries()) expect(found[index]!).toAgreeWithPrinted(value);
  });
});

describe.each([
  [44_100, 24],
  [48_000, 24],
  [88_200, 6],
  [96_000, 6],
  [176_400, 6],
  [192_000, 6],
])("sines through the filters at a rate of %d Hz", (rateHz, stepsAnOctave) => {
  const thirds = THIRD_OCTAVE_BANDS.filter((band) => bandFits(band, rateHz));
  const octaves = OCTAVE_BANDS.filter((band) => bandFits(band, rateHz));
  let swept: Sweep | undefined;
  const sweptOnce = () => {
    swept ??= sweep(rateHz, stepsAnOctave);
    return swept;
  };

  const outside = (band: Band, b: number, powerOf: (powers: Float64Array) => number) => {
    const { frequenciesHz, powers } = sweptOnce();
    return frequenciesHz.flatMap((frequencyHz, index) => {
      const attenuationDb = -10 * Math.log10(powerOf(powers[index]!));
      const [minDb, maxDb] = limitsDb(frequencyHz / band.midHz, b);
      return attenuationDb >= minDb && attenuationDb <= maxDb
        ? []
        : [{ frequencyHz, attenuationDb, minDb, maxDb }];
    });
  };

  test("every third-octave filter is inside class 1 at every frequency", () => {
    expect(thirds.length).toBe(rateHz === 44_100 ? 29 : 30);
    for (const [index, band] of thirds.entries())
      expect(
        outside(band, 3, (powers) => powers[index]!),
        `${band.nominalHz} Hz`,
      ).toEqual([]);
  });

  test("every octave, as the sum of its thirds, is inside class 1 at every frequency", () => {
    expect(octaves.length).toBe(rateHz === 44_100 ? 9 : 10);
    for (const octave of octaves)
      expect(
        outside(octave, 1, (powers) => octaveOf(octave, thirds, powers)),
        `${octave.nominalHz} Hz`,
      ).toEqual([]);
  });

  test("effective bandwidths and the sum of all bands are inside class 1", () => {
    const { frequenciesHz, powers } = sweptOnce();
    if (stepsAnOctave >= 24) {
      for (const [place, band] of thirds.entries()) {
        // Noise of a constant level per octave: Σ power·Δ ln f against ln of the band's edges.
        const passed =
          powers.reduce((sum, row) => sum + row[place]!, 0) * (LN_RATIO / stepsAnOctave);
        const deviationDb = 10 * Math.log10(passed / (LN_RATIO / 3));
        // The top band ends at half the rate, where the sweep does.
        expect(Math.abs(deviationDb), `${band.nominalHz} Hz`).toBeLessThan(BANDWIDTH_WITHIN_DB);
      }
    }
    for (const [index, frequencyHz] of frequenciesHz.entries()) {
      if (frequencyHz < thirds[0]!.midHz || frequencyHz > thirds.at(-1)!.midHz) continue;
      const sumDb = 10 * Math.log10(powers[index]!.reduce((sum, value) => sum + value, 0));
      expect(sumDb).toBeLessThan(SUM_ABOVE_DB);
      expect(-sumDb).toBeLessThan(SUM_BELOW_DB);
    }
  });
});

/** Evenly distributed numbers in −0.5…0.5, the same every time. */
function numbers(seed: number): () => number {
  let state = seed;
  return () => {
    state = (state + 0x6d2b79f5) | 0;
    let value = Math.imul(state ^ (state >>> 15), 1 | state);
    value = (value + Math.imul(value ^ (value >>> 7), 61 | value)) ^ value;
    return ((value ^ (value >>> 14)) >>> 0) / 2 ** 32 - 0.5;
  };
}

const spectrumOf = (signal: Float32Array, rateHz: number) => {
  const analysis = analyseSound({ rateHz, channels: 1, paPerFullScale: [null], bands: true });
  analysis.feed([signal]);
  return analysis.finish()[0]!;
};

describe("noises of known spectrum", () => {
  test("white noise rises by 10 lg of the octave ratio, 3.0 dB, from octave to octave", () => {
    const rateHz = 48_000;
    const next = numbers(7);
    const seconds = 40;
    const signal = Float32Array.from({ length: seconds * rateHz }, next);
    const { octaveBandsDb, lzeqDb } = spectrumOf(signal, rateHz);
    for (const [index, band] of OCTAVE_BANDS.entries()) {
      const widthHz = band.upperHz - band.lowerHz;
      const expectedDb = lzeqDb! + 10 * Math.log10(widthHz / (rateHz / 2));
      // The level of noise scatters by 4.34/√(B·T) dB; the filters pass as much as their width, to 0.05 dB.
      const spreadDb = 4.34 / Math.sqrt(widthHz * seconds);
      const deviationDb = octaveBandsDb![index]!.levelDb! - expectedDb;
      expect(Math.abs(deviationDb), `${band.nominalHz} Hz`).toBeLessThan(0.05 + 3.5 * spreadDb);
    }
  });

  test("the bands of white noise add up to its level", () => {
    const rateHz = 48_000;
    const next = numbers(11);
    const signal = Float32Array.from({ length: 20 * rateHz }, next);
    const { thirdOctaveBandsDb } = spectrumOf(signal, rateHz);
    const sum = thirdOctaveBandsDb!.reduce(
      (total, { levelDb }) => total + 10 ** (levelDb! / 10),
      0,
    );
    const [low, high] = [THIRD_OCTAVE_BANDS[0]!.lowerHz, THIRD_OCTAVE_BANDS.at(-1)!.upperHz];
    // A flat density of 1/12 in all up to half the rate: of it the part between the outermost edges.
    const expectedDb = 10 * Math.log10((1 / 12) * ((high - low) / (rateHz / 2)));
    expect(Math.abs(10 * Math.log10(sum) - expectedDb)).toBeLessThan(0.05);
  });

  test.each([63, 1000, 8000])("a tone in the middle of the octave at %d Hz", (nominalHz) => {
    const rateHz = 48_000;
    const octave = OCTAVE_BANDS.find((band) => band.nominalHz === nominalHz)!;
    const step = (2 * Math.PI * octave.midHz) / rateHz;
    const signal = Float32Array.from({ length: 6 * rateHz }, (_, at) => Math.sin(step * at));
    const found = spectrumOf(signal, rateHz).octaveBandsDb!.find(
      (band) => band.nominalHz === nominalHz,
    );
    // 10 lg ½; the neighbouring thirds let 1 % of it through each.
    expect(Math.abs(found!.levelDb! + 3.0103)).toBeLessThan(0.06);
  });

  test("pink noise, as many equal tones in every octave, gives every octave the same", () => {
    const rateHz = 48_000;
    const perOctave = 24;
    const signal = new Float32Array(8 * rateHz);
    const next = numbers(3);
    for (let tone = 0; tone < 10 * perOctave; tone++) {
      const frequencyHz = OCTAVE_BANDS[0]!.lowerHz * OCTAVE_RATIO ** ((tone + 0.5) / perOctave);
      const step = (2 * Math.PI * frequencyHz) / rateHz;
      const phase = 2 * Math.PI * next();
      for (let at = 0; at < signal.length; at++) signal[at]! += 0.01 * Math.sin(step * at + phase);
    }
    const { octaveBandsDb, thirdOctaveBandsDb } = spectrumOf(signal, rateHz);
    const expectedDb = 10 * Math.log10(perOctave * 0.5 * 0.01 ** 2);
    for (const { nominalHz, levelDb } of octaveBandsDb!)
      expect(Math.abs(levelDb! - expectedDb), `${nominalHz} Hz`).toBeLessThan(0.2);
    const thirdDb = expectedDb - 10 * Math.log10(3);
    for (const { nominalHz, levelDb } of thirdOctaveBandsDb!)
      expect(Math.abs(levelDb! - thirdDb), `${nominalHz} Hz`).toBeLessThan(0.3);
  });
});
