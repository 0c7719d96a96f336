import { evaluateDay } from "../acoustics/day";
import { A_WEIGHTING_DB, weightedSumDb } from "../acoustics/protection/octave-band";
import type {
  BandAttenuation,
  DayEvaluation,
  DayInput,
  OctaveBandValues,
  ProtectorData,
  RuleSetVersion,
  TaskLevel,
  Verdict,
} from "../acoustics/types";
import { buildDayInput, type KnownAssignment, type KnownTask } from "../day/build-day-input";
import { summarizeDay } from "../day/summarize-day";
import { levelOf, mainLimit } from "../rule-sets";
import type { PlanChange } from "../schemas/plan";
import type { Tried } from "../schemas/tried";

/** A worker's nominal day, with what is assigned and measured on them. */
export interface TriedWorker {
  id: string;
  name: string;
  employeeNumber: string;
  mustWear: boolean;
  personalTargetDb: number | null;
  lengthMin: number;
  tasks: readonly { taskId: string; durationMin: number; wornPct: number | null }[];
  assignments: readonly KnownAssignment[];
  /** Own attenuation by model, dB. */
  fits: readonly { modelId: string; parDb: number }[];
}

/** Everything that a change can touch at a site on a date. */
export interface TryContext {
  date: string;
  site: DayInput["site"];
  tasks: readonly KnownTask[];
  models: readonly ProtectorData[];
  /** Test data of two worn together. */
  pairs: readonly { innerModelId: string; outerModelId: string; bands: BandAttenuation }[];
}

/** Why a change can't be made to a worker's day. */
export type CannotChange = "not-enough-time" | "not-in-the-day";

export interface TriedDay {
  /** Null where a change can't be made to this day. */
  input: DayInput | null;
  cannot: { changeIndex: number; why: CannotChange } | null;
}

/**
 * A task's noise with less at its source. A flat reduction takes the same off the level, its bands and its samples; one by
 * bands changes the level by what the A-weighted sum of the bands changes, and needs the bands. Peaks and slow maxima stay
 * as they were measured: what a source's control does to blows is not known before it is measured.
 *
 * @returns null where it is given by bands and the task has none
 */
export function quieter(
  level: TaskLevel,
  reduction: { byDb: number } | { bandsDb: OctaveBandValues },
): TaskLevel | null {
  const bands = level.octaveBandsDb;
  if ("byDb" in reduction) {
    const { byDb } = reduction;
    return {
      ...level,
      levelDb: level.levelDb - byDb,
      octaveBandsDb: bands && (mapBands(bands, (band) => band - byDb) as OctaveBandValues),
      samplesDb: level.samplesDb.map((sample) => sample - byDb),
    };
  }
  if (bands === null) return null;
  const after = mapBands(bands, (band, index) => band - (reduction.bandsDb[index] ?? 0));
  const gainDb = weightedSumDb(bands, A_WEIGHTING_DB) - weightedSumDb(after, A_WEIGHTING_DB);
  return {
    ...level,
    levelDb: level.levelDb - gainDb,
    octaveBandsDb: after,
    // The A-weighted level falls by another amount than the C-weighted one, which nobody has measured.
    lcMinusLaDb: null,
    samplesDb: level.samplesDb.map((sample) => sample - gainDb),
  };
}

const mapBands = (bands: OctaveBandValues, change: (band: number, index: number) => number) =>
  bands.map((band, index) =>
    band === null ? null : change(band, index),
  ) as unknown as OctaveBandValues;

interface Draft {
  worker: TriedWorker;
  tasks: { taskId: string; durationMin: number; wornPct: number | null }[];
  assignments: KnownAssignment[];
  cannot: TriedDay["cannot"];
}

