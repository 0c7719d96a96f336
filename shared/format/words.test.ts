import { expect, test } from "vitest";
import { formatDay } from "./date";
import { startsSentence, withinSentence } from "./words";

test("English labels lose their capital inside a sentence, German ones only where it is no noun’s", () => {
  expect(withinSentence("In hand", "en")).toBe("in hand");
  expect(withinSentence("In Arbeit", "de")).toBe("in Arbeit");
  expect(withinSentence("Nicht lange genug getragen", "de")).toBe("nicht lange genug getragen");
  expect(withinSentence("Über 85", "de")).toBe("über 85");
  expect(withinSentence("Ablesung fehlt", "de")).toBe("Ablesung fehlt");
  expect(withinSentence("Problem gemeldet", "de")).toBe("Problem gemeldet");
});

test("a weekday has its capital where a sentence begins, in the languages that write it small too", () => {
  expect(startsSentence(formatDay("2026-12-02", "pl"), "pl")).toMatch(/^Środa, 2 grudnia$/);
  expect(startsSentence(formatDay("2026-12-02", "es"), "es")).toMatch(/^Miércoles/);
  expect(startsSentence(formatDay("2026-12-02", "de"), "de")).toMatch(/^Mittwoch/);
});
