import { evaluateDay } from "../acoustics/day";
import type { DayInput, RuleSetVersion } from "../acoustics/types";
import { mainLimit } from "../rule-sets";

/** Minutes in which a stay is told. */
export const STAY_STEP_MIN = 5;

export interface LongestStay {
  /** Minutes, a whole number of steps. */
  allowedMin: number;
  /** It reaches the most that was asked for. */
  isMost: boolean;
  /** A protector is counted in the task, and in the limit. */
  isWorn: boolean;
}

/**
 * How long one task of a day may last, minutes, while the rest of the day stays as it is: the longest whole number of
 * steps for which the day's limit is surely kept, by the record's own engine with its uncertainty.
 *
 * Null where it can't be said for certain: the rest alone does not keep the limit, the day is not assessed, a bang or a
 * maximum is over its own limit, or the limit counts a protector whose attenuation on this worker nobody measured.
 *
 * @param dayWith the day in which the task lasts so many minutes
 * @param mostMin what a stay is searched up to, minutes
 */
export function longestStay(
  dayWith: (minutes: number) => DayInput,
  taskId: string,
  governing: RuleSetVersion,
  mostMin: number,
): LongestStay | null {
  const limit = mainLimit(governing);
  const judge = (minutes: number) => {
    const day = dayWith(minutes);
    const evaluation = evaluateDay(day, governing, []);
    const isLoud = evaluation.criteria.some(({ criterionId, verdict }) => {
      const kind = governing.criteria.find(({ id }) => id === criterionId)?.kind;
      return verdict === "over" && (kind === "peak" || kind === "ceiling");
    });
    const worn = new Set(
      evaluation.tasks.flatMap((task) => (task.isWorn ? [task.timedTaskId] : [])),
    );
    const verdict = evaluation.criteria.find(
      ({ criterionId }) => criterionId === limit.id,
    )?.verdict;
    return { verdict, isLoud, wornTasks: tasksOf(day).filter(({ id }) => worn.has(id)) };
  };
  const most = Math.floor(mostMin / STAY_STEP_MIN);
  const steps = (count: number) => judge(count * STAY_STEP_MIN);
  const whole = steps(most);
  const counts = limit.judged === "at-the-ear";
  if (most < 1 || whole.isLoud || steps(0).verdict !== "under") return null;
  if (counts && whole.wornTasks.some(({ protection }) => protection?.ownFitDb == null)) return null;
  const isWorn = counts && whole.wornTasks.some((task) => task.taskId === taskId);
  if (whole.verdict === "under") return { allowedMin: most * STAY_STEP_MIN, isMost: true, isWorn };
  let [kept, passed] = [0, most];
  while (passed - kept > 1) {
    const middle = Math.floor((kept + passed) / 2);
    if (steps(middle).verdict === "under") kept = middle;
    else passed = middle;
  }
  // What stands in the way has to be noise, and not something that nobody knows.
  if (steps(passed).verdict === "not-assessed") return null;
  return { allowedMin: kept * STAY_STEP_MIN, isMost: false, isWorn };
}

const tasksOf = ({ shifts }: DayInput) => shifts.flatMap(({ tasks }) => tasks);
