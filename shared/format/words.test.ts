import { expect, test } from "vitest";
import { withinSentence } from "./words";

test("English labels lose their capital inside a sentence, German ones only where it is no noun’s", () => {
  expect(withinSentence("In hand", "en")).toBe("in hand");
  expect(withinSentence("In Arbeit", "de")).toBe("in Arbeit");
  expect(withinSentence("Nicht lange genug getragen", "de")).toBe("nicht lange genug getragen");
  expect(withinSentence("Über 85", "de")).toBe("über 85");
  expect(withinSentence("Ablesung fehlt", "de")).toBe("Ablesung fehlt");
  expect(withinSentence("Problem gemeldet", "de")).toBe("Problem gemeldet");
});
