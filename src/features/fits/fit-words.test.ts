import { expect, test } from "vitest";
import type { Candidate, EarBands, FitTestView } from "../../../shared/schemas/fit";
import { testI18n } from "../../lib/test-i18n";
import { activeWord, judgedByWord, judgedDb } from "./fit-words";

const i18n = testI18n();
const active = { modelId: "m", wornDb: 88, wornActiveDb: 78, twaDb: null } as Candidate;
const off = { ...active, isActiveCredited: false };
const wornBy = (checked: number, all: number) => ({
  siteCredits: true,
  checkedOf: () => ({ checked, all }),
});

test("of a group it says on how many the check of an active part is passed", () => {
  expect(judgedByWord(i18n, off, wornBy(2, 3))).toMatch(/part off: its check is passed on 2 of 3$/);
  expect(judgedByWord(i18n, off, wornBy(0, 3))).toMatch(/part off: no passed check on record$/);
  expect(judgedByWord(i18n, off, wornBy(0, 0))).toMatch(/part off: no passed check on record$/);
  // The first two hundred, of more.
  expect(judgedByWord(i18n, off, wornBy(200, 200))).toMatch(/not all who would wear it are known$/);
  expect(judgedByWord(i18n, { ...active, isActiveCredited: true }, wornBy(3, 3))).toMatch(
    /part on: its check is passed on all of them$/,
  );
});

test("what has no active part is judged by its only figure", () => {
  expect(judgedByWord(i18n, { ...off, wornActiveDb: null }, wornBy(0, 1))).toBeNull();
});

test("the level beside a word is the one that the word is about", () => {
  expect(judgedDb(off)).toBe(88);
  expect(judgedDb({ ...active, isActiveCredited: true })).toBe(78);
  expect(judgedDb({ ...off, twaDb: 75.9 })).toBe(75.9);
});

test("a passed check of one ear alone says which ear was not checked", () => {
  const ear = { isRelative: false } as EarBands;
  const checked = (left: EarBands | null, right: EarBands | null, activePassed = true) =>
    activeWord(i18n, { activePassed, facts: { bands: { left, right } } } as FitTestView);
  expect(checked(ear, ear)).toBe("active part passed");
  expect(checked(ear, null)).toBe("active part passed on the left, not checked on the right");
  expect(checked(null, ear)).toBe("active part passed on the right, not checked on the left");
  expect(checked(ear, null, false)).toBe("active part not passed");
});
