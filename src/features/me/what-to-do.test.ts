import { describe, expect, test } from "vitest";
import type { FitTestView } from "../../../shared/schemas/fit";
import { testI18n } from "../../lib/test-i18n";
import { lastFinished, lastShiftSentence, notOverSentence } from "./last-shift";
import { fitOfOwn, ownFitSentence } from "./own-fit";
import { ownFrame } from "./own-frame";
import type { OwnProtector } from "./own-protectors";
import type { OwnDay, OwnFinding } from "./queries";
import { weeksOf } from "./weeks";
import { whatToDo } from "./what-to-do";

const day = (facts: Partial<OwnDay> = {}): OwnDay => ({
  resultId: "00000000-0000-4000-8000-000000000001",
  date: "2026-11-30",
  origin: "computed",
  outsideDb: 96.4,
  outsideBound: "exact",
  atEarDb: 79.2,
  atEarOffDb: null,
  atEarBound: "exact",
  atEarActiveDb: null,
  atEarAsWorkedDb: null,
  uncertaintyDb: 2.1,
  whileWornDb: 80,
  whileWornBound: "exact",
  verdictOutside: "over",
  verdictAtEar: "under",
  word: "good",
  decidingTaskName: "Soak run",
  hasProtector: "yes",
  reason: null,
  ruleSetKey: "uk-2005",
  ruleSetVersion: 1,
  ownTargetDb: null,
  governingCriteria: [],
  shiftMin: 480,
  isStale: false,
  endsAt: "2026-11-30T14:00:00.000Z",
  limit: { levelDb: 87, isAtEar: true },
  kindsOver: ["action"],
  wordsByUse: [],
  ...facts,
});
const protector = (facts: Partial<OwnProtector> = {}): OwnProtector => ({
  id: "fenmuff",
  use: "everywhere",
  useName: null,
  innerModelId: "00000000-0000-4000-8000-0000000000f1",
  innerName: "Fenmuff",
  outerName: null,
  size: null,
  fromDate: "2026-05-04",
  toDate: null,
  ...facts,
});
const soak = protector({ use: "task", useName: "Soak run" });
const teardown = protector({
  id: "sedge",
  use: "task",
  useName: "Teardown",
  innerModelId: "00000000-0000-4000-8000-0000000000f2",
  innerName: "Sedge band",
});
const finding = (facts: Partial<OwnFinding> = {}): OwnFinding => ({
  id: "00000000-0000-4000-8000-000000000003",
  kind: "protects-too-little",
  state: "new",
  criterion: "",
  useKey: "",
  facts: {},
  today: null,
  firstDate: "2026-11-30",
  lastDate: "2026-11-30",
  daysCount: 1,
  workersCount: 1,
  dueOn: null,
  rulesUntil: null,
  cannot: null,
  wentUp: null,
  siteId: "00000000-0000-4000-8000-000000000009",
  worker: null,
  subjectName: null,
  crewName: null,
  figures: null,
  ownerName: null,
  revision: 1,
  can: { handle: false, markDone: false, comment: false },
  ...facts,
});
const say = (
  lastDay: OwnDay | null,
  protectors: OwnProtector[],
  findings: OwnFinding[] = [],
  leftOn: string | null = null,
) => whatToDo(testI18n(), "en", { lastDay, protectors, findings, leftOn });

