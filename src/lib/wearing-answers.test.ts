import { expect, test } from "vitest";
import { testI18n } from "./test-i18n";
import { isClearlyLess, keptBesideWords } from "./wearing-answers";

const task = (name: string, statedPct: number | null) => ({ name, statedPct });

const i18n = testI18n();

test("a word on a day that states the wearing itself is said to be kept beside it", () => {
  expect(keptBesideWords(i18n, [task("Sawing", null)])).toBeNull();
  expect(keptBesideWords(i18n, [task("Sawing", 100), task("Pressing", 100)])).toContain(
    "that you wore it the whole time, and that counts",
  );
  expect(keptBesideWords(i18n, [task("Sawing", 100), task("Pressing", 80)])).toContain(
    "how long you wore it, and that counts",
  );
  expect(keptBesideWords(i18n, [task("Sawing", null), task("Pressing", 80)])).toMatch(
    /^For Pressing it is written down/,
  );
});

test("clearly less is more than ten points below what is written down", () => {
  const said = (wornCount: number, statedPct: number | null) =>
    isClearlyLess({ wornCount, seenCount: 4, statedPct });
  expect(said(3, 100)).toBe(true);
  expect(said(4, 100)).toBe(false);
  expect(said(3, 85)).toBe(false);
  expect(said(0, null)).toBe(false);
});
