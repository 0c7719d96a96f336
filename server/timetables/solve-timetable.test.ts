import { describe, expect, test } from "vitest";
import {
  brokenBy,
  type Demand,
  demandsOf,
  REST,
  sharesOf,
  type TimetableProblem,
} from "../../shared/planning/timetable";
import { solveTimetable } from "./solve-timetable";

const PEOPLE = 3;
const TASKS = 2;
const SLOTS = 4;

/** Numbers from 0 to 1 by a seed. */
function dice(seed: number): () => number {
  let state = seed * 2654435761;
  return () => {
    state = (Math.imul(state, 1103515245) + 12345) >>> 0;
    return ((state >>> 8) & 0xffff) / 0x10000;
  };
}

/** A small case of every sort: with and without a longest stay, gaps, people who may not, limits that bind. */
function smallCase(seed: number): TimetableProblem {
  const roll = dice(seed);
  const upTo = (most: number) => Math.floor(roll() * (most + 1));
  for (let turn = 0; turn < 10; turn++) roll();
  return {
    slots: SLOTS,
    mostShare: 0.5 + roll(),
    restShare: Array.from({ length: PEOPLE }, () => 0.05 * roll()),
    share: Array.from({ length: PEOPLE }, () => Array.from({ length: TASKS }, () => 0.6 * roll())),
    tasks: Array.from({ length: TASKS }, () => {
      const cut = 1 + upTo(2);
      const lines = [
        { from: 0, to: cut, people: 1 + upTo(1) },
        { from: cut, to: SLOTS, people: 1 + upTo(1) },
      ];
      return {
        staffing: roll() < 0.3 ? lines.slice(upTo(1)).slice(0, 1) : lines,
        isQualified: Array.from({ length: PEOPLE }, () => roll() < 0.8),
        longestStay: roll() < 0.5 ? 1 + upTo(2) : null,
        longestTotal: roll() < 0.3 ? 1 + upTo(2) : null,
      };
    }),
  };
}

/** The smallest largest share of every table that there is; null where no table keeps to the demands. */
function byEveryTable(problem: TimetableProblem, demands: readonly Demand[]): number | null {
  let best: number | null = null;
  const table = Array.from({ length: PEOPLE }, () => new Array<number>(SLOTS).fill(REST));
  const asked = demands.filter((one) => one.kind === "staffing");
  const wantsOther = (slot: number) =>
    problem.tasks.some(({ staffing }, task) => {
      const line = staffing.findIndex(({ from, to }) => from <= slot && slot < to);
      const count = table.filter((row) => row[slot] === task).length;
      if (line < 0) return count > 0;
      const isAsked = asked.some((one) => one.task === task && one.line === line);
      return isAsked && count !== staffing[line]!.people;
    });
  const fill = (slot: number, person: number): void => {
    if (person === PEOPLE) {
      if (wantsOther(slot)) return;
      if (slot + 1 < SLOTS) {
        fill(slot + 1, 0);
        return;
      }
      if (brokenBy(problem, table, demands).length > 0) return;
      const largest = Math.max(...sharesOf(problem, table));
      if (best === null || largest < best) best = largest;
      return;
    }
    for (let task = REST; task < TASKS; task++) {
      table[person]![slot] = task;
      fill(slot, person + 1);
    }
  };
  fill(0, 0);
  return best;
}

const SEEDS = Array.from({ length: 60 }, (_, seed) => seed + 1);

describe("against every table there is (3 people, 2 tasks, 4 slots)", () => {
  const sorts = new Set<string>();
  test.each(SEEDS)("seed %d", async (seed) => {
    const problem = smallCase(seed);
    const demands = demandsOf(problem);
    const best = byEveryTable(problem, demands);
    const answer = await solveTimetable(problem);
    sorts.add(answer.kind);
    if (best === null) {
      if (answer.kind !== "contradiction") throw new Error(`there is no table, but ${answer.kind}`);
      expect(answer.isSmallest).toBe(true);
      expect(byEveryTable(problem, answer.demands)).toBeNull();
      for (const one of answer.demands)
        expect(
          byEveryTable(
            problem,
            answer.demands.filter((other) => other !== one),
          ),
        ).not.toBeNull();
      return;
    }
    if (answer.kind !== "timetable") throw new Error(`a table at ${best}, but ${answer.kind}`);
    expect(brokenBy(problem, answer.table, demands)).toEqual([]);
    expect(Math.max(...sharesOf(problem, answer.table))).toBeCloseTo(answer.largest, 9);
    expect(answer.largest).toBeCloseTo(best, 6);
    expect(answer.bound).toBeCloseTo(best, 6);
  });
  test("both sorts came up", () => {
    expect([...sorts].sort()).toEqual(["contradiction", "timetable"]);
  });
});

