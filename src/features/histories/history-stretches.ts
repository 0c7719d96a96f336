import type { HistoryStretch } from "../../../shared/schemas/history";

/** A stretch on the page; the key keeps its place while it is moved about. */
export type Drawn = HistoryStretch & { readonly key: string };
export type StretchKind = HistoryStretch["kind"];
export type Edge = "from" | "to";

/** Times of the file are binary fractions of a second. */
const HAIR_S = 1e-6;

export const toDrawn = (stretches: readonly HistoryStretch[]): Drawn[] =>
  stretches.map((stretch, index) => ({ ...stretch, key: `saved-${index}` }));

/** As they are sent: in the order of their time, tasks first. */
export const toStretches = (drawn: readonly Drawn[]): HistoryStretch[] =>
  drawn
    .map(({ key, ...stretch }) => stretch as HistoryStretch)
    .toSorted((a, b) => b.kind.localeCompare(a.kind) || a.fromS - b.fromS || a.toS - b.toS);

export const areSame = (
  some: readonly HistoryStretch[],
  others: readonly HistoryStretch[],
): boolean => {
  const text = (stretches: readonly HistoryStretch[]) =>
    JSON.stringify(
      stretches
        .map((one) => [one.kind, one.fromS, one.toS, one.kind === "task" ? one.taskId : one.reason])
        .toSorted(),
    );
  return text(some) === text(others);
};

const ofKind = (drawn: readonly Drawn[], kind: StretchKind, exceptKey: string | null) =>
  drawn
    .filter((one) => one.kind === kind && one.key !== exceptKey)
    .toSorted((a, b) => a.fromS - b.fromS);

interface Room {
  readonly lowS: number;
  readonly highS: number;
  readonly before: Drawn | null;
  readonly after: Drawn | null;
}

/** How far it can go before it meets its own kind or an end of the history. */
function roomAround(
  peers: readonly Drawn[],
  { fromS, toS }: Pick<HistoryStretch, "fromS" | "toS">,
  lengthS: number,
): Room {
  const before = peers.findLast((peer) => peer.toS <= fromS + HAIR_S) ?? null;
  const after = peers.find((peer) => peer.fromS >= toS - HAIR_S) ?? null;
  return { lowS: before?.toS ?? 0, highS: after?.fromS ?? lengthS, before, after };
}

export interface Placed {
  readonly drawn: readonly Drawn[];
  /** What stopped it short; null where nothing did, or only an end of the history. */
  readonly stoppedBy: Drawn | null;
  /** On which side of it that lies. */
  readonly side?: "before" | "after";
}

/** The neighbour that a place was stopped by, with its side. */
const stopped = (stoppedBy: Drawn | null, side: "before" | "after") =>
  stoppedBy ? { stoppedBy, side } : { stoppedBy };

const put = (drawn: readonly Drawn[], key: string, fromS: number, toS: number): Drawn[] =>
  drawn.map((one) => (one.key === key ? { ...one, fromS, toS } : one));

/** Moves a stretch as far as it has room. Stretches of one kind never overlap; a left-out one may lie over tasks. */
export function moveStretch(
  drawn: readonly Drawn[],
  key: string,
  byS: number,
  lengthS: number,
): Placed {
  const one = drawn.find((stretch) => stretch.key === key);
  if (!one) return { drawn, stoppedBy: null };
  const { lowS, highS, before, after } = roomAround(ofKind(drawn, one.kind, key), one, lengthS);
  const moved = Math.min(Math.max(byS, lowS - one.fromS), highS - one.toS);
  const side = moved > byS ? "before" : "after";
  const met = stopped(moved === byS ? null : side === "before" ? before : after, side);
  return { drawn: put(drawn, key, one.fromS + moved, one.toS + moved), ...met };
}

