import { describe, expect, test, vi } from "vitest";
import { activeAttenuationDb } from "../../shared/acoustics/protection/active";
import {
  MicrophonePair,
  type MicrophonePairOptions,
  type MicrophonePairReading,
} from "../../shared/acoustics/signal/two-microphones";
import {
  checkActivePart,
  earAttenuation,
  looksSwapped,
  methodSdDb,
  NO_CORRECTION_DB,
  OPEN_EAR_DB,
  personalAttenuationDb,
  reduced,
  reducedActive,
  swapped,
} from "../../shared/acoustics/signal/two-microphones-check";
import type { ActivePart } from "../../shared/acoustics/types";

// Minutes of sound on a machine that may have other things to do.
vi.setConfig({ testTimeout: 120_000 });

/**
 * Pairs of channels made here from a known filter and delay: what the analysis has to give back is known beforehand.
 * Sounds are Gaussian noise from fixed seeds.
 */
const rateHz = 48_000;
const HZ = [63, 125, 250, 500, 1000, 2000, 4000, 8000];

/** Gaussian noise that is the same in every run: Marsaglia's polar method over a linear congruential generator. */
function gaussian(seed: number): () => number {
  let state = seed >>> 0;
  const uniform = () => {
    state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0;
    return (state + 0.5) / 2 ** 32;
  };
  return () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());
}

const noise = (seconds: number, seed: number, amplitude = 0.05): Float32Array => {
  const next = gaussian(seed);
  return Float32Array.from({ length: seconds * rateHz }, () => amplitude * next());
};

/** Linear-phase filter with a stated response at the octaves, straight between them over log f; its lag is `half`. */
function designFilter(attenuationDb: readonly number[], half = 2048): Float64Array {
  const length = 2 * half;
  const gain = (hz: number) => {
    const place = Math.min(7, Math.max(0, Math.log2(Math.max(hz, 1) / 62.5)));
    const below = Math.min(6, Math.floor(place));
    const db =
      attenuationDb[below]! + (place - below) * (attenuationDb[below + 1]! - attenuationDb[below]!);
    return 10 ** (-db / 20);
  };
  const gains = Array.from({ length: half + 1 }, (_, bin) => gain((bin * rateHz) / length));
  const cosines = Float64Array.from({ length }, (_, at) => Math.cos((2 * Math.PI * at) / length));
  return Float64Array.from({ length: length + 1 }, (_, at) => {
    const from = at - half;
    let sum = gains[0]! + gains[half]! * (from % 2 === 0 ? 1 : -1);
    for (let bin = 1; bin < half; bin++)
      sum += 2 * gains[bin]! * cosines[(((bin * from) % length) + length) % length]!;
    return (sum / length) * (0.5 + 0.5 * Math.cos((Math.PI * from) / half));
  });
}

/** What a filter's response is over an octave, dB, under noise of equal power per hertz. */
function bandAttenuationDb(filter: Float64Array, hz: number): number {
  const midHz = 1000 * 10 ** (0.3 * (HZ.indexOf(hz) - 4));
  let sum = 0;
  const steps = 60;
  for (let step = 0; step < steps; step++) {
    const f = midHz * 10 ** -0.15 + ((step + 0.5) / steps) * midHz * (10 ** 0.15 - 10 ** -0.15);
    let re = 0;
    let im = 0;
    for (let at = 0; at < filter.length; at++) {
      const phase = (2 * Math.PI * f * at) / rateHz;
      re += filter[at]! * Math.cos(phase);
      im -= filter[at]! * Math.sin(phase);
    }
    sum += re * re + im * im;
  }
  return -10 * Math.log10(sum / steps);
}

