import { expect, test } from "vitest";
import { FindingRow } from "../../../shared/schemas/finding";
import { CrewProgress } from "../../../shared/schemas/waiting";
import { crewMoment, placeFinding, placeFindings } from "./due";

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
    dueOn: today,
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
  ["05:00", { kind: "time", time: "06:00" }],
  ["09:00", { kind: "now" }],
  ["15:00", { kind: "day", date: "2026-12-02", isLate: false }],
])("what keeps a worker out of noise is due before the next time in it: at %s", (nowTime, due) => {
  expect(placeFinding(finding(), crew, today, nowTime)).toEqual({ group: "before-noise", due });
});

test("a later date that an officer has set counts instead", () => {
  const planned = finding({ state: "in-hand", dueOn: "2026-12-04" });
  expect(placeFinding(planned, crew, today, "09:00")).toEqual({
    group: "this-week",
    due: { kind: "day", date: "2026-12-04", isLate: false },
  });
});

test("what is due today ends with the shift; what was due before is late", () => {
  const short = finding({ kind: "not-worn-long-enough" });
  expect(placeFinding(short, crew, today, "09:00")).toEqual({
    group: "before-shift-ends",
    due: { kind: "time", time: "14:00" },
  });
  const late = finding({ kind: "not-worn-long-enough", dueOn: "2026-11-28" });
  expect(placeFinding(late, crew, today, "09:00")).toEqual({
    group: "before-shift-ends",
    due: { kind: "day", date: "2026-11-28", isLate: true },
  });
});

test("later, and without a date", () => {
  expect(
    placeFinding(finding({ kind: "protects-too-much", dueOn: "2026-12-20" }), crew, today, "09:00")
      .group,
  ).toBe("later");
  expect(
    placeFinding(finding({ kind: "reading-missing", dueOn: null }), null, today, "09:00"),
  ).toEqual({ group: "later", due: { kind: "none" } });
});

test("over the limit stands on the row of what explains it, and alone where nothing does", () => {
  const over = finding({ id: id(2), kind: "over-limit-at-ear" });
  const other = finding({
    id: id(3),
    kind: "over-limit-at-ear",
    worker: { id: id(51), name: "D. Tavernor", employeeNumber: "4417" },
  });
  const items = placeFindings([over, finding(), other], [crew], today, () => "09:00");
  expect(items.map((item) => [item.finding.id, item.also?.id ?? null])).toEqual([
    [id(1), id(2)],
    [id(3), null],
  ]);
});
