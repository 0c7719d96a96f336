import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  type ChannelKind,
  type DoseSettings,
  evaluateHistory,
  type HistoryChannel,
} from "../../shared/acoustics/history";

/**
 * One-sided proofs against noise whose truth is known: random levels, eight a second, through an exponential detector of
 * 1 s (IEC 61672-1, slow), from which the channels of a history are taken.
 */

const STEP_S = 1 / 8;
/** Points within a step at which the true dose is taken. */
const FINE = 16;

interface Noise {
  /** Energy mean of each eighth of a second. */
  readonly input: readonly number[];
  /** Slow level as energy at each fine point, and at the end of each eighth. */
  readonly slow: readonly number[];
  readonly slowAtEnd: readonly number[];
}

function detect(input: readonly number[], restingAt = 0): Noise {
  const slow: number[] = [];
  const slowAtEnd: number[] = [];
  let state = restingAt;
  for (const energy of input) {
    for (let point = 0; point < FINE; point++) {
      const timeS = ((point + 0.5) * STEP_S) / FINE;
      slow.push(energy + (state - energy) * Math.exp(-timeS));
    }
    state = energy + (state - energy) * Math.exp(-STEP_S);
    slowAtEnd.push(state);
  }
  return { input, slow, slowAtEnd };
}

function trueDosePct({ slow }: Noise, settings: DoseSettings): number {
  const { criterionLevelDb, exchangeRateDb, thresholdDb } = settings;
  let sum = 0;
  for (const energy of slow) {
    const levelDb = 10 * Math.log10(energy);
    if (thresholdDb !== null && levelDb < thresholdDb) continue;
    sum += 2 ** ((levelDb - criterionLevelDb) / exchangeRateDb);
  }
  return (100 * sum * STEP_S) / FINE / 28_800;
}

const mean = (values: readonly number[]) =>
  values.reduce((sum, value) => sum + value, 0) / values.length;
const decibels = (energy: number) => 10 * Math.log10(energy);

/** A channel of the noise with so many eighths an interval; a last, shorter interval is dropped by the caller. */
function channelOf(kind: ChannelKind, noise: Noise, eighths: number): HistoryChannel {
  const values: number[] = [];
  for (let from = 0; from < noise.input.length; from += eighths) {
    if (kind === "laeq") values.push(mean(noise.input.slice(from, from + eighths)));
    else if (kind === "las") values.push(noise.slowAtEnd[from + eighths - 1]!);
    else
      values.push(
        Math.max(
          ...noise.slow.slice(from * FINE, (from + eighths) * FINE),
          ...noise.slowAtEnd.slice(from, from + eighths),
        ),
      );
  }
  return {
    kind,
    levels: Int16Array.from(values, (energy) => Math.round(100 * decibels(energy))),
  };
}

const settings = fc.record({
  criterionLevelDb: fc.constantFrom(85, 90),
  exchangeRateDb: fc.constantFrom(3, 4, 5, 6),
  thresholdDb: fc.constantFrom(null, 70, 80, 90),
});
/** Pieces from a single eighth to several seconds: bursts, steps, quiet. */
const pieces = fc.array(
  fc.tuple(fc.integer({ min: 30, max: 125 }), fc.constantFrom(1, 2, 8, 8, 24, 56)),
  { minLength: 1, maxLength: 14 },
);
const eighths = fc.constantFrom(1, 4, 8, 16, 80);

/** The noise in whole intervals. */
function build(list: readonly (readonly [number, number])[], interval: number): Noise {
  const input = list.flatMap(([db, count]) => new Array<number>(count).fill(10 ** (db / 10)));
  while (input.length % interval !== 0) input.push(1);
  return detect(input);
}

/** Rounding to hundredths of a decibel and the sum for the integral. */
const ROUNDING = 1 + 2.5e-3;

