import { describe, expect, test } from "vitest";
import { cellOf, editText, parseCell, type UnaccountedWords } from "./cells";
import { taskCell } from "./columns";

const words: UnaccountedWords = {
  quiet: "quiet",
  likeTheRest: "like the rest",
  unknown: "unknown",
};
const minutes = taskCell("run-up");

describe("minutes", () => {
  test.each([
    ["450", "en", 450],
    ["7:30", "en", 450],
    ["7.5h", "en", 450],
    ["7,5h", "de", 450],
    ["90 min", "en", 90],
  ] as const)("%s in %s are %d", (text, locale, value) => {
    expect(parseCell(minutes, text, locale, words)).toEqual(cellOf(value, "typed"));
  });

  test.each([
    ["7,5h", "en", "ambiguous"],
    ["1.234", "de", "ambiguous"],
    ["abc", "en", "not-a-duration"],
    ["NaN", "en", "not-a-duration"],
    ["1e400", "en", "not-a-duration"],
    ["-5", "en", "negative"],
    ["999999", "en", "more-than-a-day"],
  ] as const)("%s in %s is %s, and stays as it was typed", (text, locale, fault) => {
    expect(parseCell(minutes, text, locale, words)).toMatchObject({ value: null, text, fault });
  });

  test("an empty cell is neither 0 nor a fault", () => {
    expect(parseCell(minutes, " ", "en", words)).toMatchObject({ value: null, fault: null });
  });
});

test.each([
  ["6", "06:00"],
  ["0630", "06:30"],
  ["22.15", "22:15"],
])("a start typed as %s is %s", (text, value) => {
  expect(parseCell("start", text, "en", words).value).toBe(value);
});

test("a start at 25:00 is no time", () => {
  expect(parseCell("start", "25:00", "en", words).fault).toBe("not-a-time");
});

describe("time not accounted for", () => {
  test.each([
    ["quiet 70", { how: "quiet", levelDb: 70 }],
    ["q70", { how: "quiet", levelDb: 70 }],
    ["like the rest", { how: "like-the-rest" }],
    ["l", { how: "like-the-rest" }],
    ["?", { how: "unknown" }],
  ])("%s", (text, value) => {
    expect(parseCell("unaccounted", text, "en", words).value).toEqual(value);
  });

  test("bare minutes follow from the rest and are not taken for a level", () => {
    expect(parseCell("unaccounted", "60", "en", words).fault).toBe("minutes-follow");
  });

  test("quiet at 300 dB is refused", () => {
    expect(parseCell("unaccounted", "quiet 300", "en", words).fault).toBe("level-out-of-range");
  });
});

describe("a reading", () => {
  test("is a level, or a dose with its sign", () => {
    expect(parseCell("reading", "98.9", "en", words).value).toEqual({
      kind: "level",
      levelDb: 98.9,
    });
    expect(parseCell("reading", "63 %", "en", words).value).toEqual({ kind: "dose", dosePct: 63 });
  });

  test.each([
    ["19.9", "level-out-of-range"],
    ["160.1", "level-out-of-range"],
    ["loud", "not-a-reading"],
  ])("%s is %s", (text, fault) => {
    expect(parseCell("reading", text, "en", words).fault).toBe(fault);
  });
});

test("a wearing time lies between 0 and 100", () => {
  expect(parseCell("worn", "99 %", "en", words).value).toBe(99);
  expect(parseCell("worn", "101", "en", words).fault).toBe("not-a-share");
});

test.each([
  ["reading", { kind: "level", levelDb: 98.9 }],
  ["reading", { kind: "dose", dosePct: 12.5 }],
  ["unaccounted", { how: "quiet", levelDb: 65.5 }],
  ["unaccounted", { how: "like-the-rest" }],
  ["length", 487],
  ["worn", 99.5],
  ["start", "22:00"],
] as const)("what %s shows for editing reads back as the same, in both languages", (id, value) => {
  for (const locale of ["en", "de"] as const) {
    const text = editText(cellOf(value, "saved"), locale, words);
    expect(parseCell(id, text, locale, words).value).toEqual(value);
  }
});
