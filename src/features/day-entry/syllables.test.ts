import { expect, test } from "vitest";
import { syllables, withSoftHyphens } from "./syllables";

test.each([
  ["Grundlärm", "Grund-lärm"],
  ["Schleifen", "Schlei-fen"],
  ["Triebwerksprüfstand", "Trieb-werks-prüf-stand"],
  ["Teardown", "Tear-down"],
  ["Inspection", "Inspec-tion"],
  ["Linishing", "Linish-ing"],
  ["Hammering", "Ham-mering"],
  ["Break", "Break"],
  ["Probelauf", "Pro-belauf"],
])("%s is broken as %s", (word, broken) => {
  expect(syllables(word).join("-")).toBe(broken);
});

test("a name keeps its words, its marks and its letters", () => {
  const name = withSoftHyphens("Run-up, Kompressorhaus");
  expect(name.replaceAll("\u00ad", "")).toBe("Run-up, Kompressorhaus");
  expect(name).toContain("Kom\u00adpres");
});
