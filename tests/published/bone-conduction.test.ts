import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { evaluateDay } from "../../shared/acoustics/day";
import {
  BONE_CONDUCTION_LIMIT_DB,
  boneConductionLimitDb,
  combinationAttenuationDb,
} from "../../shared/acoustics/protection/bone-conduction";
import type { OctaveBandValues } from "../../shared/acoustics/types";
import {
  buildLevel,
  buildProtection,
  buildProtector,
  buildTask,
  dayOf,
  ruleSet,
} from "./build-day";
import "../setup/printed";

const same = (db: number): OctaveBandValues => [db, db, db, db, db, db, db, db];

test("the limits lie between 40 and 60 dB, the least at 2 kHz (published summaries; values from memory)", () => {
  const known = BONE_CONDUCTION_LIMIT_DB.slice(1) as number[];
  expect(Math.min(...known)).toBe(BONE_CONDUCTION_LIMIT_DB[5]);
  expect(Math.min(...known)).toBeGreaterThanOrEqual(40);
  expect(Math.max(...known)).toBeLessThanOrEqual(60);
});

test("of pink noise no more than 44.4 dB comes off (computed by hand from the limits)", () => {
  // 106.98 dB(A) without; 36.9, 40.4, 37.8, 51.0, 61.2, 54.0 and 48.9 behind add up to 62.54.
  expect(boneConductionLimitDb()).toAgreeWithPrinted("44.4");
});

describe("two worn together", () => {
  test("are credited band by band with no more than that, and 63 Hz as tested", () => {
    const bands = { meanDb: same(60), sdDb: same(2) };
    expect(combinationAttenuationDb(bands, 1)).toEqual([58, 47, 51, 58, 49, 40, 47, 50]);
    expect(combinationAttenuationDb({ meanDb: same(30), sdDb: same(2) }, 1)).toEqual(same(28));
  });

  test("property: no test data bring a combination's day under what the skull lets through", () => {
    const spectrumDb: OctaveBandValues = [null, 100, 100, 100, 100, 100, 100, 100];
    const level = buildLevel(117, { octaveBandsDb: spectrumDb });
    fc.assert(
      fc.property(fc.double({ min: 0, max: 80, noNaN: true }), (db) => {
        const protection = buildProtection(
          {},
          {
            outer: buildProtector({ modelId: "outer" }),
            combinationBands: { meanDb: same(db), sdDb: same(0) },
          },
        );
        const task = buildTask("cell", 480, level, { protection, wornPct: 100 });
        const [seen] = evaluateDay(dayOf(task), ruleSet("eu-2003-10-ec"), []).tasks;
        expect(117 - seen!.wornDb!).toBeLessThanOrEqual(boneConductionLimitDb(spectrumDb) + 1e-9);
      }),
    );
  });
});
