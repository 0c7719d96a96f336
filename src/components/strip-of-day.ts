import { bandBelow, type TargetBand } from "../../shared/acoustics/protection/adequacy";
import type { DayFigures } from "../../shared/schemas/finding";
import type { StripLimit } from "./drop-strip-geometry";
import type { StripWords } from "./strip-label";

/** What the strips of one rule set hang from. */
export interface StripFrame {
  readonly key: string;
  readonly limits: readonly StripLimit[];
  readonly targetBand: TargetBand | null;
  /** How a worker's own target is called; null where none is drawn. */
  readonly targetLabel: ((levelDb: number) => string) | null;
  /** Whether the rule judges a daily limit at the ear at all. */
  readonly hasLimitAtEar: boolean;
}

/** The limits and the target of one worker's strip: a stricter target of the worker's own moves the band, or is a mark of its own. */
export function groundOf(
  { ownTargetDb }: Pick<DayFigures, "ownTargetDb">,
  { limits, targetBand, targetLabel }: Pick<StripFrame, "limits" | "targetBand" | "targetLabel">,
): Pick<StripWords, "limits" | "targetBand"> {
  if (ownTargetDb === null) return { limits, targetBand };
  if (targetBand) return { limits, targetBand: bandBelow(ownTargetDb) };
  if (targetLabel === null) return { limits, targetBand };
  return {
    limits: [...limits, { levelDb: ownTargetDb, label: targetLabel(ownTargetDb), isTarget: true }],
    targetBand,
  };
}

/** A stored day as the strip draws it. */
export function stripOfDay(figures: DayFigures, frame: StripFrame): StripWords {
  return {
    outsideDb: figures.outsideDb,
    outsideUDb: figures.uncertaintyDb,
    outsideBound: figures.outsideBound,
    atEarDb: figures.atEarDb,
    atEarBound: figures.atEarBound,
    atEarUDb: figures.atEarBound === "exact" ? figures.uncertaintyDb : null,
    atEarOffDb: figures.atEarOffDb,
    // The tick then has it on, and the ring stands where it is off.
    atEarActiveDb: figures.atEarOffDb === null ? figures.atEarActiveDb : null,
    atEarAsWorkedDb: figures.atEarAsWorkedDb,
    whileWornDb: figures.whileWornDb,
    whileWornBound: figures.whileWornBound,
    ...groundOf(figures, frame),
    isExpected: false,
    hasProtector: figures.hasProtector,
    word: figures.word,
    verdict: frame.hasLimitAtEar ? figures.verdictAtEar : null,
    decidingTask: figures.decidingTaskName ?? undefined,
  };
}