/** By the definition of convolution, in blocks through a plain transform of its own. */
function convolve(signal: Float32Array, filter: Float64Array, delay: number): Float32Array {
  const block = 16_384;
  const size = 32_768;
  const kernel = transform(padded(filter, size), false);
  const out = new Float32Array(signal.length);
  for (let from = 0; from < signal.length; from += block) {
    const piece = transform(padded(signal.subarray(from, from + block), size), false);
    const product = { re: new Float64Array(size), im: new Float64Array(size) };
    for (let bin = 0; bin < size; bin++) {
      product.re[bin] = piece.re[bin]! * kernel.re[bin]! - piece.im[bin]! * kernel.im[bin]!;
      product.im[bin] = piece.re[bin]! * kernel.im[bin]! + piece.im[bin]! * kernel.re[bin]!;
    }
    const back = transform(product, true);
    for (let at = 0; at < size; at++) {
      const place = from + at + delay;
      if (place >= 0 && place < out.length) out[place]! += back.re[at]! / size;
    }
  }
  return out;
}

interface Complex {
  re: Float64Array;
  im: Float64Array;
}

function padded(values: ArrayLike<number>, size: number): Complex {
  const re = new Float64Array(size);
  re.set(values);
  return { re, im: new Float64Array(size) };
}

/** Cooley and Tukey's transform in its plainest form, so that nothing of the analysis's own is used to make its input. */
function transform({ re, im }: Complex, isInverse: boolean): Complex {
  const size = re.length;
  const [outRe, outIm] = [Float64Array.from(re), Float64Array.from(im)];
  for (let at = 1, mirror = 0; at < size; at++) {
    let bit = size >> 1;
    for (; mirror & bit; bit >>= 1) mirror ^= bit;
    mirror ^= bit;
    if (at < mirror) {
      [outRe[at], outRe[mirror]] = [outRe[mirror]!, outRe[at]!];
      [outIm[at], outIm[mirror]] = [outIm[mirror]!, outIm[at]!];
    }
  }
  for (let span = 2; span <= size; span *= 2) {
    const angle = ((isInverse ? 2 : -2) * Math.PI) / span;
    for (let step = 0; step < span / 2; step++) {
      const [wRe, wIm] = [Math.cos(angle * step), Math.sin(angle * step)];
      for (let start = step; start < size; start += span) {
        const other = start + span / 2;
        const re2 = outRe[other]! * wRe - outIm[other]! * wIm;
        const im2 = outRe[other]! * wIm + outIm[other]! * wRe;
        outRe[other] = outRe[start]! - re2;
        outIm[other] = outIm[start]! - im2;
        outRe[start]! += re2;
        outIm[start]! += im2;
      }
    }
  }
  return { re: outRe, im: outIm };
}

const plus = (a: Float32Array, b: Float32Array, gain = 1) =>
  a.map((value, at) => value + gain * b[at]!);

const options: MicrophonePairOptions = {
  rateHz,
  outsidePa: null,
  insidePa: null,
  step: 2 ** -23,
  maxLagS: 0.02,
};

function read(
  outside: Float32Array,
  inside: Float32Array,
  more: Partial<MicrophonePairOptions> = {},
  block = 10_000,
): MicrophonePairReading {
  const pair = new MicrophonePair({ ...options, ...more });
  for (let from = 0; from < Math.min(outside.length, inside.length); from += block)
    pair.feed(outside.subarray(from, from + block), inside.subarray(from, from + block));
  return pair.finish();
}

const reductionOf = ({ bands }: MicrophonePairReading) =>
  bands.map((band) => reduced(band).noiseReductionDb);

// A cup as muffs are: little at low frequencies, 40 dB at the most. Common practice, no source.
const CUP_DB = [8, 12, 18, 26, 33, 35, 38, 36];
const cup = designFilter(CUP_DB);
const LAG = 2048;
const cupDb = HZ.map((hz) => bandAttenuationDb(cup, hz));
const SECONDS = 20;
const outside = noise(SECONDS, 1);
const behindCup = convolve(outside, cup, -LAG);

