import { expect, test } from "vitest";
import { isEndAhead } from "./end-ahead";

const night = { localStart: "19:00", whichHour: null, lengthMin: 720 };
const isAhead = (now: string, times = night, date = "2026-12-01") =>
  isEndAhead(date, times, "Europe/London", Date.parse(now));

test("a night from 19:00 to 07:00 is ahead at 20:26 and over at 07:00", () => {
  expect(isAhead("2026-12-01T20:26:00Z")).toBe(true);
  expect(isAhead("2026-12-02T06:59:00Z")).toBe(true);
  expect(isAhead("2026-12-02T07:00:00Z")).toBe(false);
});

test("the site's clock counts, and elapsed minutes", () => {
  const early = { localStart: "06:00", whichHour: null, lengthMin: 480 };
  expect(isAhead("2026-07-01T12:59:00Z", early, "2026-07-01")).toBe(true);
  expect(isAhead("2026-07-01T13:00:00Z", early, "2026-07-01")).toBe(false);
  // The clock goes back at 02:00 on 25 October 2026: twelve hours from 19:00 end at 06:00.
  expect(isAhead("2026-10-25T05:59:00Z", night, "2026-10-24")).toBe(true);
  expect(isAhead("2026-10-25T06:00:00Z", night, "2026-10-24")).toBe(false);
});

test("of two hours of one name the one that was chosen", () => {
  const hour = { localStart: "01:30", lengthMin: 60 };
  const at = "2026-10-25T01:45:00Z";
  expect(isAhead(at, { ...hour, whichHour: null }, "2026-10-25")).toBe(false);
  expect(isAhead(at, { ...hour, whichHour: "second" } as never, "2026-10-25")).toBe(true);
});

test("times that are not there yet say nothing", () => {
  expect(isAhead("2026-12-01T08:00:00Z", { ...night, localStart: "" })).toBe(false);
  expect(isAhead("2026-12-01T08:00:00Z", { ...night, lengthMin: Number.NaN })).toBe(false);
});
