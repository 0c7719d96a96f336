import loadHighs, { type Highs } from "highs";
import {
  brokenBy,
  type Demand,
  demandsOf,
  sharesOf,
  type Table,
  type TimetableProblem,
} from "../../shared/planning/timetable";
import {
  type Amounts,
  evenOut,
  type Kept,
  keeping,
  layOut,
  mostWithin,
  type Segment,
  steady,
} from "./lay-out-table";
import { Programme } from "./programme";

/** What comes of a search. Shares are of the day's limit; 1 is the whole of it. */
export type TimetableAnswer =
  | {
      readonly kind: "timetable";
      readonly table: Table;
      readonly largest: number;
      /** No timetable can have a smaller largest share. */
      readonly bound: number;
    }
  | {
      readonly kind: "contradiction";
      readonly demands: readonly Demand[];
      /** With any one of them left out there is a timetable. */
      readonly isSmallest: boolean;
    }
  | { readonly kind: "undecided" };

/** Up to so many yes-or-no places a table is searched for slot by slot, where amounts alone don't come out. */
const MOST_PLACES = 2_500;
/** Time for the amounts, for laying them out, for a table slot by slot, and for all steps of the search for a contradiction, s. */
const AMOUNTS_S = 4.5;
const LAY_OUT_S = 1.5;
const PLACES_S = 3;
const CONTRADICTION_S = 20;
/** For putting a person's stretches together, s. */
const STEADY_S = 0.7;
/** For one of those steps. */
const STEP_S = 1.5;
const KINDS: readonly Demand["kind"][] = ["limit", "stay", "total", "qualified"];
/** A gap of this share of the objective is not worth more time. */
const GOOD_ENOUGH = 2e-3;
/** Tables that don't come out are begun anew so often. */
const TRIES = 60;
const FIRST_TRIES = 6;

let loaded: Promise<Highs> | null = null;

/**
 * A timetable in which everything asked is kept to and the largest share of the day's limit is as small as it can be found,
 * with the bound below which none can come; or a smallest set of demands that contradict one another.
 *
 * First only how much of each task everybody does is decided, a programme in whole numbers that every timetable keeps to, so
 * that its bound is one for all timetables. Then the amounts are laid out over the slots.
 */
export async function solveTimetable(
  problem: TimetableProblem,
  onProgress: (progressPct: number) => void = () => undefined,
): Promise<TimetableAnswer> {
  loaded ??= loadHighs();
  const search = new Search(await loaded, problem);
  const found = search.best(onProgress);
  if (found === "undecided") return { kind: "undecided" };
  if (found !== "impossible") return { kind: "timetable", ...found };
  return { kind: "contradiction", ...search.contradiction(onProgress) };
}

type Found = { table: Table; largest: number; bound: number };

class Search {
  private readonly segments: readonly Segment[];
  private readonly demands: readonly Demand[];

  constructor(
    private readonly highs: Highs,
    private readonly problem: TimetableProblem,
  ) {
    const cuts = new Set([0, problem.slots]);
    for (const { staffing } of problem.tasks)
      for (const { from, to } of staffing) cuts.add(from).add(to);
    const sorted = [...cuts].sort((a, b) => a - b);
    this.segments = sorted.slice(1).map((to, index) => ({ from: sorted[index]!, to }));
    this.demands = demandsOf(problem);
  }

