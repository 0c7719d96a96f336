import { describe, expect, test } from "vitest";
import type { CrewSheetRow } from "../../../shared/schemas/crew";
import { testI18n } from "../../lib/test-i18n";
import {
  asksAboutDay,
  expectedFault,
  expectedTitle,
  isForToday,
  lastTitle,
  sheetVerdict,
  splitExpected,
  splitLast,
} from "./sheet-parts";

type Figures = NonNullable<CrewSheetRow["figures"]>;
type Order = NonNullable<CrewSheetRow["order"]>;

const figures = (facts: Partial<Figures> = {}): Figures => ({
  resultId: "00000000-0000-4000-8000-000000000001",
  date: "2026-11-30",
  origin: "computed",
  outsideDb: 102,
  outsideBound: "exact",
  atEarDb: 77,
  atEarOffDb: null,
  atEarBound: "exact",
  atEarActiveDb: null,
  atEarAsWorkedDb: null,
  uncertaintyDb: 2.2,
  whileWornDb: 78,
  whileWornBound: "exact",
  verdictOutside: "over",
  verdictAtEar: "under",
  word: "good",
  decidingTaskName: "Grinding",
  hasProtector: "yes",
  reason: null,
  ruleSetKey: "uk-2005",
  ruleSetVersion: 1,
  ownTargetDb: null,
  governingCriteria: [],
  ...facts,
});
const order = (facts: Partial<Order> = {}): Order => ({
  findingId: "00000000-0000-4000-8000-000000000002",
  kind: "protects-too-little",
  state: "new",
  facts: {},
  ofDate: "2026-11-30",
  rulesUntil: null,
  cannot: null,
  revision: 1,
  canMarkDone: true,
  ...facts,
});
const row = (name: string, facts: Partial<CrewSheetRow> = {}): CrewSheetRow => ({
  worker: { id: name, name, employeeNumber: name, employer: "own", employerName: null },
  isAbsent: false,
  isLoan: false,
  lentBy: null,
  lentTo: null,
  figures: figures(),
  order: null,
  ahead: null,
  ...facts,
});
const names = (rows: readonly CrewSheetRow[]) => rows.map(({ worker }) => worker.name);
const i18n = testI18n();

describe("expected today", () => {
  const rows = [
    row("Tavernor", { order: order() }),
    row("Nwosu"),
    row("Szabó", { order: order({ state: "done", canMarkDone: false }) }),
    row("Grzelak", { isAbsent: true, order: order() }),
    row("Lindqvist", { figures: null }),
  ];
  const part = splitExpected(rows);

  test("whoever is absent needs no order today; whoever has no nominal day is named apart", () => {
    expect(names(part.flagged)).toEqual(["Tavernor", "Szabó"]);
    expect(names(part.quiet)).toEqual(["Nwosu"]);
    expect(names(part.open)).toEqual(["Lindqvist"]);
    expect(names(part.absent)).toEqual(["Grzelak"]);
  });

  test("over the limit by the wearing time is something to do, though no finding is open", () => {
    const sorli = row("Sørli", {
      figures: figures({ atEarDb: 91.3, verdictAtEar: "over" }),
      ahead: { kind: "not-worn-long-enough", facts: { isExpected: true } },
    });
    const sheet = splitExpected([row("Nwosu"), sorli]);
    expect([names(sheet.flagged), names(sheet.quiet)]).toEqual([["Sørli"], ["Nwosu"]]);
    expect(expectedTitle(i18n, sheet, false)).toBe("One order before they start");
    expect(expectedFault(sorli)).toBe("not-worn-long-enough");
  });

  test("a row is headed by its own day: an order of an earlier one does not make it too little", () => {
    expect(expectedFault(row("Castellow", { order: order() }))).toBeNull();
    const short = figures({ word: "too-little" });
    expect(expectedFault(row("Castellow", { order: order(), figures: short }))).toBe(
      "protects-too-little",
    );
    const over = order({ kind: "over-limit-at-ear" });
    expect(expectedFault(row("Tavernor", { order: over }))).toBeNull();
    expect(
      expectedFault(row("Tavernor", { order: over, figures: figures({ verdictAtEar: "over" }) })),
    ).toBe("over-limit-at-ear");
    const asked = order({ kind: "not-worn-long-enough" });
    expect(expectedFault(row("Dąbrowik", { order: asked }))).toBe("not-worn-long-enough");
  });

  test("an order that is done stays on the sheet and is not counted", () => {
    expect(expectedTitle(i18n, part, false)).toBe("One order before they start");
    expect(expectedTitle(i18n, part, true)).toBe("One order for today");
    expect(expectedTitle(i18n, splitExpected([row("Nwosu")]), false)).toBe(
      "Nothing to do before they start",
    );
  });
});