/** The workers' nominal days with these changes made, in their order, one after the other. */
export function tryChanges(
  workers: readonly TriedWorker[],
  changes: readonly PlanChange[],
  context: TryContext,
): TriedDay[] {
  const tasks = new Map(context.tasks.map((task) => [task.id, task]));
  const drafts = new Map(
    workers.map((worker): [string, Draft] => [
      worker.id,
      {
        worker,
        tasks: worker.tasks.map((task) => ({ ...task })),
        assignments: [...worker.assignments],
        cannot: null,
      },
    ]),
  );
  changes.forEach((change, index) => {
    if (change.kind === "noise") changeNoise(tasks, change);
    else for (const draft of drafts.values()) changeDay(draft, change, index, context);
  });
  const models = new Map(context.models.map((model) => [model.modelId, model]));
  return [...drafts.values()].map(({ worker, tasks: entered, assignments, cannot }) => ({
    cannot,
    input: cannot
      ? null
      : buildDayInput(
          worker,
          context.date,
          [
            {
              id: "tried",
              lengthMin: worker.lengthMin,
              tasks: entered
                .filter(({ durationMin }) => durationMin > 0)
                .map((task) => ({ ...task, wornIsShiftWide: false })),
              unaccounted: { how: "like-the-rest" },
              readings: [],
            },
          ],
          assignments,
          { tasks, models, site: context.site },
        ),
  }));
}

function changeNoise(
  tasks: Map<string, KnownTask>,
  change: Extract<PlanChange, { kind: "noise" }>,
): void {
  const task = tasks.get(change.taskId);
  if (!task?.level) return;
  const level = quieter(
    task.level,
    change.bandsDb === null ? { byDb: change.byDb ?? 0 } : { bandsDb: change.bandsDb },
  );
  // Without bands of the noise nobody can say what taking some of them off does.
  tasks.set(task.id, { ...task, level });
}

function changeDay(
  draft: Draft,
  change: Exclude<PlanChange, { kind: "noise" }>,
  index: number,
  context: TryContext,
): void {
  if (draft.cannot) return;
  const cannot = (why: CannotChange) => {
    draft.cannot = { changeIndex: index, why };
  };
  switch (change.kind) {
    case "duration": {
      const own = draft.tasks.find(({ taskId }) => taskId === change.taskId);
      if (!own) return;
      if (!move(draft, change.taskId, change.otherTaskId, own.durationMin - change.durationMin))
        cannot("not-enough-time");
      return;
    }
    case "rotation": {
      const isGiver = draft.worker.id === change.workerId;
      if (!isGiver && draft.worker.id !== change.otherWorkerId) return;
      const [from, to] = isGiver
        ? [change.taskId, change.otherTaskId]
        : [change.otherTaskId, change.taskId];
      if (!draft.tasks.some(({ taskId }) => taskId === from)) cannot("not-in-the-day");
      else if (!move(draft, from, to, change.minutes)) cannot("not-enough-time");
      return;
    }
    case "protector": {
      if (change.workerIds !== null && !change.workerIds.includes(draft.worker.id)) return;
      const isSame = (one: KnownAssignment) =>
        one.innerModelId === change.innerModelId && one.outerModelId === change.outerModelId;
      const known = draft.assignments.find(isSame);
      const replaced = draft.assignments.filter(
        ({ taskId }) => change.taskId !== null && taskId !== change.taskId,
      );
      draft.assignments = [
        ...replaced,
        {
          id: `tried ${index}`,
          taskId: change.taskId,
          areaId: null,
          innerModelId: change.innerModelId,
          outerModelId: change.outerModelId,
          ownFitDb:
            change.outerModelId === null
              ? (draft.worker.fits.find(({ modelId }) => modelId === change.innerModelId)?.parDb ??
                null)
              : null,
          activeCheckPassed: known?.activeCheckPassed ?? false,
          combinationBands:
            context.pairs.find(
              ({ innerModelId, outerModelId }) =>
                innerModelId === change.innerModelId && outerModelId === change.outerModelId,
            )?.bands ?? null,
          audioDb: known?.audioDb ?? null,
        },
      ];
      return;
    }
    case "wearing":
      draft.tasks = draft.tasks.map((task) =>
        change.taskId === null || task.taskId === change.taskId
          ? { ...task, wornPct: change.wornPct }
          : task,
      );
  }
}

