import { expect, test } from "vitest";
import { buildLevel, buildTask, dayOf, STEADY } from "../../tests/published/build-day";
import type { DayInput, Protection, TimedTask } from "../acoustics/types";
import { ruleSetVersion } from "../rule-sets";
import { longestStay } from "./longest-stay";

const uk = ruleSetVersion("uk-2005", 1)!;
const us = ruleSetVersion("us-general-industry", 1)!;

interface Part {
  id: string;
  levelDb: number;
  minutes: number;
  protection?: Protection;
  wornPct?: number | null;
}

const timed = ({ id, levelDb, minutes, protection, wornPct = 100 }: Part): TimedTask =>
  buildTask(
    id,
    minutes,
    buildLevel(levelDb, { metric: STEADY, lcMinusLaDb: 0, grade: "measured-group" }),
    { protection: protection ?? null, wornPct: protection ? wornPct : null },
  );

/** A day of these parts, in which the first lasts as long as it is asked for. */
const day =
  (...parts: Part[]) =>
  (minutes: number): DayInput => {
    const tasks = parts
      .map((part, index) => timed(index === 0 ? { ...part, minutes } : part))
      .filter(({ durationMin }) => durationMin > 0);
    return dayOf(...tasks);
  };

const plug = (ownFitDb: number | null): Protection => ({
  assignmentId: "a",
  inner: {
    modelId: "m",
    revisionId: null,
    name: "plug",
    kind: "foam-plug",
    usRatingDb: 25,
    snrDb: 25,
    hDb: null,
    mDb: null,
    lDb: null,
    slc80Db: null,
    bands: null,
    active: null,
  },
  outer: null,
  combinationBands: null,
  ownFitDb,
  activeCheckPassed: false,
});

const loud = { id: "loud", minutes: 0 };

// 29 CFR 1910.95, Table G-16a: 95 dB 4 h, 100 dB 2 h, 105 dB 1 h.
test.each([
  [95, 240],
  [100, 120],
  [105, 60],
])("Table G-16a: %d dB for %d min", (levelDb, allowedMin) => {
  expect(longestStay(day({ ...loud, levelDb }), "loud", us, 480)?.allowedMin).toBe(allowedMin);
});

test("the rest of the day takes its share: half the dose leaves half of the time, rounded down to 5 min", () => {
  // 4 h at 90 dB are 50 %; at 97 dB the whole dose takes 181.9 min, so that 90.9 are left.
  const found = longestStay(
    day({ ...loud, levelDb: 97 }, { id: "rest", levelDb: 90, minutes: 240 }),
    "loud",
    us,
    480,
  );
  expect(found).toEqual({ allowedMin: 90, isMost: false, isWorn: false });
});

test("at the ear: by what the protector takes off this worker; 110 dB less 15 is 95, 76 min up to 87 dB", () => {
  // 87 + 10 lg(480 / T) = 95: T = 480 / 10^0.8 = 76.07 min.
  const found = longestStay(day({ ...loud, levelDb: 110, protection: plug(15) }), "loud", uk, 480);
  expect(found).toEqual({ allowedMin: 75, isMost: false, isWorn: true });
});

test("what is not certain is not said", () => {
  const unfitted = day({ ...loud, levelDb: 110, protection: plug(null) });
  expect(longestStay(unfitted, "loud", uk, 480)).toBeNull();
  const unknownWearing = day({ ...loud, levelDb: 100, protection: plug(15), wornPct: null });
  expect(longestStay(unknownWearing, "loud", uk, 480)).toBeNull();
  const overAlready = day({ ...loud, levelDb: 95 }, { id: "rest", levelDb: 95, minutes: 300 });
  expect(longestStay(overAlready, "loud", us, 480)).toBeNull();
});

test("a quiet task may last the whole shift, one of a few minutes not even 5", () => {
  expect(longestStay(day({ ...loud, levelDb: 80 }), "loud", us, 480)).toEqual({
    allowedMin: 480,
    isMost: true,
    isWorn: false,
  });
  // 7 h at 90 dB leave 12.5 %; at 114 dB the whole dose takes 17.2 min.
  expect(
    longestStay(
      day({ ...loud, levelDb: 114 }, { id: "rest", levelDb: 90, minutes: 420 }),
      "loud",
      us,
      480,
    )?.allowedMin,
  ).toBe(0);
});