describe("attenuation and delay of a known cup", () => {
  // An incoherent noise 20 dB under the inside in every band: another noise through the same cup.
  const otherBehindCup = convolve(noise(SECONDS, 2), cup, -LAG);

  test.each([0, 17, 240, -31])("behind by %d samples, at 20 dB signal-to-noise", (delay) => {
    const delayed = convolve(outside, cup, delay - LAG);
    const found = read(outside, plus(delayed, otherBehindCup, 0.1));
    for (const [band, db] of reductionOf(found).entries())
      expect(Math.abs(db! - cupDb[band]!)).toBeLessThan(0.5);
    expect(Math.abs(found.delaySamples! - delay)).toBeLessThan(1);
    expect(found.delayS! * rateHz).toBeCloseTo(found.delaySamples!, 9);
    // 20 dB: 1/(1 + 0.01) of the inside is the outside's.
    for (const { coherence } of found.bands) expect(coherence!).toBeGreaterThan(0.95);
  });

  test("with noise in both microphones, 20 dB under each", () => {
    const found = read(plus(outside, noise(SECONDS, 3), 0.1), plus(behindCup, otherBehindCup, 0.1));
    for (const [band, db] of reductionOf(found).entries())
      expect(Math.abs(db! - cupDb[band]!)).toBeLessThan(0.5);
  });

  test("a microphone wired the other way round changes neither", () => {
    const found = read(
      outside,
      behindCup.map((value) => -value),
    );
    for (const [band, db] of reductionOf(found).entries()) expect(db!).toBeCloseTo(cupDb[band]!, 0);
    expect(Math.abs(found.delaySamples!)).toBeLessThan(1);
  });

  test("two recorders started 1.3 s apart are brought together", () => {
    const late = Math.round(1.3 * rateHz);
    const found = read(outside.subarray(late), behindCup, { maxLagS: 2 });
    expect(Math.abs(found.delaySamples! - late)).toBeLessThan(1);
    expect(found.durationS).toBeLessThan(SECONDS - 1.2);
    for (const [band, db] of reductionOf(found).entries())
      expect(Math.abs(db! - cupDb[band]!)).toBeLessThan(0.5);
  });

  test("how it is cut into blocks changes nothing", () => {
    const whole = read(outside, behindCup, {}, outside.length);
    expect(read(outside, behindCup, {}, 4_099)).toEqual(whole);
  });

  test("sensitivities of both turn it into levels; they move the reduction by their ratio", () => {
    // 0.05 of full scale in white noise: its power in an octave is that share of 24 kHz.
    const found = read(outside, behindCup, { outsidePa: 20, insidePa: 2 });
    const band = found.bands[4]!;
    const widthHz = 1000 * (10 ** 0.15 - 10 ** -0.15);
    const expected = 10 * Math.log10((0.05 ** 2 * 20 ** 2 * (widthHz / 24_000)) / 20e-6 ** 2);
    expect(found.isAbsolute).toBe(true);
    expect(band.outsideDb!).toBeCloseTo(expected, 0);
    expect(band.outsideDb! - band.insideDb!).toBeCloseTo(cupDb[4]! + 20, 0);
  });
});

