import { expect, test } from "vitest";
import { ClipCounter } from "./clipping";

const RATE_HZ = 48_000;
const INT16 = 1 - 2 ** -15;

const sine = (hz: number, amplitude: number, seconds = 1) =>
  Float32Array.from(
    { length: seconds * RATE_HZ },
    (_, at) => amplitude * Math.sin((2 * Math.PI * hz * at) / RATE_HZ + 0.3),
  );
const held = (sound: Float32Array, top: number, bottom = top) =>
  sound.map((value) => Math.max(-bottom, Math.min(top, value)));
const in16Bits = (sound: Float32Array) =>
  sound.map((value) => Math.round(value * 2 ** 15) / 2 ** 15);

function count(sound: Float32Array, { highest = 1, block = sound.length } = {}) {
  const counter = new ClipCounter(highest);
  for (let from = 0; from < sound.length; from += block) {
    const part = sound.slice(from, from + block);
    counter.process(part, part.length);
  }
  const { runs, samples, total } = counter;
  return { runs, samples, total };
}

test("flat tops at the channel's own maximum count, whichever side and however it is cut into blocks", () => {
  // 1 kHz is 48 samples a period; held at half its height from 30 to 150 degrees: 16 or 17 samples of each half.
  const both = count(in16Bits(held(sine(1000, 0.4), 0.2)), { highest: INT16 });
  expect(both.runs).toBe(2000);
  expect(both.samples / both.runs).toBeCloseTo(16, 0);
  const bottom = held(sine(1000, 0.4), 1, 0.2);
  expect(count(bottom).runs).toBe(1000);
  expect(count(bottom, { block: 7 })).toEqual(count(bottom));
});

test("a lower flat top is no end of the range once the sound goes higher", () => {
  const sound = held(sine(1000, 0.4), 0.2);
  sound[40_000] = 0.3;
  sound[40_024] = -0.3;
  expect(count(sound).runs).toBeLessThan(1);
});

test("at full scale it counts once, as before", () => {
  const sound = held(sine(1000, 2), 1);
  const { runs, samples } = count(sound);
  expect(runs).toBe(2000);
  expect(samples).toBe(sound.filter((value) => Math.abs(value) === 1).length);
});

test.each([
  ["63 Hz in 16 bits, whose rounded tops are equal samples", in16Bits(sine(63, 0.2)), INT16],
  ["the same kept in a floating-point file", in16Bits(sine(63, 0.2)), 1],
  ["20 Hz at full resolution", sine(20, 0.9), 1],
  ["a few steps of 16 bits", in16Bits(sine(250, 3 * 2 ** -15)), INT16],
  ["nothing", new Float32Array(1000), 1],
  ["an offset", new Float32Array(1000).fill(0.25), 1],
])("%s is not clipped", (_, sound, highest) => {
  expect(count(sound, { highest })).toMatchObject({ runs: 0, samples: 0 });
});