const everybody = (people: number) => new Array<boolean>(people).fill(true);

describe("by hand", () => {
  /**
   * One place at a loud task all day, three people: 32 slots are shared out, and by the pigeon-hole principle somebody has
   * at least ⌈32/3⌉ = 11 of them. 11, 11 and 10 can be done with stays of one hour, so that this is the optimum.
   */
  test("three people share one loud place: eleven slots at the most", async () => {
    const problem: TimetableProblem = {
      slots: 32,
      mostShare: 1,
      restShare: [0.001, 0.001, 0.001],
      share: [[0.05], [0.05], [0.05]],
      tasks: [
        {
          staffing: [{ from: 0, to: 32, people: 1 }],
          isQualified: everybody(3),
          longestStay: 4,
          longestTotal: null,
        },
      ],
    };
    const answer = await solveTimetable(problem);
    if (answer.kind !== "timetable") throw new Error(answer.kind);
    expect(answer.largest).toBeCloseTo(11 * 0.05 + 21 * 0.001, 9);
    expect(answer.bound).toBeCloseTo(answer.largest, 6);
    expect(brokenBy(problem, answer.table, demandsOf(problem))).toEqual([]);
  });

  /**
   * Two people with unlike protectors: a slot takes 0.02 of one's limit and 0.06 of the other's. With n slots for the first
   * of 32 the shares are 0.02 n and 0.06 (32 − n): equal at n = 24, where both are 0.48; one slot more or less and one of
   * them has more. So 0.48 is the optimum.
   */
  test("who wears more takes more: 24 and 8 slots", async () => {
    const answer = await solveTimetable({
      slots: 32,
      mostShare: 1,
      restShare: [0, 0],
      share: [[0.02], [0.06]],
      tasks: [
        {
          staffing: [{ from: 0, to: 32, people: 1 }],
          isQualified: everybody(2),
          longestStay: null,
          longestTotal: null,
        },
      ],
    });
    if (answer.kind !== "timetable") throw new Error(answer.kind);
    expect(answer.largest).toBeCloseTo(0.48, 9);
    expect(answer.table.map((row) => row.filter((task) => task === 0).length)).toEqual([24, 8]);
  });

  test("two places for one who is qualified: the places and the qualification, and nothing else", async () => {
    const answer = await solveTimetable({
      slots: 8,
      mostShare: 1,
      restShare: [0, 0, 0],
      share: Array.from({ length: 3 }, () => [0.01, 0.01]),
      tasks: [
        {
          staffing: [{ from: 0, to: 8, people: 2 }],
          isQualified: [true, false, false],
          longestStay: null,
          longestTotal: null,
        },
        {
          staffing: [{ from: 0, to: 8, people: 1 }],
          isQualified: everybody(3),
          longestStay: 4,
          longestTotal: 6,
        },
      ],
    });
    expect(answer).toEqual({
      kind: "contradiction",
      isSmallest: true,
      demands: [
        { kind: "qualified", task: 0 },
        { kind: "staffing", task: 0, line: 0 },
      ],
    });
  });

  /** Eight slots at half the limit each are four limits for three people: too much, whoever does it. */
  test("too much noise for all: everybody’s limit and the place", async () => {
    const answer = await solveTimetable({
      slots: 8,
      mostShare: 1,
      restShare: [0, 0, 0],
      share: [[0.5], [0.5], [0.5]],
      tasks: [
        {
          staffing: [{ from: 0, to: 8, people: 1 }],
          isQualified: everybody(3),
          longestStay: 2,
          longestTotal: null,
        },
      ],
    });
    expect(answer).toEqual({
      kind: "contradiction",
      isSmallest: true,
      demands: [
        { kind: "limit", people: [0, 1, 2] },
        { kind: "staffing", task: 0, line: 0 },
      ],
    });
  });
});
