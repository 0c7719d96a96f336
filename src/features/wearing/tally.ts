import type { WearingRoundInput, WearingTally } from "../../../shared/schemas/wearing";
import { createKeptList, KEPT } from "../../lib/kept-list";

/** One look at one person: worn or not. What is counted follows from the taps, so that the last can be taken back. */
export interface Tap {
  readonly workerId: string;
  readonly taskId: string;
  readonly isWorn: boolean;
}

/** A round that is being made: kept on the phone until it is sent. */
export interface RoundDraft {
  readonly crewId: string;
  readonly crewName: string;
  readonly siteId: string;
  readonly date: string;
  readonly source: WearingRoundInput["source"];
  readonly note: string;
  readonly taps: readonly Tap[];
  /** A sending whose outcome is not known, and how many of the taps it holds: sent again under its key it counts once. */
  readonly pending: PendingRound | null;
}

export interface PendingRound {
  readonly key: string;
  readonly body: WearingRoundInput;
  readonly tapCount: number;
}

export function emptyRound({
  crewId,
  crewName,
  siteId,
  date,
}: Pick<RoundDraft, "crewId" | "crewName" | "siteId" | "date">): RoundDraft {
  return { crewId, crewName, siteId, date, source: "round", note: "", taps: [], pending: null };
}

export interface Count {
  readonly worn: number;
  readonly seen: number;
}

const pairOf = ({ workerId, taskId }: Pick<Tap, "workerId" | "taskId">) => `${workerId} ${taskId}`;

/** What was tapped for one worker in one task. */
export function countsOf(
  taps: readonly Tap[],
): (workerId: string, taskId: string) => Count | undefined {
  const counts = new Map<string, Count>();
  for (const tap of taps) {
    const { worn, seen } = counts.get(pairOf(tap)) ?? { worn: 0, seen: 0 };
    counts.set(pairOf(tap), { worn: worn + (tap.isWorn ? 1 : 0), seen: seen + 1 });
  }
  return (workerId, taskId) => counts.get(pairOf({ workerId, taskId }));
}

export function countAll(taps: readonly Tap[]): Count {
  return { worn: taps.filter(({ isWorn }) => isWorn).length, seen: taps.length };
}

/** The looks of a round, in the order in which each was first tapped. */
export function looksOf(taps: readonly Tap[]): WearingRoundInput["looks"] {
  const count = countsOf(taps);
  const first = new Map(taps.map((tap) => [pairOf(tap), tap]));
  return [...first.values()].map(({ workerId, taskId }) => {
    const { worn, seen } = count(workerId, taskId) ?? { worn: 0, seen: 0 };
    return { workerId, taskId, wornCount: worn, seenCount: seen };
  });
}

/** The tap that can be taken back; null where none is left, or where the last may be on the server already. */
export function lastTap({ taps, pending }: Pick<RoundDraft, "taps" | "pending">): Tap | null {
  return taps.length > (pending?.tapCount ?? 0) ? (taps.at(-1) ?? null) : null;
}

export function undoTap(draft: RoundDraft): RoundDraft {
  return lastTap(draft) === null ? draft : { ...draft, taps: draft.taps.slice(0, -1) };
}

/**
 * What is sent, and under which key. What was lost on the way goes again as it was, under the same key: taps made since
 * are another round's.
 */
export function toSend(draft: RoundDraft, newKey: () => string): PendingRound {
  if (draft.pending) return draft.pending;
  const { siteId, date: seenOn, source, note, taps } = draft;
  return {
    key: newKey(),
    body: { siteId, seenOn, source, note, looks: looksOf(taps) },
    tapCount: taps.length,
  };
}

/** What is left once it was saved; null for nothing. */
export function afterSent(draft: RoundDraft, { tapCount }: PendingRound): RoundDraft | null {
  const taps = draft.taps.slice(tapCount);
  return taps.length === 0 ? null : { ...draft, taps, note: "", pending: null };
}

export interface TallyWorker {
  readonly id: string;
  readonly name: string;
  readonly employeeNumber: string;
  /** Worn in all of the tasks shown; null: not the same in each, or none. */
  readonly protector: string | null;
  /** With the protector that is assigned for it; null: none is. */
  readonly tasks: readonly {
    readonly id: string;
    readonly name: string;
    readonly protector: string | null;
  }[];
}

/** Whom to look at, in one task or in all: those without a task in noise are counted apart. */
export function tallyWorkers(
  { tasks, workers }: WearingTally,
  taskId: string | null,
): { workers: readonly TallyWorker[]; withoutTaskCount: number } {
  const names = new Map(tasks.map(({ id, name }) => [id, name]));
  const shown = workers.map(({ taskIds, protectors, ...worker }) => {
    const shownTasks = taskIds
      .filter((id) => taskId === null || id === taskId)
      .map((id) => ({
        id,
        name: names.get(id) ?? "",
        protector: protectors.find((one) => one.taskId === id)?.name ?? null,
      }));
    const worn = new Set(shownTasks.map(({ protector }) => protector));
    const [only = null] = worn;
    return { ...worker, protector: worn.size === 1 ? only : null, tasks: shownTasks };
  });
  return {
    workers: shown.filter((worker) => worker.tasks.length > 0),
    withoutTaskCount: workers.filter(({ taskIds }) => taskIds.length === 0).length,
  };
}

/** Taps of people or tasks that the list no longer has: absent since, or with another job. They are still sent. */
export function tapsBeside({ workers }: WearingTally, taps: readonly Tap[]): Tap[] {
  const listed = new Set(
    workers.flatMap(({ id, taskIds }) => taskIds.map((taskId) => pairOf({ workerId: id, taskId }))),
  );
  return taps.filter((tap) => !listed.has(pairOf(tap)));
}

const nameOf = ({ crewId, date }: Pick<RoundDraft, "crewId" | "date">) => `${crewId} ${date}`;

const isDraft = (value: unknown): value is RoundDraft =>
  typeof value === "object" &&
  value !== null &&
  "crewId" in value &&
  "date" in value &&
  "taps" in value &&
  Array.isArray(value.taps) &&
  value.taps.length > 0;

export interface RoundDraftStore {
  /** All that wait, by crew and date, the earliest first. */
  list(): readonly RoundDraft[];
  read(crewId: string, date: string): RoundDraft | null;
  write(draft: RoundDraft): void;
  remove(crewId: string, date: string): void;
}

/** Rounds that are not sent yet, by user: two people at one phone do not see each other's. */
export function createRoundDraftStore(storage: Storage, userId: string): RoundDraftStore {
  const drafts = createKeptList({
    storage,
    name: KEPT.rounds,
    userId,
    idOf: nameOf,
    isItem: isDraft,
  });
  return {
    list: () => drafts.list().toSorted((a, b) => a.date.localeCompare(b.date)),
    read: (crewId, date) =>
      drafts.list().find((draft) => nameOf(draft) === nameOf({ crewId, date })) ?? null,
    write(draft) {
      if (draft.taps.length === 0) drafts.remove(nameOf(draft));
      else drafts.put(draft);
    },
    remove: (crewId, date) => drafts.remove(nameOf({ crewId, date })),
  };
}