describe("what says nothing is said to", () => {
  test("two noises that have nothing in common: every band, and no delay", () => {
    const found = read(outside, noise(SECONDS, 9, 0.005));
    expect(found.bands.map(({ reason }) => reason)).toEqual(HZ.map(() => "low-coherence"));
    expect(reductionOf(found)).toEqual(HZ.map(() => null));
    expect(found.delayS).toBeNull();
  });

  test("coherence is the share of the inside that comes from outside", () => {
    // As much of another noise as of the one outside: 1/2, and 1/(1 + 1/4) with half its amplitude.
    for (const [gain, expected] of [
      [0.5, 0.8],
      [2, 0.2],
    ] as const) {
      const found = read(outside, plus(outside, noise(SECONDS, 8), gain));
      for (const { coherence } of found.bands.slice(2))
        expect(Math.abs(coherence! - expected)).toBeLessThan(0.03);
    }
  });

  test("bands without noise outside are named, the others count", () => {
    // Through a filter that takes 140 dB off the upper three octaves; steps of 16 bits are then louder.
    const lowPass = designFilter([0, 0, 0, 0, 0, 140, 140, 140], 4096);
    const low = convolve(outside, lowPass, -4096);
    const bits16 = (samples: Float32Array) =>
      samples.map((one) => Math.round(one * 32_768) / 32_768);
    const found = read(bits16(low), bits16(low.map((one) => one / 4)), { step: 2 ** -15 });
    expect(found.bands.map(({ reason }) => reason).slice(6)).toEqual([
      "too-little-noise",
      "too-little-noise",
    ]);
    for (const db of reductionOf(found).slice(0, 4)) expect(db!).toBeCloseTo(12.04, 1);
  });

  test("channels the other way round: inside louder in every band", () => {
    const found = read(behindCup, outside);
    expect(looksSwapped(found.bands)).toBe(true);
    expect(looksSwapped(read(outside, behindCup).bands)).toBe(false);
    const turned = found.bands.map(swapped).map((band) => reduced(band).noiseReductionDb!);
    for (const [band, db] of turned.entries()) expect(db).toBeCloseTo(cupDb[band]!, 0);
  });

  test.each([
    ["digital silence", () => new Float32Array(SECONDS * rateHz)],
    ["an offset", () => new Float32Array(SECONDS * rateHz).fill(0.01)],
    ["steps of one bit", () => noise(SECONDS, 5, 2 ** -24)],
    ["a hiss 80 dB down", () => noise(SECONDS, 5, 0.05e-4)],
  ])("a dead channel: %s", (_, nothing) => {
    expect(read(outside, nothing()).deadChannel).toBe("inside");
    expect(read(nothing(), outside).deadChannel).toBe("outside");
    expect(read(outside, behindCup).deadChannel).toBeNull();
  });

  test("clipping is counted by channel", () => {
    const hot = outside.map((value) => Math.max(-1, Math.min(1, 40 * value)));
    const { clippedPct } = read(hot, behindCup);
    expect(clippedPct.outside).toBeGreaterThan(1);
    expect(clippedPct.inside).toBe(0);
  });

  test("shorter than one segment there is nothing, and no band says otherwise", () => {
    const found = read(outside.subarray(0, 8000), behindCup.subarray(0, 8000));
    expect(found.durationS).toBe(0);
    expect(found.bands.every(({ reason }) => reason === "too-little-noise")).toBe(true);
  });
});