describe("last shift", () => {
  const rows = [
    row("Nwosu"),
    row("Dąbrowik", {
      figures: figures({ verdictAtEar: "cant-tell-yet" }),
      order: order({ kind: "not-worn-long-enough" }),
    }),
    row("Tavernor", { figures: figures({ verdictAtEar: "over" }), order: order() }),
    row("Wetherell", { figures: figures({ verdictAtEar: "not-assessed", word: null }) }),
    row("Achterberg", { isAbsent: true, figures: null }),
  ];

  test("over first, then what we can’t tell; not assessed is not under", () => {
    const part = splitLast(rows, true);
    expect(names(part.flagged)).toEqual(["Tavernor", "Dąbrowik"]);
    expect(names(part.quiet)).toEqual(["Nwosu"]);
    expect(names(part.open)).toEqual(["Wetherell"]);
    expect(names(part.absent)).toEqual(["Achterberg"]);
  });

  test("under the limit with a protector at fault is not Under: the faults follow, too little first", () => {
    const part = splitLast(
      [
        row("Nwosu"),
        row("Lindqvist", { figures: figures({ word: "too-much" }), order: order() }),
        row("Castellow", { figures: figures({ word: "too-little" }) }),
        ...rows.slice(1, 3),
      ],
      true,
    );
    expect(names(part.flagged)).toEqual(["Tavernor", "Dąbrowik", "Castellow", "Lindqvist"]);
    expect(names(part.quiet)).toEqual(["Nwosu"]);
  });

  test("an order that asks about the day heads its row until it is done", () => {
    const asked = order({ kind: "not-worn-long-enough" });
    expect(asksAboutDay(row("Dąbrowik", { order: asked }))).toBe(true);
    expect(asksAboutDay(row("Dąbrowik", { order: { ...asked, state: "done" } }))).toBe(false);
    expect(asksAboutDay(row("Tavernor", { order: order() }))).toBe(false);
  });

  test("the title counts both", () => {
    expect(lastTitle(i18n, rows, true)).toBe("One was over, one we can’t tell yet");
    expect(lastTitle(i18n, [row("Nwosu")], true)).toBe("Nobody was over");
    expect(lastTitle(i18n, [row("Achterberg", { figures: null })], true)).toBe(
      "No shift recorded yet",
    );
  });

  test("a swap stands on today’s sheet; asking why it came off belongs to the last shift", () => {
    const today = [row("Tavernor"), row("Dąbrowik")];
    const [, asked, swap] = rows;
    expect(swap && isForToday(swap, today)).toBe(true);
    expect(asked && isForToday(asked, today)).toBe(false);
    expect(swap && isForToday(swap, [row("Tavernor", { isAbsent: true })])).toBe(false);
  });

  test("where the rule has no limit at the ear, too little protection stands for over", () => {
    const day = figures({ verdictAtEar: "not-assessed" });
    expect(sheetVerdict({ ...day, word: "too-little" }, false)).toBe("over");
    const tooLittle = row("Nwosu", { figures: { ...day, word: "too-little" } });
    expect(lastTitle(i18n, [tooLittle], false)).toBe("One was protected too little");
    expect(sheetVerdict({ ...day, word: "enough" }, false)).toBe("under");
    expect(sheetVerdict({ ...day, word: null }, false)).toBe("not-assessed");
  });

  test("over a limit without protection, with a protector that is enough, is not protected too little", () => {
    const day = figures({
      verdictAtEar: "not-assessed",
      word: "enough",
      ruleSetKey: "us-general-industry",
      governingCriteria: [
        {
          criterionId: "limit",
          verdict: "over",
          isClear: true,
          levelDb: 92.3,
          dosePct: 137,
          bound: "exact",
          reason: null,
        },
      ],
    });
    expect(sheetVerdict(day, false)).toBe("over");
    expect(lastTitle(i18n, [row("Vang-Loret", { figures: day })], false)).toBe("One was over");
  });
});