  best(onProgress: (progressPct: number) => void): Found | "impossible" | "undecided" {
    const kept = this.keeping(this.demands);
    const began = performance.now();
    const relaxed = this.amounts(kept, {
      isLeastWanted: true,
      isRelaxed: true,
      seconds: AMOUNTS_S,
    });
    if (relaxed.isImpossible) return "impossible";
    onProgress(5);
    const until = (spentS: number) => () => performance.now() - began > spentS * 1000;
    // A table that is near to it already, so that the whole numbers have something to start from.
    let best =
      relaxed.values &&
      this.laidOut(kept, relaxed.values, until(LAY_OUT_S), relaxed.bound, FIRST_TRIES);
    onProgress(15);
    const { values, isImpossible, bound } = this.amounts(kept, {
      isLeastWanted: true,
      seconds: AMOUNTS_S,
      start: best?.table ?? null,
      onBeat: (spentS) => onProgress(15 + (55 * spentS) / AMOUNTS_S),
    });
    if (isImpossible) return "impossible";
    onProgress(70);
    const exactly =
      values &&
      this.laidOut(kept, values, until(2 * LAY_OUT_S + AMOUNTS_S), Math.max(bound, relaxed.bound));
    if (exactly && (best === null || exactly.largest < best.largest)) best = exactly;
    onProgress(85);
    let least = Math.max(bound, relaxed.bound);
    if (this.isSmall() && (best === null || best.largest > least + 1e-7)) {
      const exact = this.bySlots(kept, true, best?.table ?? null);
      if (exact.isImpossible) return "impossible";
      least = Math.max(least, exact.bound);
      if (exact.table && (best === null || exact.largest < best.largest))
        best = { table: exact.table, largest: exact.largest };
    }
    if (best === null) return "undecided";
    const table = best.table.map((row) => [...row]);
    const steadying = performance.now();
    steady(this.problem, kept, table, () => performance.now() - steadying > STEADY_S * 1000);
    const largest = Math.max(...sharesOf(this.problem, table));
    return { table, largest, bound: Math.min(least, largest) };
  }

  /**
   * A set of demands that no timetable keeps to, and of which none can be left out: one after the other is left out, and
   * stays out where it still does not work without it.
   */
  contradiction(onProgress: (progressPct: number) => void): {
    demands: readonly Demand[];
    isSmallest: boolean;
  } {
    const began = performance.now();
    let left: readonly Demand[] = this.demands;
    let isSmallest = true;
    // Many at a time first, for most of them have nothing to do with it; then each alone.
    const bundles = [
      ...KINDS.map((kind) => this.demands.filter((one) => one.kind === kind)),
      ...this.problem.tasks.map((_, task) =>
        this.demands.filter((one) => one.kind !== "limit" && one.task === task),
      ),
    ].filter((bundle) => bundle.length > 1);
    const steps = [...bundles, ...this.demands.map((demand) => [demand])];
    for (const [index, step] of steps.entries()) {
      onProgress((100 * index) / steps.length);
      const without = left.filter((one) => !step.includes(one));
      if (without.length === left.length) continue;
      const isLast = step.length === 1;
      if (performance.now() - began > CONTRADICTION_S * 1000) {
        isSmallest = false;
        break;
      }
      const works = this.works(without);
      if (works === false) left = without;
      else if (works === null && isLast) isSmallest = false;
    }
    return { demands: left, isSmallest };
  }

  /** Whether there is a timetable that keeps to these demands; null where that was not found out. */
  private works(demands: readonly Demand[]): boolean | null {
    const kept = this.keeping(demands);
    const { values, isImpossible } = this.amounts(kept, { isLeastWanted: false, seconds: STEP_S });
    if (isImpossible) return false;
    const began = performance.now();
    const isTimeUp = () => performance.now() - began > 500;
    const found = values && this.laidOut(kept, values, isTimeUp, Number.POSITIVE_INFINITY);
    if (found && brokenBy(this.problem, found.table, demands).length === 0) return true;
    if (!this.isSmall()) return null;
    const exact = this.bySlots(kept, false, null);
    if (exact.isImpossible) return false;
    return exact.table ? true : null;
  }

  private keeping(demands: readonly Demand[]): Kept {
    const asked = new Set(
      demands.map((demand) =>
        demand.kind === "limit"
          ? ""
          : `${demand.kind} ${demand.task} ${demand.kind === "staffing" ? demand.line : 0}`,
      ),
    );
    const limited = new Set(demands.flatMap((one) => (one.kind === "limit" ? one.people : [])));
    return keeping(
      this.problem,
      (kind, task, line) => asked.has(`${kind} ${task} ${line}`),
      (person) => limited.has(person),
    );
  }

