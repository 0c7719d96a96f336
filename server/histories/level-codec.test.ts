import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { MISSING } from "../../shared/acoustics/history";
import { CHUNK_VALUES, packLevels, unpackLevels } from "./level-codec";

/** A seeded generator, so that every run packs the same noise. */
function generator(seed: number): () => number {
  let state = seed;
  return () => {
    state = (Math.imul(state, 1_664_525) + 1_013_904_223) >>> 0;
    return state / 2 ** 32;
  };
}

/** Eight hours of machine noise: a level that wanders, and a spread from second to second, on a step of so many hundredths. */
function eightHours(spreadDb: number, step: number): Int16Array {
  const random = generator(7);
  const normal = () => Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
  let meanDb = 88;
  return Int16Array.from({ length: 28_800 }, () => {
    meanDb = Math.min(105, Math.max(65, meanDb + 0.4 * normal()));
    return Math.round(((meanDb + spreadDb * normal()) * 100) / step) * step;
  });
}

function packedSize(levels: Int16Array): number {
  let size = 0;
  for (let at = 0; at < levels.length; at += CHUNK_VALUES)
    size += packLevels(levels.subarray(at, at + CHUNK_VALUES)).length;
  return size;
}

describe("eight hours at one value a second", () => {
  // From a steady fan to hammering: the level of a second differs from the next by 1 to 10 dB as a standard deviation.
  test.each([
    [1, 1],
    [3, 1],
    [6, 1],
    [10, 1],
    [3, 10],
    [6, 10],
  ])(
    "with a spread of %d dB in steps of %d hundredths stays under 45 kB a channel",
    (spreadDb, step) => {
      expect(packedSize(eightHours(spreadDb, step))).toBeLessThan(45_000);
    },
  );

  test("tenths take less than hundredths, for a step is stored once", () => {
    expect(packedSize(eightHours(3, 10))).toBeLessThan(0.75 * packedSize(eightHours(3, 1)));
  });

  test("whatever the levels are, two bytes a value and a head is the most", () => {
    const random = generator(3);
    const wild = Int16Array.from({ length: 28_800 }, () => Math.round((random() - 0.5) * 32_766));
    expect(packedSize(wild)).toBeLessThanOrEqual(2 * 28_800 + 8 * 24);
  });
});

describe("what was packed comes back", () => {
  const levels = fc.array(
    fc.oneof(fc.integer({ min: -16_383, max: 16_383 }), fc.constant(MISSING)),
    { maxLength: 400 },
  );

  test("for any levels, missing ones among them", () => {
    fc.assert(
      fc.property(levels, (given) => {
        const whole = Int16Array.from(given);
        expect(unpackLevels(packLevels(whole), whole.length)).toEqual(whole);
      }),
    );
  });

  test("for steps, silence, and nothing but missing values", () => {
    for (const given of [
      new Int16Array(CHUNK_VALUES).fill(MISSING),
      new Int16Array(CHUNK_VALUES),
      Int16Array.from({ length: CHUNK_VALUES }, (_, index) => (index % 2 === 0 ? 16_300 : -2_000)),
      Int16Array.of(8_430),
      new Int16Array(0),
    ])
      expect(unpackLevels(packLevels(given), given.length)).toEqual(given);
  });

  test("a level of no instrument is refused, and bytes that are no chunk", () => {
    expect(() => packLevels(Int16Array.of(20_000))).toThrow(RangeError);
    const packed = packLevels(Int16Array.from({ length: 50 }, (_, index) => 8_000 + index));
    expect(() => unpackLevels(packed, 51)).toThrow(RangeError);
    expect(() => unpackLevels(packed.subarray(0, 4), 50)).toThrow();
  });
});
