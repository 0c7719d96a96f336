import { describe, expect, test } from "vitest";
import { testI18n } from "../../lib/test-i18n";
import { doseAxisTopPct, doseLook, dosePlace, doseTicks } from "./dose-axis";
import { inLines } from "./history-print";
import { lengthText } from "./history-words";

describe("names beside the picture on paper", () => {
  test("a long name goes on in the next line", () => {
    expect(inLines("1,160 % Recommended exposure limit, 85", 24)).toEqual([
      "1,160 % Recommended",
      "exposure limit, 85",
    ]);
  });
});

describe("the axis of doses", () => {
  test("has the limit on it, well above its foot, whatever the highest dose", () => {
    for (const highestPct of [0, 40, 100, 1160, 25_000]) {
      const top = doseAxisTopPct(highestPct);
      expect(top).toBeGreaterThan(Math.max(100, highestPct));
      expect(dosePlace(100) / dosePlace(top)).toBeGreaterThan(0.4);
    }
  });

  test("stands by ratio, and names the tens", () => {
    expect(dosePlace(1)).toBe(0);
    expect(dosePlace(0)).toBe(0);
    expect(dosePlace(100)).toBeCloseTo(2, 12);
    expect(
      doseTicks(1300)
        .filter(({ isNamed }) => isNamed)
        .map(({ pct }) => pct),
    ).toEqual([1, 10, 100, 1000]);
  });

  test("tells its lines by dashes too", () => {
    const dashes = [0, 1, 2, 3, 4, 5].map((place) => doseLook(place).dash.join(" "));
    expect(new Set(dashes).size).toBe(6);
  });
});

test.each([
  [45, "45 s"],
  [60, "1 min"],
  [260, "4 min 20 s"],
  [899.6, "15 min"],
  [901, "15 min"],
  [5400, "1 h 30 min"],
])("a length of %d s is %s", (lengthS, text) => {
  expect(lengthText(testI18n(), lengthS, "en").replaceAll("\u00a0", " ")).toBe(text);
});