  private isSmall(): boolean {
    const { share, tasks, slots } = this.problem;
    return share.length * tasks.length * slots <= MOST_PLACES;
  }

  /** How much of each task everybody does in each segment. Every timetable comes to such amounts. */
  private amounts(
    kept: Kept,
    {
      isLeastWanted,
      isRelaxed = false,
      seconds,
      start = null,
      onBeat,
    }: {
      isLeastWanted: boolean;
      /** In any numbers, not only whole ones. */
      isRelaxed?: boolean;
      seconds: number;
      /** A table that is known. */
      start?: Table | null;
      onBeat?: (spentS: number) => void;
    },
  ): { values: Amounts | null; isImpossible: boolean; bound: number } {
    const { problem, segments } = this;
    const { share, restShare, tasks, slots } = problem;
    const programme = new Programme(this.highs);
    const never = Number.POSITIVE_INFINITY;
    const top = programme.column(0, never, { cost: isLeastWanted ? 1 : 0, isWhole: false });
    const known = [start ? Math.max(...sharesOf(problem, start)) : 0];
    const places: number[][][] = share.map((_, person) =>
      tasks.map((_, task) =>
        segments.map(({ from, to }) => {
          const people = kept.people(task, from);
          if (people === 0 || !kept.isQualified(person, task)) return -1;
          const most = Math.min(
            mostWithin(to - from, kept.longestStay(task)),
            kept.longestTotal(task),
          );
          known.push(start?.[person]?.slice(from, to).filter((one) => one === task).length ?? 0);
          return programme.column(0, most);
        }),
      ),
    );
    segments.forEach(({ from, to }, place) => {
      tasks.forEach((_, task) => {
        const people = kept.people(task, from);
        if (people === null || people === 0) return;
        const all = places.flatMap((own) => entry(own[task]![place]!));
        programme.row(people * (to - from), people * (to - from), all);
      });
      for (const own of places)
        programme.row(
          -never,
          to - from,
          own.flatMap((columns) => entry(columns[place]!)),
        );
    });
    places.forEach((own, person) => {
      const base = slots * restShare[person]!;
      const more = own.flatMap((columns, task) =>
        columns.flatMap((column) => entry(column, share[person]![task]! - restShare[person]!)),
      );
      programme.row(-never, -base, [...more, [top, -1]]);
      if (kept.mostShare(person) < never)
        programme.row(-never, kept.mostShare(person) - base, more);
      own.forEach((columns, task) => {
        const all = columns.flatMap((column) => entry(column));
        if (all.length < 2) return;
        const most = Math.min(this.mostOf(kept, task), kept.longestTotal(task));
        if (most < slots) programme.row(-never, most, all);
      });
    });
    const { values, isImpossible, bound } = programme.solve({
      seconds,
      isRelaxed,
      start: start && known,
      goodEnough: GOOD_ENOUGH,
      ...(onBeat && { onBeat }),
    });
    return {
      isImpossible,
      bound,
      values:
        values &&
        places.map((own) =>
          own.map((columns) =>
            columns.map((column) => {
              const amount = column < 0 ? 0 : values[column]!;
              return isRelaxed ? amount : Math.round(amount);
            }),
          ),
        ),
    };
  }

  /** The most slots of a task that its longest stay leaves to one person, over stretches of segments in which it runs. */
  private mostOf(kept: Kept, task: number): number {
    const stay = kept.longestStay(task);
    let sum = 0;
    let length = 0;
    for (const { from, to } of [...this.segments, { from: -1, to: -1 }]) {
      if (from >= 0 && kept.people(task, from) !== 0) length += to - from;
      else {
        sum += mostWithin(length, stay);
        length = 0;
      }
    }
    return sum;
  }

