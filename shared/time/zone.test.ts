import { describe, expect, test } from "vitest";
import { addDays, atLocalTime, atOrAfterLocalTime, localDate, localTime } from "./zone";

describe("local time in a zone (transitions from the IANA time zone database)", () => {
  test("an ordinary evening", () => {
    expect(atLocalTime("2026-11-30", "22:00", "Europe/London")).toEqual({
      kind: "one",
      instant: new Date("2026-11-30T22:00:00Z"),
    });
    expect(atLocalTime("2026-07-01", "06:00", "America/Chicago")).toEqual({
      kind: "one",
      instant: new Date("2026-07-01T11:00:00Z"),
    });
  });

  test("summer time ends: 01:30 comes twice in London on 25 October 2026", () => {
    expect(atLocalTime("2026-10-25", "01:30", "Europe/London")).toEqual({
      kind: "twice",
      first: new Date("2026-10-25T00:30:00Z"),
      second: new Date("2026-10-25T01:30:00Z"),
    });
  });

  test("summer time begins: 02:30 never comes in Chicago on 8 March 2026", () => {
    expect(atLocalTime("2026-03-08", "02:30", "America/Chicago")).toEqual({ kind: "skipped" });
  });

  test.each([
    ["2026-03-08", "02:00", "America/Chicago", "2026-03-08T08:00:00Z"],
    ["2026-03-08", "02:30", "America/Chicago", "2026-03-08T08:00:00Z"],
    ["2026-10-25", "01:00", "Europe/London", "2026-10-25T00:00:00Z"],
    ["2026-10-04", "02:00", "Australia/Lord_Howe", "2026-10-03T15:30:00Z"],
    // At midnight the clock goes from 23:59 to 01:00, in Santiago on 6 September 2026.
    ["2026-09-06", "00:00", "America/Santiago", "2026-09-06T04:00:00Z"],
    // Samoa left out the whole of 30 December 2011.
    ["2011-12-30", "05:00", "Pacific/Apia", "2011-12-30T10:00:00Z"],
    ["2026-07-01", "06:00", "Europe/London", "2026-07-01T05:00:00Z"],
  ])("%s %s in %s, or the next time there is", (date, time, timeZone, instant) => {
    expect(atOrAfterLocalTime(date, time, timeZone)).toEqual(new Date(instant));
  });

  test("half-hour zones and zones without summer time", () => {
    expect(atLocalTime("2026-12-01", "06:00", "Asia/Kolkata")).toEqual({
      kind: "one",
      instant: new Date("2026-12-01T00:30:00Z"),
    });
    expect(localDate(new Date("2026-11-30T18:31:00Z"), "Asia/Kolkata")).toBe("2026-12-01");
    expect(localTime(new Date("2026-11-30T18:31:00Z"), "Asia/Kolkata")).toBe("00:01");
  });

  test("days are counted on the calendar", () => {
    expect(addDays("2028-02-28", 1)).toBe("2028-02-29");
    expect(addDays("2026-01-01", -1)).toBe("2025-12-31");
  });
});
