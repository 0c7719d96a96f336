import { beforeEach, describe, expect, test } from "vitest";
import {
  afterSent,
  countAll,
  countsOf,
  createRoundDraftStore,
  emptyRound,
  lastTap,
  looksOf,
  type RoundDraft,
  type Tap,
  tallyWorkers,
  tapsBeside,
  toSend,
  undoTap,
} from "./tally";

const tap = (workerId: string, taskId: string, isWorn: boolean): Tap => ({
  workerId,
  taskId,
  isWorn,
});
const taps = [
  tap("ada", "press", true),
  tap("ben", "press", false),
  tap("ada", "press", true),
  tap("ada", "saw", false),
  tap("ada", "press", false),
];
const round: RoundDraft = {
  ...emptyRound({ crewId: "early", crewName: "Early", siteId: "works", date: "2026-12-01" }),
  taps,
};

describe("what taps come to", () => {
  test("worn of seen by worker and task", () => {
    const count = countsOf(taps);
    expect(count("ada", "press")).toEqual({ worn: 2, seen: 3 });
    expect(count("ada", "saw")).toEqual({ worn: 0, seen: 1 });
    expect(count("ben", "saw")).toBeUndefined();
    expect(countAll(taps)).toEqual({ worn: 2, seen: 5 });
  });

  test("one look a pair is sent, in the order of the first tap", () => {
    expect(looksOf(taps)).toEqual([
      { workerId: "ada", taskId: "press", wornCount: 2, seenCount: 3 },
      { workerId: "ben", taskId: "press", wornCount: 0, seenCount: 1 },
      { workerId: "ada", taskId: "saw", wornCount: 0, seenCount: 1 },
    ]);
  });

  test("the last is taken back, and with the only one of a pair its look", () => {
    const before = undoTap(undoTap(round));
    expect(looksOf(before.taps)).toEqual([
      { workerId: "ada", taskId: "press", wornCount: 2, seenCount: 2 },
      { workerId: "ben", taskId: "press", wornCount: 0, seenCount: 1 },
    ]);
    expect(undoTap({ ...round, taps: [] }).taps).toEqual([]);
  });
});

describe("sending", () => {
  let count = 0;
  const newKey = () => `key ${++count}`;
  beforeEach(() => {
    count = 0;
  });

  test("lost on the way, it goes again as it was, whatever was tapped since", () => {
    const sent = toSend(round, newKey);
    const later: RoundDraft = { ...round, pending: sent, taps: [...taps, tap("ben", "saw", true)] };
    expect(toSend(later, newKey)).toBe(sent);
    expect(count).toBe(1);
  });

  test("what may be on the server already is not taken back", () => {
    const pending = toSend(round, newKey);
    expect(lastTap({ taps, pending })).toBeNull();
    const later: RoundDraft = { ...round, pending, taps: [...taps, tap("ben", "saw", true)] };
    expect(undoTap(undoTap(later)).taps).toEqual(taps);
  });

  test("taps made since stay for another round, under another key", () => {
    const pending = toSend({ ...round, note: "dusty" }, newKey);
    expect(afterSent({ ...round, pending }, pending)).toBeNull();
    const rest = afterSent(
      { ...round, note: "dusty", pending, taps: [...taps, tap("ben", "saw", true)] },
      pending,
    );
    expect(rest).toMatchObject({ taps: [tap("ben", "saw", true)], pending: null, note: "" });
    expect(toSend(rest as RoundDraft, newKey)).toMatchObject({
      key: "key 2",
      body: { looks: [{ workerId: "ben", taskId: "saw", wornCount: 1, seenCount: 1 }] },
    });
  });
});

describe("whom to look at", () => {
  const tally = {
    crewId: "early",
    crewName: "Early",
    siteId: "works",
    date: "2026-12-01",
    tasks: [
      { id: "press", name: "Press" },
      { id: "saw", name: "Saw" },
    ],
    workers: [
      {
        id: "ada",
        name: "Ada",
        employeeNumber: "1",
        taskIds: ["press", "saw"],
        protectors: [
          { taskId: "press", name: "Cup" },
          { taskId: "saw", name: "Plug + Cup" },
        ],
      },
      { id: "ben", name: "Ben", employeeNumber: "2", taskIds: ["press"], protectors: [] },
      { id: "cy", name: "Cy", employeeNumber: "3", taskIds: [], protectors: [] },
    ],
  };

  test("those in noise, in one task or in all; the others are counted", () => {
    const all = tallyWorkers(tally, null);
    expect(all.workers.map(({ id, tasks }) => [id, tasks.map(({ name }) => name)])).toEqual([
      ["ada", ["Press", "Saw"]],
      ["ben", ["Press"]],
    ]);
    expect(all.withoutTaskCount).toBe(1);
    const saw = tallyWorkers(tally, "saw");
    expect(saw.workers.map(({ id }) => id)).toEqual(["ada"]);
    expect(saw.withoutTaskCount).toBe(1);
  });

  test("what is worn stands with its task, and once where it is the same in each of those shown", () => {
    const [ada, ben] = tallyWorkers(tally, null).workers;
    expect(ada?.protector).toBeNull();
    expect(ada?.tasks.map(({ protector }) => protector)).toEqual(["Cup", "Plug + Cup"]);
    expect([ben?.protector, ben?.tasks[0]?.protector]).toEqual([null, null]);
    const [sawing] = tallyWorkers(tally, "saw").workers;
    expect(sawing?.protector).toBe("Plug + Cup");
  });

  test("what was tapped of somebody who is no longer listed is not dropped", () => {
    expect(tapsBeside(tally, [...taps, tap("ben", "saw", true)])).toEqual([
      tap("ben", "saw", true),
    ]);
  });
});

describe("what is kept on the phone", () => {
  beforeEach(() => localStorage.clear());

  test("each round by crew and date, and by who makes it", () => {
    const store = createRoundDraftStore(localStorage, "one");
    const other = { ...round, crewId: "late", date: "2026-11-30" };
    store.write(round);
    store.write(other);
    expect(store.read("early", "2026-12-01")).toEqual(round);
    expect(store.list().map(({ crewId }) => crewId)).toEqual(["late", "early"]);
    expect(createRoundDraftStore(localStorage, "two").list()).toEqual([]);
    store.remove("late", "2026-11-30");
    expect(store.list()).toEqual([round]);
  });

  test("a round without a tap is none", () => {
    const store = createRoundDraftStore(localStorage, "one");
    store.write(round);
    store.write({ ...round, taps: [] });
    expect(store.list()).toEqual([]);
  });

  test("what something else left in its place is no draft", () => {
    localStorage.setItem("dinward.wearing.1.one", '[{"crewId":1},null');
    expect(createRoundDraftStore(localStorage, "one").list()).toEqual([]);
    localStorage.setItem("dinward.wearing.1.one", '[{"crewId":1},null]');
    expect(createRoundDraftStore(localStorage, "one").list()).toEqual([]);
  });
});
