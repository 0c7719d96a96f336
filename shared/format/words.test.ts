import { expect, test } from "vitest";
import { withinSentence } from "./words";

test("English labels lose their capital inside a sentence, German ones keep it", () => {
  expect(withinSentence("In hand", "en")).toBe("in hand");
  expect(withinSentence("In Arbeit", "de")).toBe("In Arbeit");
});
