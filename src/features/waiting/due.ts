import { foldOrders } from "../../../shared/findings/orders";
import { isOverdue } from "../../../shared/findings/overdue";
import type { FindingKind, FindingRow } from "../../../shared/schemas/finding";
import type { CrewProgress } from "../../../shared/schemas/waiting";
import { addDays } from "../../../shared/time/zone";

/** By when something has to be done; the order is that of the page. */
export const DUE_GROUPS = ["overdue", "before-noise", "today", "this-week", "later"] as const;
export type DueGroup = (typeof DUE_GROUPS)[number];

/** Where nobody should go back into noise as things stand. */
const BEFORE_NOISE: ReadonlySet<FindingKind> = new Set([
  "no-protector",
  "over-limit-at-ear",
  "protects-too-little",
  "dual-protection",
]);

export interface WaitingItem {
  readonly finding: FindingRow;
  readonly group: DueGroup;
  /** What the same order answers: one thing to do, one row. */
  readonly also: readonly FindingRow[];
}

const minutesOf = (time: string): number =>
  Number(time.slice(0, 2)) * 60 + Number(time.slice(3, 5));
const timeOf = (min: number): string =>
  `${String(Math.floor((min % 1440) / 60)).padStart(2, "0")}:${String(min % 60).padStart(2, "0")}`;

export type CrewMoment = "ahead" | "running" | "over";

/** Where a crew stands in its day of today, by its own clock. */
export function crewMoment(
  { start, lengthMin }: Pick<CrewProgress, "start" | "lengthMin">,
  nowTime: string,
): CrewMoment {
  const now = minutesOf(nowTime);
  const from = minutesOf(start);
  if (now < from) return "ahead";
  return now < from + lengthMin ? "running" : "over";
}

export const crewEnd = ({ start, lengthMin }: Pick<CrewProgress, "start" | "lengthMin">): string =>
  timeOf(minutesOf(start) + lengthMin);

/** The date on which a worker is in noise next, as far as a crew says it; today where none does. */
export function nextShiftOf(
  { crewName, siteId }: Pick<FindingRow, "crewName" | "siteId">,
  crews: readonly CrewProgress[],
  now: { readonly today: string; readonly time: string },
): string {
  const crew = crews.find((one) => one.name === crewName && one.siteId === siteId);
  return crew && crewMoment(crew, now.time) === "over" ? crew.nextDate : now.today;
}

/** It is due by the worker's next time in noise, or nobody has said that it can wait. */
export const isBeforeNoise = (
  { kind, state, dueOn }: Pick<FindingRow, "kind" | "state" | "dueOn">,
  nextShift: string,
): boolean =>
  BEFORE_NOISE.has(kind) && !(state === "in-hand" && dueOn !== null && dueOn > nextShift);

/** A finding by its date: what is past it stands first of all. */
export function groupOf(
  finding: Pick<FindingRow, "kind" | "state" | "dueOn">,
  today: string,
  nextShift: string,
): DueGroup {
  const { dueOn } = finding;
  if (isOverdue(finding, today)) return "overdue";
  if (isBeforeNoise(finding, nextShift)) return "before-noise";
  if (dueOn === today) return "today";
  return dueOn !== null && dueOn <= addDays(today, 7) ? "this-week" : "later";
}

/** How far over at the ear: what sorts people. */
const overBy = ({ figures }: FindingRow): number => {
  if (!figures || figures.atEarDb === null) return Number.NEGATIVE_INFINITY;
  const rank = { over: 2000, "cant-tell-yet": 1000, under: 0, "not-assessed": -1000 }[
    figures.verdictAtEar
  ];
  return rank + figures.atEarDb;
};

export interface Placed {
  readonly items: readonly WaitingItem[];
  /** Done as far as the supervisor is concerned. */
  readonly toBeChecked: readonly Pick<WaitingItem, "finding" | "also">[];
}

/** Everything that is open, one row for each order, the most urgent first. */
export function placeFindings(
  findings: readonly FindingRow[],
  todayAt: (siteId: string) => string,
  nextShiftAt: (finding: FindingRow) => string,
): Placed {
  const bySubject = new Map<string, FindingRow[]>();
  for (const finding of findings) {
    const subject = finding.worker?.id ?? finding.id;
    bySubject.set(subject, [...(bySubject.get(subject) ?? []), finding]);
  }
  const open = [...bySubject.values()]
    .flatMap((own) => foldOrders(own))
    .map(({ lead, also }) => ({ finding: lead, also }));
  const dueOf = ({ finding }: WaitingItem) => finding.dueOn ?? "9999";
  return {
    items: open
      .filter(({ finding }) => finding.state !== "done")
      .map((one) => ({
        ...one,
        group: groupOf(one.finding, todayAt(one.finding.siteId), nextShiftAt(one.finding)),
      }))
      .toSorted(
        (a, b) =>
          DUE_GROUPS.indexOf(a.group) - DUE_GROUPS.indexOf(b.group) ||
          dueOf(a).localeCompare(dueOf(b)) ||
          overBy(b.finding) - overBy(a.finding),
      ),
    toBeChecked: open.filter(({ finding }) => finding.state === "done"),
  };
}