/** Moves minutes from one task to another; false where the day has not so many. */
function move(draft: Draft, fromId: string, toId: string, minutes: number): boolean {
  const from = draft.tasks.find(({ taskId }) => taskId === fromId);
  let to = draft.tasks.find(({ taskId }) => taskId === toId);
  if (!from) return false;
  if (!to) {
    to = { taskId: toId, durationMin: 0, wornPct: from.wornPct };
    draft.tasks.push(to);
  }
  if (from.durationMin - minutes < 0 || to.durationMin + minutes < 0) return false;
  from.durationMin -= minutes;
  to.durationMin += minutes;
  return true;
}

/**
 * What the record's own engine makes of tried days: each worker's figures and verdict on one criterion, the goal. In the
 * order of the days.
 */
export function judgeTried(
  days: readonly TriedDay[],
  governing: RuleSetVersion,
  goal: string,
): Tried[] {
  return days.map(({ input, cannot }) => {
    if (!input)
      return { verdict: "not-assessed", outsideDb: null, atEarDb: null, figures: null, cannot };
    const evaluation = evaluateDay(input, governing, []);
    const {
      decidingTaskId: _,
      dosePct: __,
      doseBound: ___,
      ...figures
    } = summarizeDay(input, evaluation, governing);
    const { outsideDb, atEarDb } = figures;
    const verdict = verdictOn(evaluation, governing, goal);
    return { verdict, outsideDb, atEarDb, figures, cannot };
  });
}

export type VerdictCounts = Record<Verdict, number>;

export function countVerdicts(judged: readonly { verdict: Verdict }[]): VerdictCounts {
  const counts = { under: 0, over: 0, "cant-tell-yet": 0, "not-assessed": 0 };
  for (const { verdict } of judged) counts[verdict] += 1;
  return counts;
}

const verdictOn = (evaluation: DayEvaluation, governing: RuleSetVersion, goal: string): Verdict =>
  evaluation.criteria.find(
    ({ ruleSetKey, criterionId }) => ruleSetKey === governing.key && criterionId === goal,
  )?.verdict ?? "not-assessed";

/** Criteria that changes can be made for, and the one that is meant unless another is chosen: the rule's daily limit. */
export function goalsOf(governing: RuleSetVersion): { id: string; label: string }[] {
  const main = mainLimit(governing).id;
  return governing.criteria
    .filter(({ quantity }) => quantity !== "lex-weekly")
    .toSorted((a, b) => Number(b.id === main) - Number(a.id === main) || levelOf(a) - levelOf(b))
    .map(({ id, label }) => ({ id, label }));
}

/** A choice of changes, by their places, and whom it leaves not under. */
export interface Fewest {
  chosen: readonly number[];
  left: readonly string[];
}

/** More than this many changes are not searched through: every further one doubles the work. */
export const MOST_SEARCHED = 10;

/**
 * The fewest of these changes with which everybody is Under the goal: every choice of one, then of two, and so on, so that
 * the first that serves is proved to be a shortest one. Where none does, that of all of them is given. Yields after each
 * choice, so that the caller can show how far it is, and stop.
 *
 * @throws RangeError with more than `MOST_SEARCHED` changes
 */
export function* fewestChanges(
  workers: readonly TriedWorker[],
  changes: readonly PlanChange[],
  context: TryContext,
  governing: RuleSetVersion,
  goal: string,
): Generator<{ done: number; of: number }, Fewest> {
  if (changes.length > MOST_SEARCHED) throw new RangeError("too many changes to search through");
  const of = 2 ** changes.length;
  const leftBy = (places: readonly number[]) =>
    judgeTried(
      tryChanges(
        workers,
        places.map((place) => changes[place]!),
        context,
      ),
      governing,
      goal,
    ).flatMap(({ verdict }, index) => (verdict === "under" ? [] : [workers[index]!.id]));
  let done = 0;
  for (let size = 0; size <= changes.length; size++) {
    for (const chosen of choices(changes.length, size)) {
      const left = leftBy(chosen);
      if (left.length === 0) return { chosen, left };
      yield { done: ++done, of };
    }
  }
  const all = changes.map((_, place) => place);
  return { chosen: all, left: leftBy(all) };
}

function* choices(count: number, size: number, from = 0): Generator<number[]> {
  if (size === 0) {
    yield [];
    return;
  }
  for (let place = from; place <= count - size; place++)
    for (const rest of choices(count, size - 1, place + 1)) yield [place, ...rest];
}
