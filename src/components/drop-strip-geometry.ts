import type { TargetBand } from "../../shared/acoustics/protection/adequacy";
import type { ProtectorWord, Verdict } from "../../shared/acoustics/types";

/** The scale of every strip, dB. Never fitted to the data: a place on the page always means the same level. */
export const STRIP_FROM_DB = 60;
export const STRIP_TO_DB = 120;

/** Space at either end of the scale, px. */
const INSET = 5;
/** What the caret needs under the box, px. */
const CARET_SPACE = 5.4;
const BOX_HEIGHT = 20;
export const BAR_THICKNESS = 6.5;
const BAR_OUTER_Y = 5.4;
const BAR_INNER_Y = 12.6;
/** Half the limit's line and the paper beside it, px. */
const LIMIT_CLEARANCE = 2;
const CAP_CLEARANCE = 4;

export interface StripLimit {
  readonly levelDb: number;
  readonly label: string;
  /** A worker's own target where the rule has no band: drawn as an edge and not as a limit. */
  readonly isTarget?: boolean;
}

/** The numbers of a day (or of a task alone: no limits, no verdict). `null` is "not known". */
export interface StripFacts {
  readonly outsideDb: number | null;
  readonly outsideUDb: number | null;
  readonly outsideBound: "exact" | "upper" | "lower";
  readonly atEarDb: number | null;
  readonly atEarBound: "exact" | "upper" | "lower";
  readonly atEarUDb: number | null;
  /** With the active part off, where the one above has it on; absent: it has it off. */
  readonly atEarOffDb?: number | null;
  readonly atEarActiveDb: number | null;
  readonly atEarAsWorkedDb: number | null;
  /** At the ear while worn, in the task that decides the day's word. */
  readonly whileWornDb: number | null;
  /** Absent: exact. */
  readonly whileWornBound?: "exact" | "upper" | "lower";
  /** The first is the one that the verdict is about. */
  readonly limits: readonly StripLimit[];
  readonly targetBand: TargetBand | null;
  readonly isExpected: boolean;
  readonly hasProtector: "yes" | "no" | "unknown";
  readonly word: ProtectorWord | null;
  readonly verdict: Verdict | null;
}

export interface StripSize {
  readonly widthPx: number;
  /** Height of a unit of the 20-unit box, px. */
  readonly k: number;
}

export interface Tick {
  readonly x: number;
  readonly y: number;
  readonly width: number;
  readonly height: number;
}

export interface Whisker {
  readonly fromX: number;
  readonly toX: number;
  readonly y: number;
}

export interface StripGeometry {
  readonly width: number;
  readonly boxHeight: number;
  readonly height: number;
  readonly band: { lowX: number; highX: number; goodLowX: number; goodHighX: number } | null;
  readonly limits: readonly { x: number; label: string; isTarget: boolean }[];
  readonly bar: {
    outerX: number;
    outerY: number;
    innerX: number;
    innerY: number;
    thickness: number;
  } | null;
  readonly outer: Tick | null;
  readonly inner: Tick | null;
  /** One tick in place of two: nothing is taken away, or it is not known what is. */
  readonly full: Tick | null;
  readonly chevrons: readonly { x: number; y: number; pointsTo: "left" | "right" }[];
  readonly whiskers: readonly Whisker[];
  /** A level that is not known, or known only as a bound. */
  readonly dotted: { fromX: number; toX: number; y: number; isUnknown: boolean } | null;
  readonly ring: { x: number; y: number; r: number } | null;
  readonly dot: { x: number; y: number; r: number } | null;
  /** Broken line from the ring or dot to the tick that counts. */
  readonly link: { fromX: number; toX: number; y: number } | null;
  readonly caret: { x: number; y: number } | null;
  readonly foot: { fromX: number; toX: number; kind: "too-little" | "too-much" } | null;
}

/** Place of a level on a strip of this width, px; outside 60 to 120 dB it lies outside the strip. */
export function levelX(levelDb: number, widthPx: number): number {
  const pxPerDb = (widthPx - 2 * INSET) / (STRIP_TO_DB - STRIP_FROM_DB);
  return INSET + (levelDb - STRIP_FROM_DB) * pxPerDb;
}

