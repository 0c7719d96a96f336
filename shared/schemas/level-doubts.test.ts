import { expect, test } from "vitest";
import { findLevelDoubts } from "./level-doubts";

/** 80 + 10·lg(4.9970) dB(A), with the A-weightings of IEC 61672-1, Table 3: 86.99. */
const FLAT = [80, 80, 80, 80, 80, 80, 80, 80];
const laeq = { kind: "laeq" };

test("a level more than a decibel from its bands or from its samples' energy mean is doubted", () => {
  expect(
    findLevelDoubts({ metric: laeq, levelDb: 88.1, octaveBandsDb: FLAT, samplesDb: [] }),
  ).toEqual([
    {
      code: "level-off-bands",
      params: { foundDb: expect.closeTo(86.99, 2), offDb: expect.closeTo(-1.11, 2) },
    },
  ]);
  // 90 and 80: 10·lg((10^9 + 10^8) / 2) = 87.40.
  expect(
    findLevelDoubts({ metric: laeq, levelDb: 85, octaveBandsDb: null, samplesDb: [90, 80] }),
  ).toEqual([
    {
      code: "level-off-samples",
      params: { foundDb: expect.closeTo(87.4, 2), offDb: expect.closeTo(2.4, 2) },
    },
  ]);
});

test("within a decibel, without anything beside it, or at another exchange rate nothing is asked", () => {
  expect(
    findLevelDoubts({ metric: laeq, levelDb: 87.9, octaveBandsDb: FLAT, samplesDb: [88.9] }),
  ).toEqual([]);
  expect(
    findLevelDoubts({ metric: laeq, levelDb: 103, octaveBandsDb: null, samplesDb: [] }),
  ).toEqual([]);
  expect(
    findLevelDoubts({
      metric: { kind: "lavg" },
      levelDb: 90,
      octaveBandsDb: FLAT,
      samplesDb: [70],
    }),
  ).toEqual([]);
});
