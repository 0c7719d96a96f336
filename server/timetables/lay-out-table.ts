import {
  REST,
  sharesOf,
  staffingAt,
  stretchesOf,
  type TimetableProblem,
} from "../../shared/planning/timetable";
import { cheapestAssignment } from "./cheapest-assignment";

/** Slots between which nothing changes in who is wanted where. */
export interface Segment {
  readonly from: number;
  readonly to: number;
}

/** How much of each segment a person spends at a task: by person, task and segment, slots. */
export type Amounts = readonly (readonly (readonly number[])[])[];

/** What of a problem has to be kept to: the search for contradictions leaves one demand after the other out. */
export interface Kept {
  isQualified(person: number, task: number): boolean;
  longestStay(task: number): number;
  longestTotal(task: number): number;
  /** People wanted in a slot; null: as many as one likes. */
  people(task: number, slot: number): number | null;
  mostShare(person: number): number;
}

/** The most slots out of `slots` in a row with none of more than `stay` in one go, after `run` of them already. */
export function mostWithin(slots: number, stay: number, run = 0): number {
  const first = Math.min(slots, Math.max(0, stay - run));
  const left = slots - first - 1;
  if (left <= 0) return first;
  return first + left - Math.floor(left / (stay + 1));
}

const MUST = 1e6;
const HURRY = 1e3;

/**
 * Lays amounts out over the slots, one slot after the other, so that nobody stays longer in one go than is allowed. In
 * each slot every place is filled, whoever has no rest left works, and those come first whose time for a task runs short.
 * Amounts without a longest stay always come out as they are (a bipartite graph has as many matchings as its largest
 * degree); with one it may not work out: then null, and another `random` may do better. Where `isLoose`, amounts are only
 * a wish.
 */
export function layOut(
  problem: TimetableProblem,
  kept: Kept,
  segments: readonly Segment[],
  amounts: Amounts,
  random: () => number,
  isLoose: boolean,
): number[][] | null {
  const { share, restShare, tasks } = problem;
  const people = share.length;
  const table = share.map(() => new Array<number>(problem.slots).fill(REST));
  const run = share.map(() => ({ task: REST, length: 0 }));
  const totals = share.map(() => tasks.map(() => 0));
  const steadiness = 0.2 + random();
  for (const [place, { from, to }] of segments.entries()) {
    const left = share.map((_, person) => tasks.map((_, task) => amounts[person]![task]![place]!));
    const isFree = tasks.map((_, task) => kept.people(task, from) === null);
    const seats = tasks.flatMap((_, task) =>
      new Array<number>(kept.people(task, from) ?? 0).fill(task),
    );
    if (seats.length > people) return null;
    for (let slot = from; slot < to; slot++) {
      const slotsLeft = to - slot;
      const stays = (person: number, task: number) =>
        run[person]!.task === task ? run[person]!.length : 0;
      const mayDo = (person: number, task: number) =>
        kept.isQualified(person, task) &&
        stays(person, task) < kept.longestStay(task) &&
        totals[person]![task]! < kept.longestTotal(task);
      const freeTask = (person: number) =>
        tasks.findIndex(
          (_, task) => isFree[task] && left[person]![task]! > 0 && mayDo(person, task),
        );
      const cost = share.map((_, person) => {
        const owed = tasks.reduce(
          (sum, _, task) => sum + (isFree[task] ? 0 : Math.max(0, left[person]![task]!)),
          0,
        );
        const row = new Float64Array(seats.length + people).fill(Number.POSITIVE_INFINITY);
        const mustWork = owed >= slotsLeft;
        if (isLoose || !mustWork) row[seats.length + person] = mustWork ? HURRY : 0;
        seats.forEach((task, seat) => {
          const own = left[person]![task]!;
          if (!mayDo(person, task) || (!isLoose && own <= 0)) return;
          const stay = kept.longestStay(task);
          const spare = mostWithin(slotsLeft - 1, stay) - own;
          row[seat] =
            -MUST +
            (own > 0 ? 0 : HURRY * (1 + share[person]![task]! - restShare[person]!)) -
            (spare < 0 ? HURRY : 0) -
            own / slotsLeft -
            (stays(person, task) > 0 ? steadiness : 0) -
            0.3 * random();
        });
        return row;
      });
      const chosen = cheapestAssignment(cost);
      if (!chosen) return null;
      if (chosen.filter((column) => column < seats.length).length < seats.length) return null;
      chosen.forEach((column, person) => {
        const task = column < seats.length ? seats[column]! : freeTask(person);
        table[person]![slot] = task;
        run[person] =
          run[person]!.task === task
            ? { task, length: run[person]!.length + 1 }
            : { task, length: 1 };
        if (task === REST) return;
        left[person]![task]! -= 1;
        totals[person]![task]! += 1;
      });
    }
  }
  return table;
}

/**
 * Evens a table out: two people change places for a stretch wherever that takes something off the larger share of the two
 * and breaks nothing. Ends when no such change is left, or the time is up.
 */
