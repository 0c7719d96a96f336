import { describe, expect, test } from "vitest";
import { testI18n } from "../../lib/test-i18n";
import { exceedanceWords, figureTitle } from "./group-statistics";
import { plotScale } from "./probability-plot";

const i18n = testI18n();

test("a block says which quantity it counts", () => {
  const lex = { quantity: "lex-8h", exchangeRateDb: null, thresholdDb: null } as const;
  expect(figureTitle(i18n, lex, "en")).toBe("LEX,8h");
  const dose = { quantity: "dose", exchangeRateDb: 5, thresholdDb: 80 } as const;
  expect(figureTitle(i18n, dose, "en")).toBe("8-hour TWA, 5 dB, threshold 80");
  expect(figureTitle(i18n, { ...dose, thresholdDb: null }, "en")).toBe(
    "8-hour TWA, 5 dB, no threshold",
  );
});

test.each([
  [1, 1, "over 99.9 % of days"],
  [0.9995, 1, "over 99.9 % of days"],
  [0, 0, "under 0.1 % of days, with 95 % confidence"],
  [0.00001, 0.0009, "under 0.1 % of days, with 95 % confidence"],
  [0.00001, 0.02, "under 0.1 % of days, with 95 % confidence at most 2 %"],
  [0.004, 0.12, "0.4 % of days, with 95 % confidence at most 12 %"],
  [0.5, 0.996, "50 % of days, with 95 % confidence at most 99.6 %"],
])("a share of %d, at most %d, in words", (share, shareUpTo, words) => {
  expect(exceedanceWords(i18n, { share, shareUpTo }, "en").replaceAll("\u00a0", " ")).toBe(words);
});

describe("the level scale of the plot", () => {
  test("is that of the samples; limits far from them stand at its edges", () => {
    const scale = plotScale([94, 95, 96.5, 97], [80, 85, 98, 115]);
    expect(scale.lowDb).toBeGreaterThanOrEqual(91);
    expect(scale.highDb).toBeLessThanOrEqual(99);
    expect(scale.highDb).toBeGreaterThan(98);
  });

  test("has its least width where samples hardly differ", () => {
    const { lowDb, highDb } = plotScale([90, 90.1], []);
    expect(highDb - lowDb).toBeGreaterThanOrEqual(5);
    expect(lowDb).toBeLessThan(90);
    expect(highDb).toBeGreaterThan(90.1);
  });
});