describe("one-sided proofs hold on random noise", () => {
  test("from LAeq: no dose of the slow level exceeds its bound, nor its maximum", () => {
    fc.assert(
      fc.property(pieces, eighths, settings, (list, interval, one) => {
        const noise = build(list, interval);
        const { counted } = evaluateHistory(
          [channelOf("laeq", noise, interval)],
          interval * STEP_S,
          [],
          [one, { ...one, exchangeRateDb: 5 }],
        );
        for (const figure of counted.doses) {
          if (figure!.bound === "exact") continue;
          expect(figure!.bound).toBe("upper");
          expect(trueDosePct(noise, figure!.settings)).toBeLessThanOrEqual(
            figure!.dosePct * ROUNDING,
          );
        }
        expect(counted.maxSlow!.bound).toBe("upper");
        expect(decibels(Math.max(...noise.slowAtEnd))).toBeLessThanOrEqual(
          counted.maxSlow!.levelDb + 0.01,
        );
      }),
      { numRuns: 400 },
    );
  });

  test("from LAeq, for a part of it too, whatever was left out before", () => {
    fc.assert(
      fc.property(pieces, pieces, settings, (before, list, one) => {
        const noise = build([...before, ...list], 8);
        const from = Math.ceil(build(before, 1).input.length / 8);
        const count = noise.input.length / 8;
        fc.pre(from < count);
        const { counted } = evaluateHistory(
          [channelOf("laeq", noise, 8)],
          1,
          [{ id: "x", kind: "left-out", fromIndex: 0, toIndex: from }],
          [{ ...one, exchangeRateDb: 5 }],
        );
        const rest = { ...noise, slow: noise.slow.slice(from * 8 * FINE) };
        const figure = counted.doses[0]!;
        expect(trueDosePct(rest, figure.settings)).toBeLessThanOrEqual(figure.dosePct * ROUNDING);
      }),
      { numRuns: 200 },
    );
  });

  test("from LASmax: no dose exceeds it", () => {
    fc.assert(
      fc.property(pieces, eighths, settings, (list, interval, one) => {
        fc.pre(one.exchangeRateDb !== 3 || one.thresholdDb !== null);
        const noise = build(list, interval);
        const { counted } = evaluateHistory(
          [channelOf("las-max", noise, interval)],
          interval * STEP_S,
          [],
          [one],
        );
        expect(counted.doses[0]!.bound).toBe("upper");
        // A true level a hair below a threshold may round up to it, never the other way by more than the rounding.
        const lenient = {
          ...one,
          thresholdDb: one.thresholdDb === null ? null : one.thresholdDb + 0.005,
        };
        expect(trueDosePct(noise, lenient)).toBeLessThanOrEqual(
          counted.doses[0]!.dosePct * ROUNDING,
        );
      }),
      { numRuns: 200 },
    );
  });

  test("from LAS: LAeq and its dose are at least what is said", () => {
    fc.assert(
      fc.property(
        pieces,
        eighths,
        fc.integer({ min: 0, max: 120 }),
        (list, interval, restingDb) => {
          const noise = detect(build(list, interval).input, 10 ** (restingDb / 10));
          const one = { criterionLevelDb: 85, exchangeRateDb: 3, thresholdDb: null };
          const { counted } = evaluateHistory(
            [channelOf("las", noise, interval)],
            interval * STEP_S,
            [],
            [one],
          );
          if (counted.laeq === null) return;
          expect(counted.laeq.bound).toBe("lower");
          // A slowly falling level holds little besides its rounding: 0.12 % of each value.
          const roundingShare = 0.0012 * mean(noise.slowAtEnd) * 2;
          const laeq = mean(noise.input);
          const proved = 10 ** (counted.laeq.levelDb / 10);
          const rounding = roundingShare / (interval * STEP_S);
          expect(proved).toBeLessThanOrEqual(laeq * ROUNDING + rounding);
        },
      ),
      { numRuns: 300 },
    );
  });

  test("from LAS every few seconds: the dose is at least what is said", () => {
    fc.assert(
      fc.property(pieces, fc.constantFrom(16, 40, 80), settings, (list, interval, one) => {
        fc.pre(one.exchangeRateDb !== 3);
        const noise = build(list, interval);
        const { counted } = evaluateHistory(
          [channelOf("las", noise, interval)],
          interval * STEP_S,
          [],
          [one],
        );
        const figure = counted.doses[0]!;
        expect(figure.bound).toBe("lower");
        const lenient = {
          ...one,
          thresholdDb: one.thresholdDb === null ? null : one.thresholdDb - 0.05,
        };
        expect(figure.dosePct).toBeLessThanOrEqual(trueDosePct(noise, lenient) * 1.01 + 1e-12);
      }),
      { numRuns: 200 },
    );
  });
});

describe("single bursts, by the detector's closed form", () => {
  const one: DoseSettings = { criterionLevelDb: 90, exchangeRateDb: 5, thresholdDb: null };
  const burst = detect([
    ...new Array<number>(8).fill(1e11),
    ...new Array<number>(8 * 30).fill(1e3),
  ]);

  test("the law on each second's LAeq understates a burst of one second, the bound does not", () => {
    // ∫(1 − e^(−t))^p over the burst and (1 − 1/e)^p/p after it, p = 2·lg 2, against 1 second by second.
    const power = 2 * Math.log10(2);
    const after = (1 - Math.exp(-1)) ** power / power;
    const secondBySecond = (100 * 2 ** (20 / 5)) / 28_800;
    expect(trueDosePct(burst, one)).toBeGreaterThan(secondBySecond * after);
    const { counted } = evaluateHistory([channelOf("laeq", burst, 8)], 1, [], [one]);
    expect(counted.doses[0]!.dosePct).toBeGreaterThanOrEqual(trueDosePct(burst, one));
    expect(counted.doses[0]!.dosePct).toBeLessThan(3 * trueDosePct(burst, one));
  });

  test("steady noise by LAS proves an LAeq of 10 lg(1 − 1/e) = −2.0 dB, at 1/8 s −0.3 dB", () => {
    const steady = detect(new Array<number>(8 * 600).fill(1e9), 1e9);
    const at = (interval: number) =>
      evaluateHistory([channelOf("las", steady, interval)], interval * STEP_S, [], []).counted.laeq!
        .levelDb;
    expect(at(8)).toBeCloseTo(90 + 10 * Math.log10(1 - Math.exp(-1)), 1);
    expect(at(1)).toBeCloseTo(90 + 10 * Math.log10(8 * (1 - Math.exp(-1 / 8))), 1);
  });
});