describe("what to do", () => {
  test("nothing is wrong: what is worn, and where it changes", () => {
    expect(say(day(), [soak, teardown])).toEqual([
      "In Soak run wear your Fenmuff.",
      "In Teardown change to your Sedge band.",
    ]);
    expect(say(day(), [protector()])).toEqual(["Wear your Fenmuff in noise."]);
  });

  test("nothing is asked of whoever has left", () => {
    expect(say(day(), [protector()], [], "2026-11-30")).toEqual([
      "You left on 30 November 2026. Your record stays here.",
    ]);
  });

  test("nobody changes to what is worn there already", () => {
    expect(say(day(), [soak, protector(), teardown])).toEqual([
      "Wear your Fenmuff in noise.",
      "In Teardown change to your Sedge band.",
    ]);
    const rig = protector({ use: "task", useName: "Rig run" });
    expect(say(day(), [soak, rig])).toEqual([
      "In Soak run wear your Fenmuff.",
      "In Rig run wear your Fenmuff.",
    ]);
  });

  test("where an area has another, a task in it that goes back to the one for everywhere stays said", () => {
    const area = protector({
      use: "area",
      useName: "Hall 2",
      innerModelId: "b",
      innerName: "Alder",
    });
    expect(say(day(), [protector(), area, soak])).toEqual([
      "Wear your Fenmuff in noise.",
      "In Hall 2 change to your Alder.",
      "In Soak run wear your Fenmuff.",
    ]);
  });

  const tooLittle = finding({
    facts: {
      protector: "Fenmuff",
      remedy: { names: ["Alder foam"], modelIds: ["a"], isHeld: false, inTasks: [] },
    },
  });
  const peak = finding({
    kind: "peak-or-ceiling",
    facts: { what: "peak", levelDb: 141.6, valueDb: 140 },
  });

  test("an open finding comes before everything else, with what to wear instead", () => {
    expect(say(day({ word: "too-little" }), [protector()], [tooLittle])).toEqual([
      "Fenmuff protects too little for your work. Ask your supervisor for Alder foam.",
    ]);
  });

  test("every open finding is told, the most serious first; what is worn stays said where it is not in doubt", () => {
    expect(say(day(), [protector()], [peak, tooLittle])).toEqual([
      expect.stringMatching(/^Fenmuff protects too little/),
      expect.stringMatching(/^There was a bang of about 142 decibels/),
    ]);
    expect(say(day(), [protector()], [peak])).toEqual([
      expect.stringMatching(/^There was a bang of about 142 decibels/),
      "Wear your Fenmuff in noise.",
    ]);
  });

  test("what is done, answered by another protector or rests on earlier rules asks for nothing", () => {
    const worn = ["Wear your Fenmuff in noise."];
    expect(say(day(), [protector()], [finding({ state: "done" })])).toEqual(worn);
    const given = protector({ fromDate: "2026-12-01" });
    expect(say(day(), [given], [tooLittle])).toEqual(worn);
    const earlier = finding({ kind: "dual-protection", rulesUntil: "2026-10-29" });
    expect(say(day(), [protector()], [earlier])).toEqual(worn);
    expect(say(day({ date: "2026-10-20" }), [protector()], [earlier])[0]).toMatch(/two protectors/);
    expect(say(day(), [protector()], [finding({ kind: "reading-missing" })])).toEqual(worn);
  });

  test("another protector for another task answers nothing", () => {
    const inChipping = finding({
      ...tooLittle,
      facts: { ...tooLittle.facts, taskName: "Chipping" },
    });
    const given = (useName: string) =>
      protector({ id: "given", use: "task", useName, fromDate: "2026-12-01" });
    const asks = say(day(), [protector()], [inChipping]);
    expect(say(day(), [protector(), given("Grinding")], [inChipping])).toEqual(asks);
    expect(say(day(), [protector(), given("Chipping")], [inChipping])).not.toContain(asks[0]);
    // A limit is of the whole day: what was worn before may still be too little somewhere.
    const over = finding({ ...tooLittle, kind: "over-limit-at-ear", facts: {} });
    const asksOver = say(day(), [protector()], [over]);
    expect(say(day(), [protector(), given("Grinding")], [over])).toEqual(asksOver);
    expect(say(day(), [protector({ fromDate: "2026-12-01" })], [over])).not.toContain(asksOver[0]);
    // Until a day with what was given since says otherwise.
    const since = (verdictAtEar: OwnDay["verdictAtEar"]) =>
      say(day({ date: "2026-12-01", verdictAtEar }), [protector(), given("Grinding")], [over]);
    expect(since("under")).not.toContain(asksOver[0]);
    expect(since("cant-tell-yet")).toEqual(asksOver);
  });

  test("what the usual day to come no longer shows asks for nothing; what it asks for goes by that day", () => {
    const inOrder = { is: "in-order", atEarDb: 78, word: "good" } as const;
    expect(say(day(), [protector()], [finding({ ...tooLittle, today: inOrder })])).toEqual(
      say(day(), [protector()]),
    );
    const remedy = { modelIds: ["w"], names: ["Willow plug"], isHeld: false, inTasks: [] };
    const today = { is: "asked", proposal: { remedy, left: null } } as const;
    expect(say(day(), [protector()], [finding({ ...tooLittle, today })])[0]).toMatch(/Willow plug/);
  });

  test("what is asked for everywhere says that it is not for where another was given since", () => {
    const over = finding({
      ...tooLittle,
      kind: "over-limit-at-ear",
      facts: { ...tooLittle.facts, levelDb: 88.2 },
    });
    const given = (facts: Partial<OwnProtector>) =>
      protector({ id: "given", use: "task", fromDate: "2026-12-01", ...facts });
    const asks =
      "About 88 decibels reached your ear; that is too much. Ask your supervisor for Alder foam.";
    expect(say(day(), [protector()], [over])[0]).toBe(asks);
    expect(say(day(), [protector(), given({ useName: "Chipping" })], [over])[0]).toBe(
      `${asks} That is for noise outside Chipping.`,
    );
    const before = given({ useName: "Chipping", fromDate: "2026-05-04" });
    expect(say(day(), [protector(), before], [over])[0]).toBe(asks);
    // What is asked for some tasks names them already.
    const remedy = {
      names: ["Alder foam"],
      modelIds: ["a"],
      isHeld: true,
      inTasks: [
        {
          names: ["Sedge"],
          modelIds: ["b"],
          isHeld: false,
          taskIds: ["t"],
          taskNames: ["Teardown"],
        },
      ],
    };
    const inTeardown = finding({ ...over, facts: { ...over.facts, remedy } });
    expect(say(day(), [protector(), given({ useName: "Chipping" })], [inTeardown])[0]).toMatch(
      /Ask your supervisor for Sedge for Teardown\.$/,
    );
  });

  test("a fit is told of what is worn, and not of what was only tried", () => {
    const failed = finding({
      kind: "fit-failed",
      useKey: "00000000-0000-4000-8000-0000000000f1",
      facts: { protector: "Fenmuff" },
    });
    expect(say(day(), [protector()], [failed])[0]).toMatch(/^Fenmuff does not fit you well enough/);
    const tried = finding({ kind: "fit-failed", useKey: "another", facts: { protector: "Tern" } });
    expect(say(day(), [protector()], [tried])).toEqual(["Wear your Fenmuff in noise."]);
  });

  test("in noise with nothing assigned; without noise nothing is needed", () => {
    expect(say(day(), [], [finding({ kind: "no-protector" })])[0]).toMatch(
      /^You work in noise and have no protector yet\./,
    );
    expect(say(day({ hasProtector: "no", word: null, verdictOutside: "under" }), [])).toEqual([
      "You need no protector for your work so far.",
    ]);
    expect(say(null, [])[0]).toBe("Nothing to do yet.");
  });
});

