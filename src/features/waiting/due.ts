import type { FindingKind, FindingRow } from "../../../shared/schemas/finding";
import type { CrewProgress } from "../../../shared/schemas/waiting";
import { addDays } from "../../../shared/time/zone";

/** By when something has to be done; the order is that of the page. */
export const DUE_GROUPS = ["before-noise", "before-shift-ends", "this-week", "later"] as const;
export type DueGroup = (typeof DUE_GROUPS)[number];

/** Where nobody should go back into noise as things stand. */
const BEFORE_NOISE: ReadonlySet<FindingKind> = new Set([
  "no-protector",
  "over-limit-at-ear",
  "protects-too-little",
  "dual-protection",
]);

export type Due =
  | { readonly kind: "now" }
  | { readonly kind: "time"; readonly time: string }
  | { readonly kind: "day"; readonly date: string; readonly isLate: boolean }
  | { readonly kind: "none" };

export interface WaitingItem {
  readonly finding: FindingRow;
  readonly group: DueGroup;
  readonly due: Due;
  readonly crew: CrewProgress | null;
  /** The same worker's over the limit, where this finding is the reason for it: one thing to do, one row. */
  readonly also: FindingRow | null;
}

/** What explains that the limit is passed at the ear. */
const EXPLAINS_OVER: ReadonlySet<FindingKind> = new Set([
  "no-protector",
  "protects-too-little",
  "dual-protection",
]);

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

/**
 * A finding by when it has to be done. A date that an officer has set counts; else what keeps a worker out of noise comes
 * before the next time in noise, what is due today before the shift ends.
 */
export function placeFinding(
  finding: FindingRow,
  crew: CrewProgress | null,
  today: string,
  nowTime: string,
): Pick<WaitingItem, "group" | "due"> {
  const { dueOn, kind, state } = finding;
  const isPlanned = state === "in-hand" && dueOn !== null && dueOn > today;
  if (BEFORE_NOISE.has(kind) && !isPlanned) {
    if (!crew) return { group: "before-noise", due: dayDue(dueOn, today) };
    const moment = crewMoment(crew, nowTime);
    const due: Due =
      moment === "running"
        ? { kind: "now" }
        : moment === "ahead"
          ? { kind: "time", time: crew.start }
          : { kind: "day", date: addDays(today, 1), isLate: false };
    return { group: "before-noise", due };
  }
  if (dueOn !== null && dueOn <= today) {
    const isToday = dueOn === today && crew !== null && crewMoment(crew, nowTime) !== "over";
    return {
      group: "before-shift-ends",
      due: isToday ? { kind: "time", time: crewEnd(crew) } : dayDue(dueOn, today),
    };
  }
  const isThisWeek = dueOn !== null && dueOn <= addDays(today, 7);
  return { group: isThisWeek ? "this-week" : "later", due: dayDue(dueOn, today) };
}

function dayDue(dueOn: string | null, today: string): Due {
  return dueOn === null ? { kind: "none" } : { kind: "day", date: dueOn, isLate: dueOn < today };
}

/** How far over at the ear: what sorts people. */
const overBy = ({ figures }: FindingRow): number => {
  if (!figures || figures.atEarDb === null) return Number.NEGATIVE_INFINITY;
  const rank = { over: 2000, "cant-tell-yet": 1000, under: 0, "not-assessed": -1000 }[
    figures.verdictAtEar
  ];
  return rank + figures.atEarDb;
};

export function placeFindings(
  findings: readonly FindingRow[],
  crews: readonly CrewProgress[],
  today: string,
  nowTimeAt: (siteId: string) => string,
): WaitingItem[] {
  const overOf = new Map(
    findings.flatMap((finding) =>
      finding.kind === "over-limit-at-ear" && finding.worker
        ? [[finding.worker.id, finding] as const]
        : [],
    ),
  );
  const folded = new Set<string>();
  const items = findings.map((finding): WaitingItem => {
    const crew =
      crews.find(({ name, siteId }) => name === finding.crewName && siteId === finding.siteId) ??
      null;
    const placed = placeFinding(finding, crew, today, nowTimeAt(finding.siteId));
    const over =
      finding.worker && EXPLAINS_OVER.has(finding.kind) ? overOf.get(finding.worker.id) : undefined;
    const isSame =
      over &&
      !folded.has(over.id) &&
      placeFinding(over, crew, today, nowTimeAt(over.siteId)).group === placed.group;
    if (isSame) folded.add(over.id);
    return { finding, crew, also: isSame ? over : null, ...placed };
  });
  return items
    .filter(({ finding }) => !folded.has(finding.id))
    .toSorted(
      (a, b) =>
        DUE_GROUPS.indexOf(a.group) - DUE_GROUPS.indexOf(b.group) ||
        (a.group === "before-noise"
          ? 0
          : (a.finding.dueOn ?? "9999").localeCompare(b.finding.dueOn ?? "9999")) ||
        overBy(b.finding) - overBy(a.finding),
    );
}
