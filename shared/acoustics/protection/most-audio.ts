import { sumDay } from "../day-sum";
import { lawOf, levelFactor } from "../exchange-law";
import { outsideCriterion } from "../outside-criterion";
import type { Criterion, DayInput, RuleSetVersion } from "../types";
import { isPast } from "../verdict";
import { withTasks } from "../with-tasks";
import { countsAsWorn, evaluateAtEar } from "./at-ear";

/** No programme is louder than this, dB(A). */
const LOUDEST_DB = 140;
const ENOUGH_DB = 1e-9;

/**
 * How loud a programme may be in all the time in which a protector is worn, dB(A), before the whole day at the ear
 * passes a limit (dB, 8-hour level or TWA under the rule's law). Programmes on record are left aside. Null where the day
 * is past it without any, where its level is open, or where no protector is worn.
 *
 * Found by halving: under an exchange rate the sum over several tasks has no closed form.
 *
 * @source programme-audio sum of two sounds under an exchange rate
 */
export function mostAudioDb(
  day: DayInput,
  ruleSet: RuleSetVersion,
  limitDb: number,
  comparator: Criterion["comparator"] = "exceeds",
): number | null {
  const law = lawOf(outsideCriterion(ruleSet));
  const outside = sumDay(day, law);
  const isPastWith = (audioDb: number | null): boolean => {
    const { judged } = evaluateAtEar(withProgramme(day, audioDb), ruleSet, law, outside);
    const levelDb = levelFactor(law) * Math.log10(judged.most / law.referenceMin);
    return isPast(levelDb, limitDb, comparator);
  };
  if (isPastWith(null) || !isPastWith(LOUDEST_DB)) return null;
  let mostDb = 0;
  let tooMuchDb = LOUDEST_DB;
  if (isPastWith(mostDb)) return null;
  while (tooMuchDb - mostDb > ENOUGH_DB) {
    const betweenDb = (mostDb + tooMuchDb) / 2;
    if (isPastWith(betweenDb)) tooMuchDb = betweenDb;
    else mostDb = betweenDb;
  }
  return mostDb;
}

/** The day with one programme in every task in which a protector counts as worn. */
const withProgramme = (day: DayInput, audioDb: number | null): DayInput =>
  withTasks(day, (task) =>
    task.protection && countsAsWorn(task, day)
      ? { ...task, protection: { ...task.protection, audioDb } }
      : task,
  );
