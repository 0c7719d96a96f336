import { expect, test } from "vitest";
import { formatDuration, parseDuration } from "./duration";

test.each([
  ["450", "en", 450],
  ["7:30", "en", 450],
  ["7.5h", "en", 450],
  ["7,5h", "de", 450],
  ["7,5 h", "de", 450],
  ["7h 30", "en", 450],
  ["7 h 30 min", "de", 450],
  ["90 min", "en", 90],
  ["24:00", "en", 1440],
] as const)("%s in %s is %d minutes", (text, locale, minutes) => {
  expect(parseDuration(text, locale)).toEqual({ kind: "ok", value: minutes });
});

test.each([
  ["7,5h", "en", "ambiguous"],
  ["7:75", "en", "invalid"],
  ["seven", "en", "invalid"],
  ["", "en", "empty"],
] as const)("%s in %s is %s", (text, locale, kind) => {
  expect(parseDuration(text, locale).kind).toBe(kind);
});

test("minus minutes stay visible as such: the form refuses them, the parser does not hide them", () => {
  expect(parseDuration("-5", "en")).toEqual({ kind: "ok", value: -5 });
});

test("durations are written in hours and minutes", () => {
  expect(formatDuration(450, "en")).toBe("7\u00a0h\u00a030\u00a0min");
  expect(formatDuration(480, "en")).toBe("8\u00a0h");
  expect(formatDuration(0, "en")).toBe("0\u00a0min");
  expect(formatDuration(-45, "en")).toBe("\u221245\u00a0min");
  expect(formatDuration(null, "en")).toBe("\u2013");
});
