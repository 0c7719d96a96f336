import { expect, test } from "vitest";
import { createI18n, directionOf } from "./index";
import { isolate } from "./isolate";

// A name of three Hebrew letters, as anybody's; U+2068 and U+2069 as the Unicode Bidirectional Algorithm (UAX 9) has them.
const name = "\u05d0\u05d1\u05d2";

test("only what is written from right to left is isolated", () => {
  expect(isolate("M. Dąbrowik")).toBe("M. Dąbrowik");
  expect(isolate(name)).toBe(`\u2068${name}\u2069`);
  expect(isolate("\u0645\u0631\u064a\u0645")).toMatch(/^\u2068.*\u2069$/);
});

test("a language’s page begins on the side on which its script does", () => {
  for (const language of ["en", "de", "es", "pl"]) expect(directionOf(language)).toBe("ltr");
  for (const language of ["ar", "he", "fa"]) expect(directionOf(language)).toBe("rtl");
});

test.each(["en", "de"] as const)("a name in a sentence is isolated, in %s", async (locale) => {
  const i18n = await createI18n(locale);
  expect(i18n.t("{name}, {time}", { name, time: "1 Dec" })).toBe(`\u2068${name}\u2069, 1 Dec`);
  expect(i18n._("{name}, {time}", { name: "D. Tavernor", time: "1 Dec" })).toBe(
    "D. Tavernor, 1 Dec",
  );
  expect(i18n.t("{count, plural, one {# value} other {# values}}", { count: 3 })).toContain("3");
});
