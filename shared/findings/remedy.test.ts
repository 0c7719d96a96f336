import { expect, test } from "vitest";
import {
  buildLevel,
  buildProtection,
  buildTask,
  dayOf,
  STEADY,
} from "../../tests/published/build-day";
import type {
  DayInput,
  ProtectorData,
  ProtectorKind,
  TaskLevel,
  TimedTask,
} from "../acoustics/types";
import { ruleSetVersion } from "../rule-sets";
import { handoutsOf, remedyOf } from "./facts";
import { proposeRemedy } from "./remedy";

const UK = ruleSetVersion("uk-2005", 1)!;
const US = ruleSetVersion("us-general-industry", 1)!;
const NIOSH = ruleSetVersion("niosh-rel", 1)!;

/** Takes the same off in every band and by every label, so that what is left can be worked out by hand. */
const device = (name: string, kind: ProtectorKind, dB: number): ProtectorData => ({
  modelId: name,
  revisionId: null,
  name,
  kind,
  usRatingDb: dB + 7,
  snrDb: dB,
  hDb: dB,
  mDb: dB,
  lDb: dB,
  slc80Db: dB,
  bands: {
    meanDb: [dB, dB, dB, dB, dB, dB, dB, dB],
    sdDb: [0, 0, 0, 0, 0, 0, 0, 0],
  },
  active: null,
});

/** British practice takes 4 dB off what the label says: these leave 30, 20 and 10 dB there. */
const heavy = device("Heavy muff", "earmuff", 34);
const middle = device("Middle muff", "earmuff", 24);
const band = device("Light band", "banded-plug", 14);

const level = (levelDb: number): TaskLevel =>
  buildLevel(levelDb, { metric: STEADY, lcMinusLaDb: 0 });

const task = (
  name: string,
  durationMin: number,
  levelDb: number,
  more: Partial<TimedTask> = {},
): TimedTask =>
  buildTask(name, durationMin, level(levelDb), {
    id: `timed ${name}`,
    taskId: `task ${name}`,
    ...more,
  });

const wears = (inner: ProtectorData, wornPct = 100): Partial<TimedTask> => ({
  protection: buildProtection(inner),
  wornPct,
});

const day = (...tasks: TimedTask[]): DayInput => ({ ...dayOf(...tasks), date: "2026-11-30" });

test("one protector for the whole day comes before any two", () => {
  // 100 − 20 = 80 and 96 − 20 = 76: the band's good part, 75 to 80, holds both.
  const found = proposeRemedy(day(task("Grinding", 240, 100), task("Fettling", 240, 96)), UK, [
    heavy,
    middle,
    band,
  ]);
  expect(found?.remedy).toMatchObject({ names: ["Middle muff"], inTasks: [], word: "good" });
  expect(found?.left).toBeNull();
});

test("of several that would do for the whole day it is the one that Choose offers first", () => {
  // Both leave the same by one deviation, 25 − 3 and 22 less 4; at lower confidence 25 − 1.64 · 3 is less than 22.
  const flat = (dB: number) => Array<number>(8).fill(dB) as never;
  const pink = { ...level(100), octaveBandsDb: flat(92) };
  const spread = { ...middle, bands: { meanDb: flat(25), sdDb: flat(3) } };
  const steady = {
    ...device("Steady muff", "earmuff", 22),
    bands: { meanDb: flat(22), sdDb: flat(0) },
  };
  const inPink = day({ ...task("Grinding", 480, 100), level: pink });
  expect(proposeRemedy(inPink, UK, [spread, steady])?.remedy?.names).toEqual(["Steady muff"]);
  // Appendix B has no word for too much: by EN 458 95 − 30 = 65 is, and 95 − 20 = 75 is not (memory).
  const loud = day(byAWeighting(task("Mill", 480, 95)));
  expect(
    proposeRemedy(loud, US, [device("Strong", "earmuff", 30), device("Fair", "earmuff", 20)])
      ?.remedy?.names,
  ).toEqual(["Fair"]);
});

test("a day whose tasks lie far apart needs two: one for most of it, another in the task that it does not fit", () => {
  // 110 − 30 = 80 good, 88 − 30 = 58 far too much, 110 − 10 = 100 too little, 88 − 10 = 78 good.
  const input = day(
    task("Run-up", 300, 110),
    task("Teardown", 150, 88),
    task("Control room", 30, 60),
  );
  const found = proposeRemedy(input, UK, [heavy, middle, band]);
  expect(found?.remedy).toMatchObject({
    names: ["Heavy muff"],
    inTasks: [{ names: ["Light band"], taskNames: ["Teardown"], taskIds: ["task Teardown"] }],
    word: "good",
    wornDb: expect.closeTo(80, 6),
  });
  // Whatever the order of the register.
  expect(proposeRemedy(input, UK, [band, middle, heavy])).toEqual(found);
});

