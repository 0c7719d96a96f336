import type { DayFigures } from "../../shared/schemas/finding";
import type { StripLimit, TargetBand } from "./drop-strip-geometry";
import type { StripWords } from "./strip-label";

/** What the strips of one rule set hang from. */
export interface StripFrame {
  readonly key: string;
  readonly limits: readonly StripLimit[];
  readonly targetBand: TargetBand | null;
  /** Whether the rule judges a daily limit at the ear at all. */
  readonly hasLimitAtEar: boolean;
}

/** A stored day as the strip draws it. */
export function stripOfDay(figures: DayFigures, frame: StripFrame): StripWords {
  return {
    outsideDb: figures.outsideDb,
    outsideUDb: figures.uncertaintyDb,
    outsideBound: figures.outsideBound,
    atEarDb: figures.atEarDb,
    atEarUDb: figures.uncertaintyDb,
    atEarActiveDb: figures.atEarActiveDb,
    atEarAsWorkedDb: figures.atEarAsWorkedDb,
    whileWornDb: figures.whileWornDb,
    limits: frame.limits,
    targetBand: frame.targetBand,
    isExpected: false,
    hasProtector: figures.hasProtector,
    word: figures.word,
    verdict: frame.hasLimitAtEar ? figures.verdictAtEar : null,
    decidingTask: figures.decidingTaskName ?? undefined,
  };
}
