import { lawOf } from "../exchange-law";
import { outsideCriterion } from "../outside-criterion";
import type { DayInput, RuleSetVersion, TaskLevel, TimedTask } from "../types";
import { isInNoise } from "./at-ear";

/** A task that asks for a protector, or adds to the shift without one. */
export type Noise = TimedTask & { level: TaskLevel; isBare: boolean };

/**
 * What asks for a protector: the tasks in noise. Where the shift as a whole is judged, others add to it bare, as far as
 * they reach the rule's threshold: below it they count for nothing where nothing is worn.
 *
 * @source osha-1910.95 App. B
 */
export function noisesOf(
  tasks: readonly TimedTask[],
  governing: RuleSetVersion,
  { site, mustWear }: Pick<DayInput, "site" | "mustWear">,
): Noise[] {
  const { thresholdDb } = lawOf(outsideCriterion(governing));
  return tasks.flatMap((task): Noise[] => {
    const { level, durationMin } = task;
    if (level === null || durationMin <= 0) return [];
    if (mustWear || isInNoise(task, site.wearFromDb)) return [{ ...task, level, isBare: false }];
    const adds =
      governing.protection.adequacy === "appendix-b" && level.levelDb >= (thresholdDb ?? 0);
    return adds ? [{ ...task, level, isBare: true }] : [];
  });
}

/** For how long a protector is worn in these, minutes. */
export const wornMinOf = (noises: readonly Noise[]): number =>
  noises.reduce((sum, { durationMin, isBare }) => sum + (isBare ? 0 : durationMin), 0);