/** Brings one end of a stretch to a time, never past its other end, its own kind or the history. */
export function resizeStretch(
  drawn: readonly Drawn[],
  key: string,
  edge: Edge,
  atS: number,
  { lengthS, shortestS }: { lengthS: number; shortestS: number },
): Placed {
  const one = drawn.find((stretch) => stretch.key === key);
  if (!one) return { drawn, stoppedBy: null };
  const { lowS, highS, before, after } = roomAround(ofKind(drawn, one.kind, key), one, lengthS);
  if (edge === "from") {
    const fromS = Math.max(lowS, Math.min(atS, one.toS - shortestS));
    return {
      drawn: put(drawn, key, fromS, one.toS),
      ...stopped(atS < lowS ? before : null, "before"),
    };
  }
  const toS = Math.min(highS, Math.max(atS, one.fromS + shortestS));
  return {
    drawn: put(drawn, key, one.fromS, toS),
    ...stopped(atS > highS ? after : null, "after"),
  };
}

/** The stretch that a drag from one time to another draws, cut where it meets its own kind; null where it starts in one. */
export function stretchBetween(
  drawn: readonly Drawn[],
  kind: StretchKind,
  anchorS: number,
  atS: number,
  lengthS: number,
): { fromS: number; toS: number; stoppedBy: Drawn | null } | null {
  const peers = ofKind(drawn, kind, null);
  if (peers.some(({ fromS, toS }) => anchorS > fromS + HAIR_S && anchorS < toS - HAIR_S))
    return null;
  const isForward = atS >= anchorS;
  const peer = isForward
    ? peers.find(({ fromS }) => fromS >= anchorS - HAIR_S)
    : peers.findLast(({ toS }) => toS <= anchorS + HAIR_S);
  const endS = isForward ? Math.min(atS, peer?.fromS ?? lengthS) : Math.max(atS, peer?.toS ?? 0);
  return {
    fromS: Math.min(anchorS, endS),
    toS: Math.max(anchorS, endS),
    stoppedBy: endS === atS ? null : (peer ?? null),
  };
}

/** The stretch of its kind that a typed one would lie over; null where it has its place. */
export function overlapOf(
  drawn: readonly Drawn[],
  { kind, fromS, toS }: Pick<HistoryStretch, "kind" | "fromS" | "toS">,
  exceptKey: string | null,
): Drawn | null {
  return (
    ofKind(drawn, kind, exceptKey).find(
      (peer) => fromS < peer.toS - HAIR_S && toS > peer.fromS + HAIR_S,
    ) ?? null
  );
}

/** Where the next stretch of a kind would go: after the last one as long as wanted, else in the first gap. */
export function freePlace(
  drawn: readonly Drawn[],
  kind: StretchKind,
  wantedS: number,
  lengthS: number,
): { fromS: number; toS: number } | null {
  const peers = ofKind(drawn, kind, null);
  const starts = [peers.at(-1)?.toS ?? 0, 0, ...peers.map(({ toS }) => toS)];
  for (const fromS of starts) {
    const isTaken = peers.some((peer) => fromS > peer.fromS - HAIR_S && fromS < peer.toS - HAIR_S);
    const endS = peers.find((peer) => peer.fromS >= fromS - HAIR_S)?.fromS ?? lengthS;
    if (!isTaken && endS - fromS > HAIR_S) return { fromS, toS: Math.min(endS, fromS + wantedS) };
  }
  return null;
}

/** To which round time of the clock a drag snaps: the finer, the closer one looks. */
export function snapStepS(spanS: number, intervalS: number): number {
  const stepS = spanS > 3600 ? 60 : spanS > 600 ? 10 : 1;
  return Math.max(stepS, intervalS);
}

/** The nearest round time of the clock, or an end of the history where that is nearer. */
export function snap(atS: number, stepS: number, startMs: number, lengthS: number): number {
  const startS = startMs / 1000;
  const roundS = Math.round((startS + atS) / stepS) * stepS - startS;
  const nearest = [roundS, 0, lengthS].toSorted((a, b) => Math.abs(a - atS) - Math.abs(b - atS));
  return Math.min(Math.max(nearest[0] ?? roundS, 0), lengthS);
}

/** The task of the shift that comes next under a chart: the first that has no bracket yet. */
export function nextTask<Task extends { readonly id: string }>(
  tasks: readonly Task[],
  drawn: readonly Drawn[],
): Task | null {
  const done = new Set(drawn.flatMap((one) => (one.kind === "task" ? [one.taskId] : [])));
  return tasks.find(({ id }) => !done.has(id)) ?? tasks[0] ?? null;
}
