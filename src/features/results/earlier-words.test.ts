import { expect, test } from "vitest";
import type { ResultView } from "../../../shared/schemas/result";
import { testI18n } from "../../lib/test-i18n";
import { otherResultWords } from "./earlier-words";

const i18n = testI18n();

const figures: ResultView["earlier"][number]["figures"] = {
  outsideDb: 94.301,
  atEarDb: 83.801,
  whileWornDb: 83.8,
  verdictOutside: "over",
  verdictAtEar: "under",
  word: "just-enough",
  governingCriteria: [],
};
const shown = {
  methodVersion: 2,
  governing: { key: "uk-noise-2005", version: 1 },
  figures: figures as ResultView["figures"],
};
const other = (changed: Partial<typeof figures>, more: object = {}) => ({
  id: "one",
  computedAt: "2026-12-01T10:00:00Z",
  isCurrent: false,
  governingRuleSet: "uk-noise-2005",
  ruleSetVersion: 1,
  methodVersion: 2,
  figures: { ...figures, ...changed },
  ...more,
});

test("a result that differs by thousandths is not listed as if it were another one", () => {
  expect(otherResultWords(i18n, other({ outsideDb: 94.304, atEarDb: 83.799 }), shown)).toBe(
    "no change in the rounded figures",
  );
  expect(otherResultWords(i18n, other({}, { methodVersion: 1 }), shown)).toBe(
    "by method version 1, no change in the rounded figures",
  );
});

test("what it came to stands with one that differs", () => {
  expect(otherResultWords(i18n, other({ atEarDb: 88, verdictAtEar: "over" }), shown)).toBe(
    "at the ear 88.0, over, just enough, outside 94.3",
  );
});
