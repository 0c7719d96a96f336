import ICAL from "ical.js";
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

test("another program reads each entry as it was given", () => {
  const entries = [
    {
      uid: "finding 1",
      date: "2026-12-31",
      summary: `Не хватает защиты; ${"Гайдабура, ".repeat(12)}`,
      url: "https://x.example/findings/1",
    },
    {
      uid: "duty:2",
      date: "2028-02-29",
      summary: "one, two;\nthree \\",
      url: "https://x.example/due",
    },
  ];
  const calendar = new ICAL.Component(ICAL.parse(writeCalendar("Ostmere works", at, entries)));
  expect(calendar.getFirstPropertyValue("name")).toBe("Ostmere works");
  const read = calendar.getAllSubcomponents("vevent").map((component) => {
    const event = new ICAL.Event(component);
    return {
      uid: event.uid,
      date: event.startDate.toString(),
      ends: event.endDate.toString(),
      isAllDay: event.startDate.isDate,
      summary: event.summary,
      url: String(component.getFirstPropertyValue("url")),
    };
  });
  expect(read).toEqual(
    entries.map((entry, index) => ({
      ...entry,
      ends: ["2027-01-01", "2028-03-01"][index],
      isAllDay: true,
    })),
  );
});
