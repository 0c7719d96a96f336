import { expect, test } from "vitest";
import {
  formatDate,
  formatDay,
  formatInstant,
  formatInstantsApart,
  formatLongDay,
  formatMonth,
  formatShortDate,
  formatTime,
  formatWeekday,
  localDateOf,
  parseDate,
  parseTime,
} from "./date";

test("dates in both languages", () => {
  expect(formatDay("2026-12-01", "en")).toBe("Tuesday 1 December");
  expect(formatDay("2026-12-01", "de")).toBe("Dienstag, 1. Dezember");
  expect(formatDate("2026-12-01", "de")).toBe("1. Dezember 2026");
  expect(formatLongDay("2026-12-01", "en")).toBe("Tuesday 1 December 2026");
  expect(formatLongDay("2026-12-01", "de")).toBe("Dienstag, 1. Dezember 2026");
  expect(formatShortDate("2026-03-09", "de")).toBe("09.03.2026");
  expect(formatShortDate("2026-09-09", "en")).toBe("9 Sep 2026");
  expect(formatWeekday("2026-12-03", "en")).toBe("Thu 3");
  expect(formatWeekday("2026-12-03", "de")).toBe("Do 3.");
  expect(formatMonth("2026-03-01", "de")).toBe("Mär");
});

test("an instant is shown in the site's zone, on both sides of a change of clocks", () => {
  expect(formatTime("2026-10-25T00:30:00Z", "Europe/London")).toBe("01:30");
  expect(formatTime("2026-10-25T01:30:00Z", "Europe/London")).toBe("01:30");
  expect(localDateOf("2026-12-01T03:00:00Z", "America/New_York")).toBe("2026-11-30");
  expect(formatInstant("2026-12-01T06:12:00Z", "Europe/London", "en")).toBe(
    "1 December 2026, 06:12",
  );
});

test("instants of one minute are told apart", () => {
  const apart = (...times: string[]) =>
    formatInstantsApart(
      times.map((time) => `2026-12-01T${time}Z`),
      "Europe/London",
      "en",
    ).map((text) => text.replace("1 December 2026, ", ""));
  expect(apart("06:12:00.000", "06:13:00.000")).toEqual(["06:12", "06:13"]);
  expect(apart("06:12:09.000", "06:12:41.500", "06:14:41.500")).toEqual([
    "06:12:09",
    "06:12:41",
    "06:14",
  ]);
  expect(apart("06:12:09.120", "06:12:09.500")).toEqual(["06:12:09.120", "06:12:09.500"]);
});

test("dates and times as typed", () => {
  expect(parseDate("1.12.2026", "de")).toBe("2026-12-01");
  expect(parseDate("1/12/2026", "en")).toBe("2026-12-01");
  expect(parseDate("2026-2-3", "en")).toBe("2026-02-03");
  expect(parseDate("31.2.2026", "de")).toBeNull();
  expect(parseDate("1/12/2026", "de")).toBeNull();
  expect(parseTime("6")).toBe("06:00");
  expect(parseTime("600")).toBe("06:00");
  expect(parseTime("2215")).toBe("22:15");
  expect(parseTime("6.30")).toBe("06:30");
  expect(parseTime("24:00")).toBeNull();
});
