import { describe, expect, test } from "vitest";
import { clockChanges, clockText, clockTicks, editClock, readClock } from "./history-clock";

const HOUR = 3600;
const winter = {
  startMs: Date.parse("2026-11-30T06:00:37Z"),
  lengthS: 8 * HOUR,
  timeZone: "Europe/London",
};
/** Central Europe on the night of 25 October 2026: at 01:00 UTC the clock goes from 03:00 back to 02:00. */
const back = {
  startMs: Date.parse("2026-10-24T20:00:00Z"),
  lengthS: 8 * HOUR,
  timeZone: "Europe/Berlin",
};
/** On 29 March 2026 at 01:00 UTC it goes from 02:00 to 03:00. */
const forward = {
  startMs: Date.parse("2026-03-28T21:00:00Z"),
  lengthS: 8 * HOUR,
  timeZone: "Europe/Berlin",
};

test("a time by the site's clock", () => {
  expect(clockText(winter, 0)).toBe("06:00");
  expect(clockText(back, 0)).toBe("22:00");
  expect([editClock(winter, 0), editClock(winter, 23)]).toEqual(["06:00:37", "06:01"]);
});

describe("ticks at round times", () => {
  test("of the clock, not of the history", () => {
    const ticks = clockTicks(winter, { fromS: 0, toS: 8 * HOUR }, 10);
    expect(ticks.map(({ text }) => text)).toEqual([
      "07:00",
      "08:00",
      "09:00",
      "10:00",
      "11:00",
      "12:00",
      "13:00",
      "14:00",
    ]);
    expect(ticks[0]?.atS).toBe(HOUR - 37);
  });

  test("with seconds where one looks that close", () => {
    const ticks = clockTicks(winter, { fromS: 0, toS: 60 }, 12);
    expect(ticks[0]).toEqual({ atS: 3, text: "06:00:40" });
  });

  test("the hour that came twice is there twice, the one that never came is not", () => {
    const texts = (clock: typeof back) =>
      clockTicks(clock, { fromS: 0, toS: clock.lengthS }, 10).map(({ text }) => text);
    expect(texts(back).filter((text) => text === "02:00")).toHaveLength(2);
    expect(texts(forward)).not.toContain("02:00");
    expect(texts(forward)).toContain("03:00");
  });
});

test("a change of the clock within the history is found", () => {
  expect(clockChanges(back)).toEqual([{ atS: 5 * HOUR, byMin: -60 }]);
  expect(clockChanges(forward)).toEqual([{ atS: 4 * HOUR, byMin: 60 }]);
  expect(clockChanges(winter)).toEqual([]);
});

describe("reading a typed time", () => {
  test("in the ways that people write it", () => {
    expect(readClock(winter, "7:30")).toEqual({ kind: "at", atS: [1.5 * HOUR - 37] });
    expect(readClock(winter, "0730")).toEqual({ kind: "at", atS: [1.5 * HOUR - 37] });
    expect(readClock(winter, "07:30:15")).toEqual({ kind: "at", atS: [1.5 * HOUR - 22] });
    expect(readClock(winter, "half past").kind).toBe("unreadable");
  });

  test("the minute in which the history starts is its start", () => {
    expect(readClock(winter, "06:00")).toEqual({ kind: "at", atS: [0] });
    expect(readClock(winter, "05:59").kind).toBe("outside");
    expect(readClock(winter, "06:00:10").kind).toBe("outside");
  });

  test("past midnight", () => {
    expect(readClock(back, "00:30")).toEqual({ kind: "at", atS: [2.5 * HOUR] });
  });

  test("a time that came twice is both; one that never came is none", () => {
    expect(readClock(back, "02:30")).toEqual({ kind: "at", atS: [4.5 * HOUR, 5.5 * HOUR] });
    expect(readClock(forward, "02:30").kind).toBe("outside");
  });
});
