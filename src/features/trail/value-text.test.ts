import { describe, expect, test } from "vitest";
import type { NamedThing } from "../../../shared/schemas/audit-event";
import { CrewInput, MembershipInput, SupervisorInput } from "../../../shared/schemas/crew";
import {
  FitPolicyInput,
  FitTestChange,
  FitTestInput,
  IssueEnd,
  IssueInput,
} from "../../../shared/schemas/fit";
import {
  CombinationInput,
  NewProtectorInput,
  ProtectorFileInput,
} from "../../../shared/schemas/protector";
import { InstrumentInput, RunCorrection, RunInput } from "../../../shared/schemas/run";
import { ShiftCorrection } from "../../../shared/schemas/shift";
import { AreaInput, NewSiteInput, SiteSettingsInput } from "../../../shared/schemas/site";
import { JobInput, NewTaskInput } from "../../../shared/schemas/task";
import { UserInput } from "../../../shared/schemas/user";
import { WarningSignalInput } from "../../../shared/schemas/warning-signal";
import { WearingRoundInput } from "../../../shared/schemas/wearing";
import { AssignmentInput, WorkerInput } from "../../../shared/schemas/worker";
import { testI18n } from "../../lib/test-i18n";
import { hasFieldWord } from "./field-words";
import { type ValueWords, valueLines, valueText } from "./value-text";

const grinding = "11111111-1111-4111-8111-111111111111";
const tavernor = "22222222-2222-4222-8222-222222222222";
const ostmere = "33333333-3333-4333-8333-333333333333";
const elsewhere = "99999999-9999-4999-8999-999999999999";
const thing = (id: string, kind: string, name: string): [string, NamedThing] => [
  id,
  { id, kind, name, date: null, code: null },
];
const words = (more: Partial<ValueWords> = {}): ValueWords => ({
  i18n: testI18n(),
  locale: "en",
  names: new Map([
    thing(grinding, "task", "Grinding"),
    thing(tavernor, "worker", "D. Tavernor"),
    thing(ostmere, "site", "Ostmere works"),
  ]),
  timeZone: "Europe/London",
  subjectKind: "shift",
  ...more,
});
const text = (field: string, value: unknown, more: Partial<ValueWords> = {}) =>
  valueText(words(more), field, value).replaceAll("\u00a0", " ");

describe("a value of the trail reads as it does on the other screens", () => {
  test("ids are names; what the reader may not see is not named", () => {
    expect(text("workerId", tavernor)).toBe("D. Tavernor");
    expect(text("workerId", elsewhere)).toBe("not shown to you");
    expect(text("workerIds", [tavernor, elsewhere])).toBe("D. Tavernor; not shown to you");
  });

  test("a name from right to left leaves its date where it stands", () => {
    const name = "\u05d0\u05d1\u05d2";
    const day = { id: ostmere, kind: "shift", name, date: "2026-12-01", code: null };
    expect(text("shiftId", ostmere, { names: new Map([[ostmere, day]]) })).toBe(
      `\u2068${name}\u2069, 1 Dec 2026`,
    );
  });

  test("figures keep every stored digit and carry their unit", () => {
    expect(text("levelDb", 91.25)).toBe("91.25 dB");
    expect(text("levelDb", 91.25, { locale: "de" })).toBe("91,25 dB");
    expect(text("wornPct", 95)).toBe("95 %");
    expect(text("lengthMin", 450)).toBe("7 h 30 min");
    expect(text("durationMin", 0.5)).toBe("0.5 min");
    expect(text("delayS", 0.0002)).toBe("200 µs");
    expect(text("year", 2026)).toBe("2026");
    expect(text("octaveBandsDb", [null, 80, 81.5, 82, 80, 78, 75, 70])).toBe(
      "– 80 81.5 82 80 78 75 70 dB",
    );
  });

  test("codes are words, by the field that they stand in", () => {
    expect(text("zone", "double")).toBe("Zone, two protectors");
    expect(text("grade", "measured-group")).toBe("measured on the group");
    expect(text("kind", "active-earmuff", { subjectKind: "protector" })).toBe("Active earmuff");
    expect(text("kind", "dosimeter", { subjectKind: "instrument" })).toBe("Dosimeter");
    expect(text("kind", "protects-too-much", { subjectKind: "finding" })).toBe("Protects too much");
    expect(text("governingRuleSet", "uk-2005")).toBe("UK noise regulations");
    expect(text("criterion", "uk-2005:lower-action")).toBe(
      "UK noise regulations: Lower action value",
    );
    expect(text("isArchived", true)).toBe("yes");
    // A text that happens to be a code elsewhere stays what it is.
    expect(text("name", "double")).toBe("double");
  });

  test("dates are days, instants are times of the zone given", () => {
    expect(text("date", "2026-12-01")).toBe("1 December 2026");
    expect(text("expiresAt", "2026-07-01T22:30:00.000Z")).toBe("1 July 2026, 23:30");
    expect(text("expiresAt", "2026-07-01T22:30:00.000Z", { timeZone: "America/Chicago" })).toBe(
      "1 July 2026, 17:30",
    );
  });

  test("what is made of parts is said as a whole", () => {
    const tasks = [
      { taskId: grinding, durationMin: 420, wornPct: 90, wornIsShiftWide: false },
      { taskId: elsewhere, durationMin: 60, wornPct: null, wornIsShiftWide: false },
    ];
    expect(text("tasks", tasks)).toBe("Grinding 7 h, worn 90 %; not shown to you 1 h");
    expect(text("unaccounted", { how: "quiet", levelDb: 65 })).toBe("quiet, 65 dB");
    expect(text("peak", { levelDb: 132, weighting: "C" })).toBe("132 dB (C)");
    expect(
      text("grants", [
        { role: "officer", siteId: ostmere },
        { role: "auditor", siteId: null },
      ]),
    ).toBe("Safety officer, Ostmere works; Auditor, all sites");
  });
});

