import { expect, test } from "vitest";
import { buildLevel, STEADY } from "../../tests/published/build-day";
import type { TaskLevel } from "../acoustics/types";
import { mainLimit, ruleSetInForce } from "../rule-sets";
import { dayOf, type Placed, slotShare, timetableGoals } from "./slot-shares";

const date = "2026-03-02";
const us = ruleSetInForce("us-general-industry", date)!;
const uk = ruleSetInForce("uk-2005", date)!;

const level = (levelDb: number, metric = STEADY): TaskLevel => buildLevel(levelDb, { metric });

const person: Placed = {
  id: "ash",
  name: "Ash",
  employeeNumber: "1",
  mustWear: false,
  personalTargetDb: null,
  lengthMin: 480,
  tasks: [],
  assignments: [],
  fits: [],
  wornPct: {},
};

const shareAt = (taskLevel: TaskLevel | null, ruleSet = us) =>
  slotShare(
    dayOf(
      person,
      [{ taskId: "task", durationMin: 480 }],
      480,
      {
        date,
        site: { wearFromDb: 85, creditsActivePart: false, usesUncertainty: false },
        tasks: [{ id: "task", name: "Task", areaId: null, zone: "none", level: taskLevel }],
        models: [],
        pairs: [],
      },
      { wornPct: null, quietDb: null },
    ),
    480,
    ruleSet,
    mainLimit(ruleSet),
  );

test("four hours at 95 dB are the whole of a US day, so that a quarter of an hour is a sixteenth", () => {
  const { share, isUpper } = shareAt(level(95));
  expect(share).toBeCloseTo(1 / 16, 12);
  expect(isUpper).toBe(false);
});

test("below the threshold a slot takes nothing", () => {
  expect(shareAt(level(89)).share).toBe(0);
});

test("an energy mean under a 5 dB rule is the most that it can be", () => {
  const { share, isUpper } = shareAt(level(95, { kind: "laeq" }));
  expect(share).toBeCloseTo(1 / 16, 12);
  expect(isUpper).toBe(true);
});

test("a slot at the UK limit’s own level is one of 32, and by energy twice that 3.01 dB above", () => {
  expect(shareAt(level(87, { kind: "laeq" }), uk).share).toBeCloseTo(1 / 32, 12);
  expect(shareAt(level(87 + 10 * Math.log10(2), { kind: "laeq" }), uk).share).toBeCloseTo(
    1 / 16,
    9,
  );
});

test("noise that is not known is not nothing", () => {
  expect(shareAt(null).share).toBeNull();
});

test("only what adds up over a day can be shared out", () => {
  const quantities = timetableGoals(uk).map(
    ({ id }) => uk.criteria.find((criterion) => criterion.id === id)?.quantity,
  );
  expect(new Set(quantities)).toEqual(new Set(["lex-8h"]));
});
