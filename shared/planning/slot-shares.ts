import { sumDay } from "../acoustics/day-sum";
import { doseScale, lawOf, weightOf } from "../acoustics/exchange-law";
import { outsideCriterion } from "../acoustics/outside-criterion";
import { evaluateAtEar } from "../acoustics/protection/at-ear";
import type { Criterion, DayInput, RuleSetVersion } from "../acoustics/types";
import { buildDayInput, type KnownTask } from "../day/build-day-input";
import { SLOT_MIN } from "./timetable";
import { goalsOf, type TriedDay, type TriedWorker, type TryContext } from "./try-changes";

/** Criteria whose shares add up over a day: a level over 8 h or a dose, not a maximum or a peak. */
export const timetableGoals = (governing: RuleSetVersion): { id: string; label: string }[] =>
  goalsOf(governing).filter(({ id }) => {
    const quantity = governing.criteria.find((criterion) => criterion.id === id)?.quantity;
    return quantity === "lex-8h" || quantity === "dose" || quantity === "table-dose";
  });

/** A worker with how long they wear their protector in each task, percent; a task that is not in it: not known. */
export interface Placed extends TriedWorker {
  readonly wornPct: Readonly<Record<string, number>>;
}

/** What a slot takes of the day's limit; 1 is the whole limit. */
export interface SlotShare {
  /** Null where nothing bounds it: the noise is not known, or what the protector leaves of it. */
  readonly share: number | null;
  /** It may be less: a level under other settings, or a wearing that nobody knows. */
  readonly isUpper: boolean;
}

/** A person's day with these minutes of tasks, the remainder in quiet where `quietDb` says how quiet. */
export function dayOf(
  worker: Placed,
  tasks: readonly { taskId: string; durationMin: number }[],
  lengthMin: number,
  context: TryContext,
  { wornPct, quietDb }: { wornPct: number | null; quietDb: number | null },
): TriedDay & { input: DayInput } {
  const known = new Map(context.tasks.map((task): [string, KnownTask] => [task.id, task]));
  const models = new Map(context.models.map((model) => [model.modelId, model]));
  return {
    cannot: null,
    input: buildDayInput(
      worker,
      context.date,
      [
        {
          id: "timetable",
          lengthMin,
          tasks: tasks.map((task) => ({
            ...task,
            wornPct: worker.wornPct[task.taskId] ?? wornPct,
            wornIsShiftWide: false,
          })),
          unaccounted: quietDb === null ? { how: "unknown" } : { how: "quiet", levelDb: quietDb },
          readings: [],
        },
      ],
      worker.assignments,
      { tasks: known, models, site: context.site },
    ),
  };
}

/**
 * The most of a criterion's limit that a slot of a day can take, the whole day being like it. By the record's own sums:
 * without protection under the criterion's law, or at the ear as worn, active parts as long as their batteries last over
 * such a day. A sum over the slots of a day is then never less than what the engine makes of that day.
 *
 * @source iso-9612-2009 9: LEX,8h adds up by energy
 * @source osha-1910.95 App. A I(1)(ii): D = 100 · Σ C/T
 */
export function slotShare(
  { input }: { input: DayInput },
  lengthMin: number,
  governing: RuleSetVersion,
  criterion: Criterion,
): SlotShare {
  const law = lawOf(criterion);
  let sum = sumDay(input, law);
  if (criterion.judged === "at-the-ear") {
    const outsideLaw = lawOf(outsideCriterion(governing));
    const atEar = evaluateAtEar(input, governing, outsideLaw, sumDay(input, outsideLaw));
    sum = { ...sum, ...atEar.judged };
  }
  const slots = lengthMin / SLOT_MIN;
  const shareOf = (weight: number) =>
    criterion.quantity === "lex-8h"
      ? weight / criterion.referenceMin / weightOf(criterion.value, law)
      : (100 * weight * doseScale(law)) / criterion.value;
  return Number.isFinite(sum.most)
    ? { share: shareOf(sum.most) / slots, isUpper: sum.least !== sum.most }
    : { share: null, isUpper: false };
}