describe("the last shift in a sentence", () => {
  const usDay = { limit: { levelDb: 90, isAtEar: false }, verdictAtEar: "not-assessed" } as const;
  const sentence = (facts: Partial<OwnDay>) => lastShiftSentence(testI18n(), "en", day(facts));

  test("after a bang over its limit nothing says that the protector was enough", () => {
    expect(sentence({ ...usDay, word: "enough" })).toMatch(/Your protector was enough\.$/);
    expect(sentence({ ...usDay, word: "enough", kindsOver: ["peak"] })).toMatch(
      /reached your ear\.$/,
    );
  });

  test("a lower bound says at least; a limit for the noise around is no limit at the ear", () => {
    expect(sentence({ ...usDay, atEarDb: null, outsideDb: 92.3, outsideBound: "lower" })).toMatch(
      /it was \*at least 92 decibels\* around you/,
    );
    expect(ownFrame(testI18n(), "en", day(usDay)).limits).toEqual([]);
    expect(ownFrame(testI18n(), "en", day()).limits).toHaveLength(1);
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

describe("whether it fits, in a sentence", () => {
  const testOf = (facts: Partial<FitTestView> = {}): FitTestView => ({
    id: "00000000-0000-4000-8000-000000000011",
    revision: 1,
    siteId: "00000000-0000-4000-8000-000000000009",
    workerId: "00000000-0000-4000-8000-000000000008",
    workerName: "T. Bramhall",
    employeeNumber: "3391",
    modelId: "00000000-0000-4000-8000-0000000000f1",
    modelName: "Fenmuff",
    testedOn: "2026-10-12",
    method: "psychophysical",
    size: null,
    facts: { leftDb: [25], rightDb: [25], methodSdDb: 3, bands: null },
    confidencePct: 84,
    needDb: 20,
    note: "",
    leftDb: 22,
    rightDb: 22,
    parDb: 22,
    hasPassed: true,
    activePassed: null,
    labelLess7Db: null,
    outcome: "issued",
    dueOn: null,
    isVoid: false,
    struckReason: null,
    authorName: null,
    can: { change: false },
    ...facts,
  });
  const say = (tests: FitTestView[], of = protector()) =>
    ownFitSentence(testI18n(), "en", fitOfOwn(tests, of));

  test("the latest that stands counts, of the size that is worn", () => {
    expect(say([])).toBe("Nobody has tested yet whether it fits you.");
    expect(say([testOf()])).toBe("Fits you, tested on 12 October 2026.");
    expect(say([testOf({ hasPassed: false }), testOf()])).toMatch(/^Does not fit you well enough/);
    expect(say([testOf({ hasPassed: false, isVoid: true }), testOf()])).toMatch(/^Fits you/);
    expect(say([testOf({ size: "S" })], protector({ size: "L" }))).toMatch(/^Nobody has tested/);
    expect(say([testOf({ needDb: null, hasPassed: null })])).toBe(
      "Tested on you on 12 October 2026.",
    );
    // Stored before a test with nothing to pass was kept from passing or failing.
    for (const hasPassed of [true, false])
      expect(say([testOf({ needDb: -3, hasPassed })])).toBe(
        "Tested on you on 12 October 2026. Your noise asks nothing of it, so there is nothing to pass.",
      );
  });
});

describe("the last shift is the last one that is over", () => {
  const now = new Date("2026-11-30T11:00:00Z");
  const before = day({ date: "2026-11-27", endsAt: "2026-11-27T14:00:00.000Z" });
  const today = day();

  test("one that is written down before its end is not told as the last", () => {
    expect(lastFinished([today, before], now)).toEqual({ finished: before, running: [today] });
    expect(lastFinished([today], now)).toEqual({ finished: null, running: [today] });
    expect(lastFinished([today, before], new Date("2026-11-30T14:00:00Z"))).toEqual({
      finished: today,
      running: [],
    });
  });

  test("without hours there is no guess; without days there is nothing", () => {
    const imported = day({ endsAt: null });
    expect(lastFinished([imported, before], now)).toEqual({ finished: imported, running: [] });
    expect(lastFinished([], now)).toEqual({ finished: null, running: [] });
  });

  test("until when it lasts is said by the site's clock; a night's shift with its day", () => {
    const say = (date: string) =>
      notOverSentence(testI18n(), "en", today, { timeZone: "Europe/Berlin", today: date });
    expect(say("2026-11-30")).toMatch(/^Your shift until 15:00 today is not over\./);
    expect(say("2026-12-01")).toMatch(
      /^Your shift of Monday 30 November, until 15:00, is not over\./,
    );
  });
});
