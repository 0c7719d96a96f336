import { sumDay } from "./day-sum";
import { lawOf, levelFactor } from "./exchange-law";
import { outsideCriterion } from "./outside-criterion";
import { evaluateAtEar } from "./protection/at-ear";
import { removalCostDb, type TimeOff } from "./protection/wearing-time";
import type { DayInput, RuleSetVersion } from "./types";
import { DayAtEarRows } from "./working-at-ear";

export interface RemovalCost {
  readonly taskId: string;
  readonly taskName: string;
  /** For how long the protector was off in this task. */
  readonly offMin: number;
  /** By how much less would have reached the ear that day had it been worn throughout this task, dB. */
  readonly costDb: number;
}

export interface RemovalCosts {
  /** By task, the dearest first. */
  readonly tasks: readonly RemovalCost[];
  /** The day at the ear had it been worn throughout all of them, active part off, dB. */
  readonly throughoutDb: number;
  /** The day itself is judged with an active part on; these figures are with it off. */
  readonly isBesideCredit: boolean;
}

/**
 * What taking the protector off cost on a day at the ear, active part off: levels of the governing rule. Null where
 * nothing was taken off, and where the day's level is not exactly known: the difference of two bounds is no cost.
 *
 * @source wearing-time closed form of the exchange-rate mean
 */
export function removalCosts(input: DayInput, governing: RuleSetVersion): RemovalCosts | null {
  const law = lawOf(outsideCriterion(governing));
  const atEar = evaluateAtEar(input, governing, law, sumDay(input, law));
  const { least, most } = atEar.off;
  if (!atEar.isWorn || atEar.isWearingUnknown || least !== most || least <= 0) return null;
  const day = new DayAtEarRows(input, law, atEar, "exact");
  const dayDb = day.levelOf(least / law.referenceMin);
  const timesOff = new Map<string, { taskName: string; offMin: number; times: TimeOff[] }>();
  for (const { task, worn, minutes, scale, bareDb, wornDb } of day.rows) {
    if (task === null || worn === 1 || bareDb === null || wornDb === null) continue;
    const offMin = minutes * (1 - worn);
    const known = timesOff.get(task.taskId) ?? { taskName: task.name, offMin: 0, times: [] };
    timesOff.set(task.taskId, {
      taskName: task.name,
      offMin: known.offMin + offMin,
      times: [...known.times, { offMin: offMin * scale, outsideDb: bareDb, wornDb }],
    });
  }
  if (timesOff.size === 0) return null;
  const costOf = (times: readonly TimeOff[]) =>
    removalCostDb(dayDb, times, law.referenceMin, levelFactor(law));
  const found = [...timesOff];
  return {
    tasks: found
      .map(([taskId, { taskName, offMin, times }]) => ({
        taskId,
        taskName,
        offMin,
        costDb: costOf(times),
      }))
      .sort((a, b) => b.costDb - a.costDb),
    throughoutDb: dayDb - costOf(found.flatMap(([, { times }]) => times)),
    isBesideCredit: atEar.creditedTaskIds.size > 0,
  };
}
