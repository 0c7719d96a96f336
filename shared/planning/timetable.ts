/** Time is laid out in slots of this length, minutes. */
export const SLOT_MIN = 15;
/** Doing none of the tasks. */
export const REST = -1;

/** So many people at a task from one slot on and up to another, which does not belong to it any more. */
export interface Staffing {
  readonly from: number;
  readonly to: number;
  readonly people: number;
}

export interface TaskDemands {
  /** Do not overlap; outside of them nobody is at the task. */
  readonly staffing: readonly Staffing[];
  /** By person. */
  readonly isQualified: readonly boolean[];
  /** Slots in one go, and in a day; null: as long as may be. */
  readonly longestStay: number | null;
  readonly longestTotal: number | null;
}

/** Who may do what for how long, in numbers. People and tasks are known by their places. */
export interface TimetableProblem {
  readonly slots: number;
  readonly tasks: readonly TaskDemands[];
  /** Share of the day's limit that a slot of a task takes, by person and task; 1 is the whole limit. */
  readonly share: readonly (readonly number[])[];
  /** The same of a slot at none of the tasks, by person. */
  readonly restShare: readonly number[];
  /** What nobody may go beyond. */
  readonly mostShare: number;
}

/** By person and slot: the place of the task, or `REST`. */
export type Table = readonly (readonly number[])[];

/** One of the things that are asked of a timetable. */
export type Demand =
  | { readonly kind: "staffing"; readonly task: number; readonly line: number }
  | { readonly kind: "qualified"; readonly task: number }
  | { readonly kind: "stay"; readonly task: number }
  | { readonly kind: "total"; readonly task: number }
  | { readonly kind: "limit"; readonly people: readonly number[] };

/** Limits are told apart for so many sorts of people; more of them are one. */
const MOST_LIMITS = 6;

/** All that is asked, one by one. People to whom every task is the same are under one limit. */
export function demandsOf({ tasks, share, restShare }: TimetableProblem): Demand[] {
  const alike = new Map<string, number[]>();
  share.forEach((own, person) => {
    const key = JSON.stringify([own, restShare[person]]);
    alike.set(key, [...(alike.get(key) ?? []), person]);
  });
  const limited =
    alike.size <= MOST_LIMITS ? [...alike.values()] : [share.map((_, person) => person)];
  return [
    ...limited.map((people): Demand => ({ kind: "limit", people })),
    ...tasks.flatMap(({ longestStay, longestTotal, isQualified, staffing }, task): Demand[] => [
      ...(longestStay === null ? [] : [{ kind: "stay", task } as const]),
      ...(longestTotal === null ? [] : [{ kind: "total", task } as const]),
      ...(isQualified.every(Boolean) ? [] : [{ kind: "qualified", task } as const]),
      ...staffing.map((_, line) => ({ kind: "staffing", task, line }) as const),
    ]),
  ];
}

/** The place of the staffing that holds in a slot; −1 where nobody is wanted. */
export const staffingAt = ({ staffing }: TaskDemands, slot: number): number =>
  staffing.findIndex(({ from, to }) => from <= slot && slot < to);

/** Each person's share of the day's limit; 1 is the whole limit. */
export const sharesOf = ({ share, restShare }: TimetableProblem, table: Table): number[] =>
  table.map((row, person) =>
    row.reduce(
      (sum, task) => sum + (task === REST ? restShare[person]! : share[person]![task]!),
      0,
    ),
  );

/** What of `demands` a table does not keep to. A table in which everything is kept is a solution. */
export function brokenBy(
  problem: TimetableProblem,
  table: Table,
  demands: readonly Demand[],
): Demand[] {
  const shares = sharesOf(problem, table);
  return demands.filter((demand) => {
    if (demand.kind === "limit")
      return demand.people.some((person) => shares[person]! > problem.mostShare * (1 + 1e-9));
    const task = problem.tasks[demand.task]!;
    switch (demand.kind) {
      case "staffing": {
        const { from, to, people } = task.staffing[demand.line]!;
        for (let slot = from; slot < to; slot++)
          if (table.filter((row) => row[slot] === demand.task).length !== people) return true;
        return false;
      }
      case "qualified":
        return table.some((row, person) => row.includes(demand.task) && !task.isQualified[person]);
      case "stay":
        return table.some((row) => longestRun(row, demand.task) > task.longestStay!);
      case "total":
        return table.some(
          (row) => row.filter((one) => one === demand.task).length > task.longestTotal!,
        );
    }
    return false;
  });
}

function longestRun(row: readonly number[], task: number): number {
  let longest = 0;
  let run = 0;
  for (const one of row) {
    run = one === task ? run + 1 : 0;
    longest = Math.max(longest, run);
  }
  return longest;
}

/** A person's stretches at a task or at rest, one after the other. */
export function stretchesOf(row: readonly number[]): { task: number; from: number; to: number }[] {
  const found: { task: number; from: number; to: number }[] = [];
  row.forEach((task, slot) => {
    const last = found.at(-1);
    if (last?.task === task) last.to = slot + 1;
    else found.push({ task, from: slot, to: slot + 1 });
  });
  return found;
}

const DAY_MIN = 1440;

/** The time of day so many minutes after another, HH:MM; past midnight it begins again. */
export function clockAt(startsAt: string, afterMin: number): string {
  const [hours = 0, minutes = 0] = startsAt.split(":").map(Number);
  const at = (hours * 60 + minutes + afterMin) % DAY_MIN;
  return `${String(Math.floor(at / 60)).padStart(2, "0")}:${String(at % 60).padStart(2, "0")}`;
}
