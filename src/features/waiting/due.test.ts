import { expect, test } from "vitest";
import { FindingRow } from "../../../shared/schemas/finding";
import { CrewProgress } from "../../../shared/schemas/waiting";
import { crewMoment, groupOf, nextShiftOf, placeFindings } from "./due";

const id = (last: number) => `00000000-0000-4000-8000-${String(last).padStart(12, "0")}`;
const today = "2026-12-01";

const finding = (overrides: Partial<FindingRow> = {}): FindingRow =>
  FindingRow.parse({
    id: id(1),
    kind: "no-protector",
    state: "new",
    criterion: "",
    useKey: "",
    facts: {},
    firstDate: "2026-11-30",
    lastDate: "2026-11-30",
    daysCount: 1,
    workersCount: 1,
    dueOn: today,
    rulesUntil: null,
    today: null,
    wentUp: null,
    cannot: null,
    siteId: id(90),
    worker: { id: id(50), name: "R. Szabó", employeeNumber: "3425" },
    subjectName: null,
    crewName: "Test cell days",
    figures: null,
    ownerName: null,
    revision: 1,
    can: { handle: true, markDone: true, comment: true },
    ...overrides,
  });

const crew = CrewProgress.parse({
  id: id(70),
  name: "Test cell days",
  siteId: id(90),
  timeZone: "Europe/London",
  date: today,
  nextDate: "2026-12-02",
  start: "06:00",
  lengthMin: 480,
  members: 8,
  saved: 5,
  absent: 0,
});

test("a crew is ahead of, in or past its shift by its own clock", () => {
  expect(crewMoment(crew, "05:59")).toBe("ahead");
  expect(crewMoment(crew, "06:00")).toBe("running");
  expect(crewMoment(crew, "14:00")).toBe("over");
  expect(crewMoment({ start: "22:00", lengthMin: 480 }, "23:30")).toBe("running");
});

test.each([
  ["no-protector", "new", today, "before-noise"],
  // Its date is the one that stands on its own page: what is past comes before all else.
  ["no-protector", "new", "2026-11-30", "overdue"],
  ["no-protector", "in-hand", "2026-12-04", "this-week"],
  ["not-worn-long-enough", "new", today, "today"],
  ["not-worn-long-enough", "new", "2026-11-28", "overdue"],
  ["protects-too-much", "new", "2026-12-20", "later"],
  ["reading-missing", "new", null, "later"],
] as const)("%s, %s, due %s: %s", (kind, state, dueOn, group) => {
  expect(groupOf(finding({ kind, state, dueOn }), today, today)).toBe(group);
});

test("what is due by the crew's next shift comes before the worker is in noise again", () => {
  const now = (time: string) => ({ today, time });
  expect(nextShiftOf(finding(), [crew], now("05:40"))).toBe(today);
  expect(nextShiftOf(finding(), [crew], now("17:50"))).toBe("2026-12-02");
  expect(nextShiftOf(finding({ crewName: null }), [crew], now("17:50"))).toBe(today);
  const due = finding({ kind: "over-limit-at-ear", state: "in-hand", dueOn: "2026-12-02" });
  expect(groupOf(due, today, today)).toBe("this-week");
  expect(groupOf(due, today, "2026-12-02")).toBe("before-noise");
});

test("overdue stands first, the longest of it at the top", () => {
  const other = (last: number, overrides: Partial<FindingRow>) =>
    finding({
      id: id(last),
      worker: { id: id(50 + last), name: "D. Tavernor", employeeNumber: "4417" },
      ...overrides,
    });
  const { items } = placeFindings(
    [
      other(2, { kind: "no-protector", dueOn: today }),
      other(3, { kind: "reading-gap", dueOn: "2026-11-29" }),
      other(4, { kind: "wearing-unknown", dueOn: "2026-11-20" }),
    ],
    () => today,
    () => today,
  );
  expect(items.map((item) => [item.finding.id, item.group])).toEqual([
    [id(4), "overdue"],
    [id(3), "overdue"],
    [id(2), "before-noise"],
  ]);
});

test("what one order answers stands on one row, read from the latest day", () => {
  const over = finding({ id: id(2), kind: "over-limit-at-ear", lastDate: "2026-11-27" });
  const gap = finding({ id: id(4), kind: "reading-gap" });
  const other = finding({
    id: id(3),
    kind: "over-limit-at-ear",
    worker: { id: id(51), name: "D. Tavernor", employeeNumber: "4417" },
  });
  const { items } = placeFindings(
    [over, finding(), gap, other],
    () => today,
    () => today,
  );
  expect(items.map((item) => [item.finding.id, item.also.map((one) => one.id)])).toEqual([
    [id(1), [id(2)]],
    [id(3), []],
    [id(4), []],
  ]);
});

test("an order that is marked as done asks for nothing until a later day does", () => {
  const done = finding({ state: "done" });
  const over = finding({ id: id(2), kind: "over-limit-at-ear" });
  const first = placeFindings(
    [done, over],
    () => today,
    () => today,
  );
  expect(first.items).toEqual([]);
  expect(first.toBeChecked.map((one) => [one.finding.id, one.also.length])).toEqual([[id(1), 1]]);
  const later = placeFindings(
    [done, { ...over, lastDate: "2026-12-01" }],
    () => today,
    () => today,
  );
  expect(later.items.map((item) => item.finding.id)).toEqual([id(2)]);
});