test("what the worker has already stays, and only the rest is to be given", () => {
  const found = proposeRemedy(
    day(task("Run-up", 300, 110, wears(heavy)), task("Teardown", 180, 88, wears(heavy))),
    UK,
    [heavy, middle, band],
  );
  const handouts = handoutsOf(remedyOf({ ...found })!);
  expect(handouts.map(({ names, taskNames }) => [names, taskNames])).toEqual([
    [["Light band"], ["Teardown"]],
  ]);
});

/** Known as an A-weighted level only: the rating less 7 dB comes off. */
const byAWeighting = (timed: TimedTask): TimedTask => ({
  ...timed,
  level: timed.level && { ...timed.level, lcMinusLaDb: null },
});

test("where the rule judges the shift, two are worn only in as few of the loudest tasks as will do", () => {
  // 126 − 33 = 93 at the hammer for 8 h, over 90; with both 5 dB more on the better, 88. At the bench 95 − 33 = 62.
  const found = proposeRemedy(
    day(byAWeighting(task("Hammer", 480, 126)), byAWeighting(task("Bench", 60, 95))),
    US,
    [device("Weak muff", "earmuff", 33), device("Weak plug", "foam-plug", 30)],
  );
  expect(found?.remedy).toMatchObject({
    names: ["Weak muff"],
    inTasks: [{ names: ["Weak plug", "Weak muff"], taskNames: ["Hammer"] }],
    word: "enough",
  });
});

test("the worker's own would do if it were worn: nothing is to be given", () => {
  const found = proposeRemedy(
    day(task("Grinding", 480, 110, wears(heavy, 60)), task("Break", 30, 60)),
    UK,
    [heavy, middle],
  );
  expect(found).toEqual({
    remedy: null,
    left: { kind: "wear-throughout", taskId: "task Grinding", taskName: "Grinding" },
  });
});

test("what the worker cannot wear is neither proposed nor said to be worn throughout", () => {
  const cannot = (modelId: string) =>
    new Map([[modelId, { ownFitDb: null, activeCheckPassed: false, cannotWear: true }]]);
  const loud = day(task("Grinding", 240, 100), task("Fettling", 240, 96));
  const register = [heavy, middle, band];
  expect(proposeRemedy(loud, UK, register)?.remedy?.names).toEqual(["Middle muff"]);
  const found = proposeRemedy(loud, UK, register, cannot(middle.modelId));
  expect(found?.remedy?.names ?? []).not.toContain("Middle muff");
  const held = day(task("Grinding", 480, 110, wears(heavy, 60)), task("Break", 30, 60));
  expect(proposeRemedy(held, UK, register, cannot(heavy.modelId))?.left?.kind).not.toBe(
    "wear-throughout",
  );
});

test("where nothing works it says what is left", () => {
  // 120 − 30 = 90 while worn, over the 85 of the action value.
  expect(proposeRemedy(day(task("Blow-down", 480, 120)), UK, [heavy, middle])?.left).toMatchObject({
    kind: "lower-noise",
    taskName: "Blow-down",
  });
  // 88 − 30 = 58 is too much, and nothing lighter is there.
  expect(proposeRemedy(day(task("Washing", 480, 88)), UK, [heavy])?.left).toMatchObject({
    kind: "other-protector",
    taskName: "Washing",
  });
  // Appendix B: 126 − 10 = 116 for 8 h.
  expect(proposeRemedy(day(task("Hammer", 480, 126)), US, [band])?.left).toMatchObject({
    kind: "shorten-time",
    taskName: "Hammer",
  });
});

test("nothing is said where the rule has no word for a protector, or nothing is in noise", () => {
  expect(proposeRemedy(day(task("Hammer", 480, 100)), NIOSH, [heavy])).toBeNull();
  expect(proposeRemedy(day(task("Office", 480, 60)), UK, [heavy])).toBeNull();
});

test("a register of forty devices and a day of ten tasks stay bounded work", () => {
  const register = Array.from({ length: 40 }, (_, at) =>
    device(`Device ${at}`, at % 2 === 0 ? "earmuff" : "foam-plug", 8 + (at % 20)),
  );
  const tasks = Array.from({ length: 10 }, (_, at) => task(`Task ${at}`, 40, 88 + at * 2));
  const found = proposeRemedy(day(...tasks), UK, register);
  expect(found).toEqual(proposeRemedy(day(...tasks), UK, [...register].reverse()));
  expect(found?.remedy ?? found?.left).not.toBeNull();
});