describe("a canceller of known delay and gain", () => {
  // Behind a cup the canceller adds the opposite wave late: attenuation by the closed form, over the band.
  const gain = 0.9;
  const late = 12;
  const delayS = late / rateHz;
  const part: ActivePart = {
    attenuationDb: null,
    delayS,
    gain,
    maximumDb: null,
    bandwidthHz: null,
    saturatesAboveDb: null,
    batteryMin: null,
  };
  const cancelled = (from: Float32Array) =>
    from.map((value, at) => value - gain * (at < late ? 0 : from[at - late]!));
  // Over a flat cup, so that white noise is of equal power per hertz inside too, as the closed form has it.
  const flat = outside.map((value) => value / 10);
  /** Closed form by definition: mean of |1 − g·e^(−jφ)|² over the band's frequencies. */
  const expectedDb = HZ.map((_, band) => {
    const midHz = 1000 * 10 ** (0.3 * (band - 4));
    let sum = 0;
    for (let step = 0; step < 2000; step++) {
      const f = midHz * (10 ** -0.15 + ((step + 0.5) / 2000) * (10 ** 0.15 - 10 ** -0.15));
      sum += 1 + gain * gain - 2 * gain * Math.cos(2 * Math.PI * f * delayS);
    }
    return -10 * Math.log10(sum / 2000);
  });

  function active(inside: Float32Array, insideOn: Float32Array, outsideOn = outside) {
    const off = read(outside, inside).bands;
    const on = read(outsideOn, insideOn).bands;
    const offBands = off.map(reduced);
    const onBands = on.map((band, index) => reducedActive(band, off[index]!));
    return { on, ear: earAttenuation(offBands, onBands, NO_CORRECTION_DB) };
  }

  test("is recovered in every band, where it adds noise too", () => {
    const { ear } = active(flat, cancelled(flat));
    for (const [band, db] of ear.activeDb!.entries())
      expect(Math.abs(db! - expectedDb[band]!)).toBeLessThan(0.3);
    expect(ear.activeDb![5]!).toBeLessThan(0);
  });

  test("a louder noise the second time changes nothing: each against its own outside", () => {
    const louder = noise(SECONDS, 6, 0.2);
    const { ear } = active(flat, cancelled(louder.map((value) => value / 10)), louder);
    for (const [band, db] of ear.activeDb!.entries())
      expect(Math.abs(db! - expectedDb[band]!)).toBeLessThan(0.5);
  });

  test("nor does the coherence that it lowers", () => {
    // A noise of the worker's own, 25 dB under the inside: of what 17 dB at 63 Hz leave it is an eighth.
    const own = noise(SECONDS, 7, 0.005 * 10 ** (-25 / 20));
    const { on, ear } = active(plus(flat, own), plus(cancelled(flat), own));
    expect(on[0]!.coherence!).toBeLessThan(0.9);
    const withOwn = expectedDb.map(
      (db) => -10 * Math.log10((10 ** (-db / 10) + 10 ** -2.5) / (1 + 10 ** -2.5)),
    );
    for (const [band, db] of ear.activeDb!.entries())
      expect(Math.abs(db! - withOwn[band]!)).toBeLessThan(0.4);
    // What a transfer function would have made of it: γ² of the inside, so too much attenuation.
    const overstatedDb = -10 * Math.log10(on[0]!.coherence!);
    expect(overstatedDb).toBeGreaterThan(0.4);
  });

  test("a band whose coherence it takes away altogether still counts", () => {
    const own = noise(SECONDS, 7, 0.005 * 10 ** (-12 / 20));
    const { on, ear } = active(plus(flat, own), plus(cancelled(flat), own));
    expect(on[0]!.reason).toBe("low-coherence");
    const expected =
      -10 * Math.log10((10 ** (-expectedDb[0]! / 10) + 10 ** -1.2) / (1 + 10 ** -1.2));
    expect(Math.abs(ear.activeDb![0]! - expected)).toBeLessThan(0.5);
  });

  test("passes against its own model, fails against a better one", () => {
    const { ear } = active(flat, cancelled(flat));
    const passed = checkActivePart(activeAttenuationDb(part), ear.activeDb!)!;
    expect(passed.hasPassed).toBe(true);
    const better = activeAttenuationDb({ ...part, delayS: delayS / 2, gain: 0.98 });
    const failed = checkActivePart(better, ear.activeDb!)!;
    expect(failed.hasPassed).toBe(false);
    expect(Math.max(...failed.shortfallDb.map((db) => db ?? 0))).toBeGreaterThan(3);
  });
});

describe("the active check", () => {
  const stated = [12, 16, 18, 10, 2, 0, 0, 0] as const;

  test("behind by up to the tolerance passes, by more fails", () => {
    const by = (less: number) => stated.map((db) => db - less);
    expect(checkActivePart(stated, by(3))!.hasPassed).toBe(true);
    expect(checkActivePart(stated, by(3.1))!.hasPassed).toBe(false);
  });

  test("a band that matters and said nothing: neither passed nor failed", () => {
    expect(checkActivePart(stated, [null, ...stated.slice(1)])!.hasPassed).toBeNull();
    expect(checkActivePart(stated, [...stated.slice(0, 7), null])!.hasPassed).toBe(true);
    // Any other band that is behind fails all the same.
    expect(checkActivePart(stated, [null, 5, ...stated.slice(2)])!.hasPassed).toBe(false);
  });

  test("noise added where none is stated fails; a model that states nothing is not checked", () => {
    expect(checkActivePart(stated, [12, 16, 18, 10, 2, 0, -5, 0])!.hasPassed).toBe(false);
    expect(checkActivePart(null, stated)).toBeNull();
  });
});