describe("stretches of a time history", () => {
  const stretch = (fromS: number, toS: number) => ({
    kind: "task",
    taskId: grinding,
    fromS,
    toS,
  });
  const leftOut = { kind: "left-out", reason: "knocked", fromS: 4200, toS: 4205 };

  test("a few stand with their times from the beginning", () => {
    expect(text("stretches", [stretch(0, 4200), leftOut])).toBe(
      "00:00 to 01:10 Grinding; 01:10 to 01:10:05 left out, knocked",
    );
  });

  test("many are counted, with each behind it", () => {
    const stretches = [0, 1, 2, 3].map((hour) => stretch(hour * 3600, (hour + 1) * 3600));
    expect(valueLines(words(), { stretches })).toEqual([
      {
        field: "Stretches",
        text: "4 stretches",
        parts: [
          "00:00 to 01:00 Grinding",
          "01:00 to 02:00 Grinding",
          "02:00 to 03:00 Grinding",
          "03:00 to 04:00 Grinding",
        ],
        before: null,
      },
    ]);
  });
});

describe("lines", () => {
  test("a change says what was before; empty members and the record's own ids are left out", () => {
    expect(
      valueLines(words(), {
        usualLengthMin: { from: 480, to: 450 },
        leftOn: { from: null, to: "2026-12-01" },
        entryId: elsewhere,
        note: null,
      }).map(({ field, before, text: after }) => [field, before, after.replaceAll("\u00a0", " ")]),
    ).toEqual([
      ["Usual length", "8\u00a0h", "7 h 30 min"],
      ["Left", "–", "1 December 2026"],
    ]);
  });

  test("a finding's step says its states", () => {
    expect(valueLines(words(), { from: "new", to: "in-hand", text: "Ordered" })).toEqual([
      { field: "State", before: "New", text: "In hand" },
      { field: "Said", before: null, text: "Ordered" },
    ]);
  });
});

/** Names of all members of a form, at any depth. */
function membersOf(schema: unknown, found = new Set<string>()): Set<string> {
  const def = (schema as { def?: Record<string, unknown> } | null)?.def;
  if (!def) return found;
  for (const [name, member] of Object.entries((def.shape as object | undefined) ?? {})) {
    found.add(name);
    membersOf(member, found);
  }
  for (const inner of ["innerType", "element", "in", "out"]) membersOf(def[inner], found);
  for (const option of (def.options as unknown[] | undefined) ?? []) membersOf(option, found);
  return found;
}

test("every field of a form that the trail records has its word", () => {
  const forms = [
    ...[AreaInput, NewSiteInput, SiteSettingsInput, CrewInput, MembershipInput, SupervisorInput],
    ...[
      NewProtectorInput,
      CombinationInput,
      ProtectorFileInput.omit({ fileId: true }),
      InstrumentInput,
      RunInput,
      RunCorrection,
      ShiftCorrection,
      JobInput,
    ],
    ...[NewTaskInput, UserInput, AssignmentInput, WorkerInput],
    ...[FitTestInput, FitTestChange, FitPolicyInput, IssueInput, IssueEnd],
    ...[WearingRoundInput, WarningSignalInput],
  ];
  const names = new Set(forms.flatMap((form) => [...membersOf(form)]));
  expect(names.size).toBeGreaterThan(60);
  // Said within the words of their whole, or never recorded.
  const within = ["how", "exchangeRateDb", "criterionLevelDb", "thresholdDb", "response"];
  const never = ["requirementReason", "confirmsWholeDay", "confirmsOpenEnd"];
  expect(
    [...names].filter((name) => !hasFieldWord(name) && ![...within, ...never].includes(name)),
  ).toEqual([]);
});
