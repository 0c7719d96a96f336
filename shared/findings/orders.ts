import type { FindingKind, FindingState } from "../schemas/finding";

/** What a supervisor acts on, most urgent first. */
export const ORDER_KINDS: readonly FindingKind[] = [
  "no-protector",
  "over-limit-at-ear",
  "dual-protection",
  "protects-too-little",
  "peak-or-ceiling",
  "not-worn-long-enough",
  "wearing-unknown",
  "protects-too-much",
];

/** What is put right by what the worker wears: together they ask for one thing. */
export const WORN_KINDS: ReadonlySet<FindingKind> = new Set([
  "no-protector",
  "over-limit-at-ear",
  "dual-protection",
  "protects-too-little",
  "not-worn-long-enough",
  "protects-too-much",
]);

/** Whether a row of the crew sheet has something to be done, or done already: by a finding, or by the day to come. */
export const isAsked = ({
  order,
  ahead,
}: {
  readonly order: unknown;
  /** Not there in what a device kept of an older sheet. */
  readonly ahead?: unknown;
}): boolean => Boolean(order) || Boolean(ahead);

interface Ordering {
  readonly kind: FindingKind;
  readonly state: FindingState;
  readonly lastDate: string;
}

export interface FoldedOrder<T> {
  /** The finding that the order is read from. */
  readonly lead: T;
  /** What the same order answers. */
  readonly also: readonly T[];
}

const urgencyOf = ({ kind }: Ordering): number => {
  const place = ORDER_KINDS.indexOf(kind);
  return place < 0 ? ORDER_KINDS.length : place;
};

const latestFirst = (a: Ordering, b: Ordering): number =>
  a.lastDate === b.lastDate ? urgencyOf(a) - urgencyOf(b) : a.lastDate < b.lastDate ? 1 : -1;

/**
 * One worker's open findings as orders: one for what the worker wears, read from the latest day that asks for something,
 * and one for each of the rest. Once it was marked as done, what it answers asks for nothing again until a later day does.
 * What is still to be done comes first.
 */
export function foldOrders<T extends Ordering>(findings: readonly T[]): FoldedOrder<T>[] {
  const worn = findings.filter(({ kind }) => WORN_KINDS.has(kind)).toSorted(latestFirst);
  const latest = worn[0]?.lastDate;
  const lead =
    worn.find(({ state, lastDate }) => state === "done" && lastDate === latest) ?? worn[0];
  const orders: FoldedOrder<T>[] = findings
    .filter(({ kind }) => !WORN_KINDS.has(kind))
    .map((finding) => ({ lead: finding, also: [] }));
  if (lead) orders.push({ lead, also: worn.filter((finding) => finding !== lead) });
  return orders.toSorted(
    (a, b) =>
      Number(a.lead.state === "done") - Number(b.lead.state === "done") ||
      latestFirst(a.lead, b.lead),
  );
}