export function evenOut(
  problem: TimetableProblem,
  kept: Kept,
  table: number[][],
  isTimeUp: () => boolean,
): void {
  const shares = sharesOf(problem, table);
  const cost = (person: number, task: number) =>
    task === REST ? problem.restShare[person]! : problem.share[person]![task]!;
  for (let isBetter = true; isBetter && !isTimeUp(); ) {
    isBetter = false;
    const order = shares.map((_, person) => person).sort((a, b) => shares[b]! - shares[a]!);
    search: for (const high of order) {
      for (const low of [...order].reverse()) {
        if (shares[low]! >= shares[high]!) break;
        for (const { from, to } of stretchesOf(table[high]!)) {
          for (let end = to; end > from; end--) {
            const change = exchange(table, high, low, from, end, cost);
            const [nextHigh, nextLow] = [shares[high]! + change.high, shares[low]! + change.low];
            if (Math.max(nextHigh, nextLow) > shares[high]! - 1e-4) continue;
            swap(table, high, low, from, end);
            if (isAllowed(problem, kept, table, high) && isAllowed(problem, kept, table, low)) {
              shares[high] = nextHigh;
              shares[low] = nextLow;
              isBetter = true;
              break search;
            }
            swap(table, high, low, from, end);
          }
        }
      }
    }
  }
}

/**
 * Makes for fewer changes of place: two people change over for a stretch wherever that leaves fewer stretches between them,
 * breaks nothing and takes nobody beyond the largest share that there is.
 */
export function steady(
  problem: TimetableProblem,
  kept: Kept,
  table: number[][],
  isTimeUp: () => boolean,
): void {
  const shares = sharesOf(problem, table);
  const largest = Math.max(...shares);
  const cost = (person: number, task: number) =>
    task === REST ? problem.restShare[person]! : problem.share[person]![task]!;
  const stretches = (person: number) => stretchesOf(table[person]!);
  for (let isBetter = true; isBetter && !isTimeUp(); ) {
    isBetter = false;
    for (let one = 0; one < table.length && !isTimeUp(); one++)
      for (let other = 0; other < table.length; other++) {
        if (one === other) continue;
        for (const { from, to } of stretches(one)) {
          const before = stretches(one).length + stretches(other).length;
          const change = exchange(table, one, other, from, to, cost);
          const [mine, theirs] = [shares[one]! + change.high, shares[other]! + change.low];
          if (Math.max(mine, theirs) > largest) continue;
          swap(table, one, other, from, to);
          if (
            stretches(one).length + stretches(other).length < before &&
            isAllowed(problem, kept, table, one) &&
            isAllowed(problem, kept, table, other)
          ) {
            shares[one] = mine;
            shares[other] = theirs;
            isBetter = true;
            break;
          }
          swap(table, one, other, from, to);
        }
      }
  }
}

function exchange(
  table: readonly (readonly number[])[],
  high: number,
  low: number,
  from: number,
  to: number,
  cost: (person: number, task: number) => number,
): { high: number; low: number } {
  const change = { high: 0, low: 0 };
  for (let slot = from; slot < to; slot++) {
    const [mine, theirs] = [table[high]![slot]!, table[low]![slot]!];
    change.high += cost(high, theirs) - cost(high, mine);
    change.low += cost(low, mine) - cost(low, theirs);
  }
  return change;
}

function swap(table: number[][], a: number, b: number, from: number, to: number): void {
  for (let slot = from; slot < to; slot++)
    [table[a]![slot], table[b]![slot]] = [table[b]![slot]!, table[a]![slot]!];
}

function isAllowed(
  { tasks }: TimetableProblem,
  kept: Kept,
  table: readonly (readonly number[])[],
  person: number,
): boolean {
  const totals = tasks.map(() => 0);
  for (const { task, from, to } of stretchesOf(table[person]!)) {
    if (task === REST) continue;
    totals[task]! += to - from;
    if (!kept.isQualified(person, task) || to - from > kept.longestStay(task)) return false;
    if (totals[task]! > kept.longestTotal(task)) return false;
  }
  return true;
}

/** Keeps to these demands of a problem and leaves the others out. */
export function keeping(
  { tasks, mostShare }: TimetableProblem,
  isKept: (
    kind: "qualified" | "stay" | "total" | "staffing",
    task: number,
    line: number,
  ) => boolean,
  isLimited: (person: number) => boolean,
): Kept {
  return {
    isQualified: (person, task) =>
      tasks[task]!.isQualified[person]! || !isKept("qualified", task, 0),
    longestStay: (task) =>
      isKept("stay", task, 0)
        ? (tasks[task]!.longestStay ?? Number.POSITIVE_INFINITY)
        : Number.POSITIVE_INFINITY,
    longestTotal: (task) =>
      isKept("total", task, 0)
        ? (tasks[task]!.longestTotal ?? Number.POSITIVE_INFINITY)
        : Number.POSITIVE_INFINITY,
    people: (task, slot) => {
      const line = staffingAt(tasks[task]!, slot);
      if (line < 0) return 0;
      return isKept("staffing", task, line) ? tasks[task]!.staffing[line]!.people : null;
    },
    mostShare: (person) => (isLimited(person) ? mostShare : Number.POSITIVE_INFINITY),
  };
}