  /** Amounts over the slots, as they are where that comes out, else nearly; null where nobody could keep to it. */
  private laidOut(
    kept: Kept,
    amounts: Amounts,
    isTimeUp: () => boolean,
    bound: number,
    tries = TRIES,
  ): { table: Table; largest: number } | null {
    const { problem, segments } = this;
    let best: { table: Table; largest: number } | null = null;
    for (let tried = 0; tried < tries && !(tried > 1 && isTimeUp()); tried++) {
      // Amounts that are not whole can only be a wish.
      const isLoose = tries === FIRST_TRIES || tried % 3 === 2;
      const table = layOut(problem, kept, segments, amounts, chance(tried + 1), isLoose);
      if (!table) continue;
      evenOut(problem, kept, table, isTimeUp);
      const shares = sharesOf(problem, table);
      if (shares.some((one, person) => one > kept.mostShare(person) * (1 + 1e-9))) continue;
      const largest = Math.max(...shares);
      if (best === null || largest < best.largest) best = { table, largest };
      if (best.largest <= bound + 1e-9) break;
    }
    return best;
  }

  /** Who is where in every slot, as one programme: exact, and only for few people, tasks and slots. */
  private bySlots(kept: Kept, isLeastWanted: boolean, start: Table | null) {
    const { share, restShare, tasks, slots } = this.problem;
    const programme = new Programme(this.highs);
    const never = Number.POSITIVE_INFINITY;
    const top = programme.column(0, never, { cost: isLeastWanted ? 1 : 0, isWhole: false });
    const known = [start ? Math.max(...sharesOf(this.problem, start)) : 0];
    const places: number[][][] = share.map((_, person) =>
      tasks.map((_, task) =>
        Array.from({ length: slots }, (_, slot) => {
          if (kept.people(task, slot) === 0 || !kept.isQualified(person, task)) return -1;
          known.push(start?.[person]?.[slot] === task ? 1 : 0);
          return programme.column(0, 1);
        }),
      ),
    );
    for (let slot = 0; slot < slots; slot++) {
      tasks.forEach((_, task) => {
        const people = kept.people(task, slot);
        if (people !== null && people > 0)
          programme.row(
            people,
            people,
            places.flatMap((own) => entry(own[task]![slot]!)),
          );
      });
      for (const own of places)
        programme.row(
          -never,
          1,
          own.flatMap((columns) => entry(columns[slot]!)),
        );
    }
    places.forEach((own, person) => {
      const base = slots * restShare[person]!;
      const more = own.flatMap((columns, task) =>
        columns.flatMap((column) => entry(column, share[person]![task]! - restShare[person]!)),
      );
      programme.row(-never, -base, [...more, [top, -1]]);
      if (kept.mostShare(person) < never)
        programme.row(-never, kept.mostShare(person) - base, more);
      own.forEach((columns, task) => {
        const stay = kept.longestStay(task);
        for (let slot = 0; slot + stay < slots; slot++)
          programme.row(
            -never,
            stay,
            columns.slice(slot, slot + stay + 1).flatMap((column) => entry(column)),
          );
        if (kept.longestTotal(task) < slots)
          programme.row(
            -never,
            kept.longestTotal(task),
            columns.flatMap((one) => entry(one)),
          );
      });
    });
    const { values, isImpossible, bound } = programme.solve({
      seconds: isLeastWanted ? PLACES_S : STEP_S,
      start: start && known,
    });
    const table =
      values &&
      places.map((own) =>
        Array.from({ length: slots }, (_, slot) =>
          own.findIndex((columns) => columns[slot]! >= 0 && values[columns[slot]!]! > 0.5),
        ),
      );
    return {
      table,
      isImpossible,
      bound,
      largest: table ? Math.max(...sharesOf(this.problem, table)) : Number.POSITIVE_INFINITY,
    };
  }
}

const entry = (column: number, factor = 1): (readonly [number, number])[] =>
  column < 0 ? [] : [[column, factor]];

/** Numbers from 0 to 1 that are the same in every run. */
function chance(seed: number): () => number {
  let state = Math.imul(seed, 0x9e3779b9) >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let mixed = Math.imul(state ^ (state >>> 15), state | 1);
    mixed ^= mixed + Math.imul(mixed ^ (mixed >>> 7), mixed | 61);
    return ((mixed ^ (mixed >>> 14)) >>> 0) / 4294967296;
  };
}