describe("the personal attenuation", () => {
  // ISO 4869-2, A-weightings as printed there; pink noise is equal in every octave.
  const A = [-26.2, -16.1, -8.6, -3.2, 0, 1.2, 1, -1.1];

  test("an equal attenuation in all bands is the rating, whatever the noise", () => {
    const flat = HZ.map(() => 20);
    expect(personalAttenuationDb(flat, null)).toBeCloseTo(20, 9);
    expect(personalAttenuationDb(flat, [70, 80, 90, 95, 92, 88, 84, 80])).toBeCloseTo(20, 9);
  });

  test("by hand, with pink noise and with a task's spectrum", () => {
    const sum = (levels: readonly number[]) =>
      10 * Math.log10(levels.reduce((total, db) => total + 10 ** (db / 10), 0));
    expect(personalAttenuationDb(CUP_DB, null)).toBeCloseTo(
      sum(A) - sum(A.map((db, band) => db - CUP_DB[band]!)),
      9,
    );
    const task = [90, 95, 98, 94, 88, 82, 76, 70] as const;
    const weighted = task.map((db, band) => db + A[band]!);
    expect(personalAttenuationDb(CUP_DB, [...task])).toBeCloseTo(
      sum(weighted) - sum(weighted.map((db, band) => db - CUP_DB[band]!)),
      9,
    );
  });

  test("63 Hz and 8 kHz may say nothing, the others not", () => {
    const without = (band: number) => CUP_DB.map((db, one) => (one === band ? null : db));
    for (const [band, hz] of HZ.entries())
      expect(personalAttenuationDb(without(band), null) !== null).toBe(hz === 63 || hz === 8000);
  });

  test("a correction is added by band; the uncertainty says what was stated", () => {
    const bands = CUP_DB.map((db, band) => ({
      frequencyHz: HZ[band]!,
      outsideDb: 100,
      insideDb: 100 - db,
      coherence: null,
      reason: null,
    }));
    const ear = earAttenuation(bands.map(reduced), null, OPEN_EAR_DB);
    expect(ear.attenuationDb[6]).toBeCloseTo(CUP_DB[6]! + OPEN_EAR_DB[6], 9);
    expect(ear.activeDb).toBeNull();
    expect(methodSdDb("tone", "own")).toBeLessThan(methodSdDb("tone", "open-ear"));
    expect(methodSdDb("tone", "none")).toBeLessThan(methodSdDb("alike", "none"));
  });

  /**
   * ISO 11904-1:2002, diffuse-field response of the open ear at the eardrum, third-octaves from memory; the octaves are
   * their energy means.
   */
  test.each([
    [125, [0, 0.2, 0.4], "0.2"],
    [250, [0.6, 0.8, 1.1], "0.8"],
    [500, [1.5, 2.1, 2.8], "2.2"],
    [1000, [3.3, 4.1, 5.5], "4.4"],
    [2000, [7.7, 11, 15.3], "12.4"],
    [4000, [15.7, 12.9, 10.6], "13.6"],
    [8000, [9.4, 9.5, 6.8], "8.7"],
  ])("open ear at %d Hz", (hz, thirds, printed) => {
    const mean = 10 * Math.log10(thirds.reduce((sum, db) => sum + 10 ** (db / 10), 0) / 3);
    expect(mean).toAgreeWithPrinted(printed);
    expect(OPEN_EAR_DB[HZ.indexOf(hz)]).toBe(Number(printed));
  });
});
