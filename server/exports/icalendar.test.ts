import { expect, test } from "vitest";
import { writeCalendar } from "./icalendar";

const at = new Date("2026-12-02T04:20:00Z");

test("a line has at most 75 octets, is continued by a space, and reads as it was", () => {
  const summary = `Не хватает защиты: ${"Гайдабура, ".repeat(12)}`;
  const text = writeCalendar("Due", at, [
    { uid: "finding 1", date: "2026-12-31", summary, url: "https://dinward.example/findings/1" },
  ]);
  for (const line of text.split("\r\n")) expect(Buffer.byteLength(line)).toBeLessThanOrEqual(75);
  const unfolded = text.replaceAll("\r\n ", "");
  expect(unfolded).toContain(`SUMMARY:${summary.replaceAll(",", "\\,")}\r\n`);
});

test("an all-day entry ends before the next day; marks are masked; every line ends in CRLF", () => {
  const text = writeCalendar("Ostmere; due", at, [
    { uid: "a", date: "2026-12-31", summary: "one, two;\nthree \\", url: "https://x.example/a" },
  ]);
  expect(text.split("\r\n")).toEqual([
    "BEGIN:VCALENDAR",
    "VERSION:2.0",
    "PRODID:-//Dinward//Due//EN",
    "CALSCALE:GREGORIAN",
    "METHOD:PUBLISH",
    "NAME:Ostmere\\; due",
    "BEGIN:VEVENT",
    "UID:a",
    "DTSTAMP:20261202T042000Z",
    "DTSTART;VALUE=DATE:20261231",
    "DTEND;VALUE=DATE:20270101",
    "SUMMARY:one\\, two\\;\\nthree \\\\",
    "URL:https://x.example/a",
    "TRANSP:TRANSPARENT",
    "END:VEVENT",
    "END:VCALENDAR",
    "",
  ]);
});
