import { describe, expect, test } from "vitest";
import { testI18n } from "../../lib/test-i18n";
import type { OwnProtector } from "./own-protectors";
import type { OwnDay } from "./queries";
import { weeksOf } from "./weeks";
import { whatToDo } from "./what-to-do";

const day = (facts: Partial<OwnDay> = {}): OwnDay => ({
  resultId: "00000000-0000-4000-8000-000000000001",
  date: "2026-11-30",
  origin: "computed",
  outsideDb: 96.4,
  outsideBound: "exact",
  atEarDb: 79.2,
  atEarActiveDb: null,
  atEarAsWorkedDb: null,
  uncertaintyDb: 2.1,
  whileWornDb: 80,
  verdictOutside: "over",
  verdictAtEar: "under",
  word: "good",
  decidingTaskName: "Soak run",
  hasProtector: "yes",
  reason: null,
  ruleSetKey: "uk-2005",
  ruleSetVersion: 1,
  governingCriteria: [],
  shiftMin: 480,
  isStale: false,
  limit: { levelDb: 87, isAtEar: true },
  kindsOver: ["action"],
  wordsByUse: [],
  ...facts,
});
const protector = (facts: Partial<OwnProtector> = {}): OwnProtector => ({
  id: "fenmuff",
  use: "everywhere",
  useName: null,
  innerName: "Fenmuff",
  outerName: null,
  fromDate: "2026-05-04",
  toDate: null,
  ...facts,
});
const soak = protector({ use: "task", useName: "Soak run" });
const teardown = protector({
  id: "sedge",
  use: "task",
  useName: "Teardown",
  innerName: "Sedge band",
});
const say = (lastDay: OwnDay | null, protectors: OwnProtector[]) =>
  whatToDo(testI18n(), "en", { lastDay, protectors, assignments: protectors });

describe("what to do", () => {
  test("nothing is wrong: what is worn, and where it changes", () => {
    expect(say(day(), [soak, teardown])).toEqual([
      "In Soak run wear your Fenmuff.",
      "In Teardown change to your Sedge band.",
    ]);
    expect(say(day(), [protector()])).toEqual(["Wear your Fenmuff in noise."]);
  });

  test("a protector that is too little comes before everything else", () => {
    const [order] = say(day({ word: "too-little", verdictAtEar: "over" }), [protector()]);
    expect(order).toBe(
      "Fenmuff protects too little for your work. Ask your supervisor what to do before you work in noise again.",
    );
  });

  test("once somebody has given another protector, the old day’s fault is no order any more", () => {
    const given = protector({ innerName: "Mallow foam", fromDate: "2026-12-01" });
    expect(say(day({ word: "too-little" }), [given])).toEqual(["Wear your Mallow foam in noise."]);
  });

  test("a peak over its limit is told, by the kind that came with the day", () => {
    expect(say(day({ kindsOver: ["action", "peak"] }), [protector()])[0]).toMatch(
      /^There was a very loud bang or noise\./,
    );
  });

  test("in noise with nothing assigned; without noise nothing is needed", () => {
    const bare = { hasProtector: "no", word: null } as const;
    expect(say(day(bare), [])[0]).toMatch(/^You work in noise and have no protector yet\./);
    expect(say(day({ ...bare, verdictOutside: "under" }), [])).toEqual([
      "You need no protector for your work so far.",
    ]);
    expect(say(null, [])[0]).toBe("Nothing to do yet.");
  });
});

test("a week’s mark is its loudest day; Monday begins a week", () => {
  // 30 November 2026 is a Monday.
  expect(
    weeksOf([
      { date: "2026-11-28", levelDb: null },
      { date: "2026-11-29", levelDb: 78 },
      { date: "2026-11-30", levelDb: 80 },
      { date: "2026-12-06", levelDb: 82 },
    ]),
  ).toEqual([
    { date: "2026-11-29", levelDb: 78 },
    { date: "2026-12-06", levelDb: 82 },
  ]);
});
