import { sumDay } from "../../../shared/acoustics/day-sum";
import { doseScale, lawOf, levelOfWeight } from "../../../shared/acoustics/exchange-law";
import { outsideCriterion, twaDb } from "../../../shared/acoustics/index";
import type {
  Criterion,
  DayEvaluation,
  DayInput,
  RuleSetVersion,
} from "../../../shared/acoustics/types";
import type { LevelBound } from "../../../shared/format/level";

/** What the tasks alone say of a figure that a reading gives. */
export interface BesideReading {
  /** The reading's own level, dB; null where it is none (a dose of nothing). */
  readonly readingDb: number | null;
  /** Level by the tasks, dB: the true one, or the bound of it that stands nearest to the reading; null for none. */
  readonly tasksDb: number | null;
  readonly tasksBound: LevelBound;
  /** Reading less tasks, dB: at least that much where the tasks are bounded; null where the two agree as far as known. */
  readonly gapDb: number | null;
}

const LEVELS: ReadonlySet<Criterion["quantity"]> = new Set(["lex-8h", "dose", "table-dose"]);

/** The figure without protection that a reading governs, the main one before the others; null where none does. */
export function besideReading(
  input: DayInput,
  evaluation: DayEvaluation,
  governing: RuleSetVersion,
): BesideReading | null {
  const main = outsideCriterion(governing);
  const others = governing.criteria.filter(
    ({ judged, quantity }) => judged === "without-protection" && LEVELS.has(quantity),
  );
  for (const criterion of [main, ...others]) {
    const result = evaluation.criteria.find(
      ({ ruleSetKey, criterionId }) => ruleSetKey === governing.key && criterionId === criterion.id,
    );
    if (result && result.basis !== "tasks") {
      return compare(result.levelDb, tasksLevels(input, criterion));
    }
  }
  return null;
}

interface Levels {
  readonly leastDb: number;
  readonly mostDb: number;
}

/** The least and the most level that the tasks leave possible, dB; −∞ for no noise that counts, +∞ for no bound. */
function tasksLevels(input: DayInput, criterion: Criterion): Levels {
  const law = lawOf(criterion);
  const { tasks } = sumDay(input, law);
  const levelDb = (weight: number): number => {
    if (weight <= 0) return Number.NEGATIVE_INFINITY;
    if (weight === Number.POSITIVE_INFINITY) return weight;
    const { criterionLevelDb, exchangeRateDb, twaFactor } = criterion;
    if (law.isEnergy || criterionLevelDb === null || exchangeRateDb === null) {
      return levelOfWeight(weight / criterion.referenceMin, law);
    }
    const twa = twaDb(100 * weight * doseScale(law), {
      criterionLevelDb,
      exchangeRateDb,
      twaFactor,
    });
    return twa ?? Number.NEGATIVE_INFINITY;
  };
  return { leastDb: levelDb(tasks.least), mostDb: levelDb(tasks.most) };
}

function compare(readingDb: number | null, { leastDb, mostDb }: Levels): BesideReading {
  const gapTo = (db: number) => (readingDb === null ? null : readingDb - db);
  const isNone = mostDb === Number.NEGATIVE_INFINITY;
  if (isNone || (leastDb === Number.NEGATIVE_INFINITY && mostDb === Number.POSITIVE_INFINITY)) {
    return { readingDb, tasksDb: null, tasksBound: "exact", gapDb: null };
  }
  if (leastDb === mostDb) {
    return { readingDb, tasksDb: mostDb, tasksBound: "exact", gapDb: gapTo(mostDb) };
  }
  const isBelow = readingDb !== null && readingDb < leastDb;
  if (isBelow || mostDb === Number.POSITIVE_INFINITY) {
    return {
      readingDb,
      tasksDb: leastDb,
      tasksBound: "lower",
      gapDb: isBelow ? gapTo(leastDb) : null,
    };
  }
  const isAbove = readingDb !== null && readingDb > mostDb;
  return { readingDb, tasksDb: mostDb, tasksBound: "upper", gapDb: isAbove ? gapTo(mostDb) : null };
}