/** A 2 px line is sharp on a whole pixel, a 1 px line half way between two. */
const snapLimit = (x: number) => Math.round(x);
const snapEdge = (x: number) => Math.round(x - 0.5) + 0.5;

const isOffScale = (levelDb: number) => levelDb < STRIP_FROM_DB || levelDb > STRIP_TO_DB;

/** Moves a mark out of the way of the limit, to the side on which the unrounded numbers have it. */
function keepOff(x: number, limitX: number, clearance: number, isPast: boolean): number {
  return isPast ? Math.max(x, limitX + clearance) : Math.min(x, limitX - clearance);
}

/** Everything that a strip draws, in px from the top left corner of its box. Pure. */
export function stripGeometry(facts: StripFacts, { widthPx, k }: StripSize): StripGeometry {
  const xOf = (levelDb: number) => levelX(levelDb, widthPx);
  const leftX = xOf(STRIP_FROM_DB);
  const rightX = xOf(STRIP_TO_DB);
  const grow = Math.min(k, 1.6);
  // An outlined tick needs room for its paper between two lines.
  const outline = facts.isExpected ? 3 : 0;
  const outerWidth = 2 * grow + outline;
  const innerWidth = 2.5 * grow + outline;

  const limits = facts.limits.map((limit) => ({
    x: snapLimit(xOf(limit.levelDb)),
    label: limit.label,
    isTarget: limit.isTarget ?? false,
    levelDb: limit.levelDb,
  }));
  const band = facts.targetBand && {
    lowX: snapEdge(xOf(facts.targetBand.lowDb)),
    highX: snapEdge(xOf(facts.targetBand.highDb)),
    goodLowX: snapLimit(xOf(facts.targetBand.goodLowDb)),
    goodHighX: snapLimit(xOf(facts.targetBand.goodHighDb)),
  };

  /** Only the level at the ear is under the strip's verdict, and only against the first limit. */
  const verdictAt = (index: number, isAtEar: boolean) =>
    isAtEar && index === 0 && facts.verdict !== "not-assessed" ? facts.verdict : null;

  function tickX(levelDb: number, width: number, isAtEar: boolean): number {
    return limits.reduce((x, limit, index) => {
      const verdict = verdictAt(index, isAtEar);
      const isPast = verdict ? verdict === "over" : levelDb > limit.levelDb;
      return keepOff(x, limit.x, LIMIT_CLEARANCE + width / 2, isPast);
    }, xOf(levelDb));
  }

  function whisker(
    levelDb: number,
    uncertaintyDb: number | null,
    tick: Tick,
    y: number,
    isAtEar: boolean,
  ): Whisker[] {
    if (uncertaintyDb === null || limits.length === 0) return [];
    const topDb = levelDb + uncertaintyDb;
    const toX = limits.reduce((x, limit, index) => {
      const verdict = verdictAt(index, isAtEar);
      if (verdict ? verdict === "over" : levelDb > limit.levelDb) return x;
      const isAcross = verdict ? verdict === "cant-tell-yet" : topDb > limit.levelDb;
      return keepOff(x, limit.x, CAP_CLEARANCE, isAcross);
    }, xOf(topDb));
    return [{ fromX: tick.x, toX: Math.max(tick.x, Math.min(toX, widthPx - 1)), y: y * k }];
  }

  const { outsideDb, atEarDb } = facts;
  const chevrons: { x: number; y: number; pointsTo: "left" | "right" }[] = [];
  const whiskers: Whisker[] = [];
  let outer: Tick | null = null;
  let inner: Tick | null = null;
  let full: Tick | null = null;
  let bar: StripGeometry["bar"] = null;
  let dotted: StripGeometry["dotted"] = null;

  const putChevrons = (levelDb: number, y: number) =>
    chevrons.push(
      levelDb > STRIP_TO_DB
        ? { x: rightX, y: y * k, pointsTo: "right" }
        : { x: leftX, y: y * k, pointsTo: "left" },
    );

  const singleDb = facts.hasProtector === "yes" ? null : (atEarDb ?? outsideDb);
  const isBoundOnly = facts.outsideBound !== "exact";

  if (outsideDb === null && atEarDb === null) {
    dotted = { fromX: leftX, toX: rightX, y: (BOX_HEIGHT / 2) * k, isUnknown: true };
  } else if (singleDb !== null && !isBoundOnly) {
    if (isOffScale(singleDb)) putChevrons(singleDb, BOX_HEIGHT / 2);
    else {
      full = { x: tickX(singleDb, innerWidth, true), y: k, width: innerWidth, height: 18 * k };
      whiskers.push(...whisker(singleDb, facts.atEarUDb ?? facts.outsideUDb, full, 17.4, true));
    }
  } else {
    if (outsideDb !== null) {
      if (isOffScale(outsideDb)) putChevrons(outsideDb, BAR_OUTER_Y);
      else {
        outer = { x: tickX(outsideDb, outerWidth, false), y: k, width: outerWidth, height: 10 * k };
        if (!isBoundOnly) whiskers.push(...whisker(outsideDb, facts.outsideUDb, outer, 2, false));
      }
    }
    if (atEarDb !== null) {
      if (isOffScale(atEarDb)) putChevrons(atEarDb, BAR_INNER_Y);
      else {
        inner = {
          x: tickX(atEarDb, innerWidth, true),
          y: 7 * k,
          width: innerWidth,
          height: 12 * k,
        };
        if (facts.atEarBound === "exact")
          whiskers.push(...whisker(atEarDb, facts.atEarUDb, inner, 17.4, true));
      }
    }
    if (outsideDb !== null && atEarDb !== null) {
      const endX = (tick: Tick | null, levelDb: number) =>
        tick?.x ?? (levelDb > STRIP_TO_DB ? rightX : leftX);
      bar = {
        outerX: endX(outer, outsideDb),
        outerY: BAR_OUTER_Y * k,
        innerX: endX(inner, atEarDb),
        innerY: BAR_INNER_Y * k,
        thickness: BAR_THICKNESS * k,
      };
    }
    if (isBoundOnly && outer) {
      const towardsX = facts.outsideBound === "lower" ? rightX : leftX;
      const y = outer.y + outer.height / 2;
      if (facts.outsideBound === "lower" || !bar) {
        const gap = facts.outsideBound === "lower" ? 5 : -5;
        dotted = { fromX: outer.x + gap, toX: towardsX, y, isUnknown: false };
      }
    }
  }

  const radius = 3 * Math.sqrt(k);
  const mark = (levelDb: number | null) =>
    levelDb === null || isOffScale(levelDb) || facts.hasProtector !== "yes"
      ? null
      : { x: xOf(levelDb), y: BAR_INNER_Y * k, r: radius };
  const ring = mark(facts.atEarOffDb ?? facts.atEarActiveDb);
  const asWorked = mark(facts.atEarAsWorkedDb);
  const dot = asWorked && { ...asWorked, r: 3 };
  const farthestX = Math.min(ring?.x ?? Infinity, dot?.x ?? Infinity);
  const link =
    inner && farthestX < inner.x
      ? { fromX: farthestX, toX: inner.x - inner.width / 2, y: BAR_INNER_Y * k }
      : null;

  const wornDb = facts.whileWornDb;
  const caret =
    wornDb === null || isOffScale(wornDb) ? null : { x: xOf(wornDb), y: BOX_HEIGHT * k + 1 };

  function findFoot(): StripGeometry["foot"] {
    if (wornDb === null || !facts.targetBand || !band) return null;
    const toX = Math.max(leftX, Math.min(rightX, xOf(wornDb)));
    if (wornDb > facts.targetBand.highDb && (facts.word ?? "too-little") === "too-little")
      return { fromX: band.highX, toX, kind: "too-little" };
    if (wornDb < facts.targetBand.lowDb && (facts.word ?? "too-much") === "too-much")
      return { fromX: band.lowX, toX, kind: "too-much" };
    return null;
  }

  return {
    width: widthPx,
    boxHeight: BOX_HEIGHT * k,
    height: BOX_HEIGHT * k + CARET_SPACE,
    band,
    limits: limits.map(({ x, label, isTarget }) => ({ x, label, isTarget })),
    bar,
    outer,
    inner,
    full,
    chevrons,
    whiskers,
    dotted,
    ring,
    dot,
    link,
    caret,
    foot: findFoot(),
  };
}
