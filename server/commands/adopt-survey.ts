import {
  lcMinusLaOfSpectrumDb,
  shiftedSpectrumDb,
} from "../../shared/acoustics/protection/octave-band";
import type { OctaveBandValues } from "../../shared/acoustics/types";
import type { SurveyAdoption, SurveySample, TargetResult } from "../../shared/schemas/survey";
import { recordAudit } from "../lib/audit";
import { row } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Survey } from "../models/survey";
import type { Task } from "../models/task";
import { resultOf, samplesOfSurveys } from "../queries/survey-samples";
import { surveyHead } from "../queries/surveys";
import { insertTaskLevel } from "./add-task-level";
import { markDaysStale } from "./mark-days-stale";

/** A survey's results become the levels of tasks. The tasks are locked. */
export async function adoptSurvey(
  actor: Actor,
  survey: Survey,
  tasks: readonly Task[],
  input: SurveyAdoption,
): Promise<void> {
  const levels = await insertAdoptedLevels(actor, survey, tasks, input);
  await recordAudit(actor, {
    action: "adopt-survey",
    subjectKind: "survey",
    subjectId: survey.id,
    values: { ...input, levels },
  });
  await markDaysStale(actor.organizationId, {
    taskIds: tasks.map(({ id }) => id),
    fromDate: input.effectiveFrom,
  });
}

/** The rows alone, for the change itself and for its preview. */
export async function insertAdoptedLevels(
  actor: Actor,
  survey: Survey,
  tasks: readonly Task[],
  input: SurveyAdoption,
): Promise<{ taskId: string; levelDb: number; number: number }[]> {
  if (survey.state === "planned" || survey.state === "struck")
    throw new AppError("wrong-state", 409);
  const measured = await surveyHead(survey.id);
  const samples = (await samplesOfSurveys([measured])).get(survey.id) ?? [];
  const taskOf = new Map(tasks.map((task) => [task.id, task]));
  const issues = input.targets.flatMap(({ position, taskId }, index) => {
    const target = measured.targets[position];
    const path = ["targets", index, "taskId"];
    if (!target || (target.taskId !== null && target.taskId !== taskId))
      return [issue(path, "not-of-this-target")];
    if (taskOf.get(taskId)?.siteId !== survey.siteId) return [issue(path, "task-of-other-site")];
    const isTwice = input.targets.findIndex((other) => other.taskId === taskId) !== index;
    if (isTwice) return [issue(path, "task-twice")];
    const { levelDb } = resultOf(measured.strategy, target, samples, measured.groupSize);
    return levelDb === null ? [issue(path, "no-samples-yet")] : [];
  });
  if (issues.length > 0) throw unprocessable(issues);
  const adopted: { taskId: string; levelDb: number; number: number }[] = [];
  for (const { position, taskId } of input.targets) {
    const target = measured.targets[position]!;
    const result = resultOf(measured.strategy, target, samples, measured.groupSize);
    const behind = samplesOf(samples, position);
    const kept =
      input.keepsSpectrum && result.octaveBandsDb === null
        ? await keptSpectrum(taskId, input.effectiveFrom, result.levelDb!)
        : null;
    const level = {
      ...levelOf(result, input),
      ...kept?.facts,
      samplesDb: behind.map(({ levelDb }) => levelDb),
    };
    const number = await insertTaskLevel(actor, taskOf.get(taskId)!, level, {
      spectrumOfNumber: kept?.number ?? null,
      survey: {
        surveyId: survey.id,
        strategy: measured.strategy,
        // Fewer samples than the standard asks for count because the officer says so, and the number says that.
        keptReasons:
          result.missingCount > 0
            ? [...new Set([...result.keptReasons, input.reason])]
            : result.keptReasons,
        samples: behind,
      },
    });
    adopted.push({ taskId, levelDb: result.levelDb!, number });
  }
  return adopted;
}

const samplesOf = (samples: readonly SurveySample[], position: number) =>
  samples
    .filter((sample) => sample.position === position && sample.notCounted === null)
    .map(({ runId, runRevisionId, fromS, toS, laeqDb }) => ({
      runId,
      runRevisionId,
      fromS,
      toS,
      levelDb: laeqDb!,
    }));

function levelOf(result: TargetResult, { effectiveFrom, reason }: SurveyAdoption) {
  return {
    metric: { kind: "laeq" as const },
    levelDb: result.levelDb!,
    lcMinusLaDb: result.lcMinusLaDb,
    octaveBandsDb: result.octaveBandsDb,
    lasMaxDb: result.lasMaxDb,
    peak:
      result.peakDb === null || result.peakWeighting === null
        ? null
        : { levelDb: result.peakDb, weighting: result.peakWeighting },
    instrument: result.instrument,
    grade: "measured-group" as const,
    effectiveFrom,
    sourceNote: "",
    reason,
    impulseType: null,
    acceptedDoubts: [],
  };
}

/** Bands and LC − LA of the level in force, the bands shifted so that they give the new A-weighted level. */
async function keptSpectrum(taskId: string, date: string, levelDb: number) {
  const former = await row<{
    number: number;
    octaveBandsDb: OctaveBandValues;
    lcMinusLaDb: number | null;
  }>(
    `SELECT number, octave_bands_db AS "octaveBandsDb", lc_minus_la_db AS "lcMinusLaDb" FROM task_levels
     WHERE task_id = :taskId AND effective_from <= :date AND octave_bands_db IS NOT NULL ORDER BY effective_from DESC, number DESC LIMIT 1`,
    { taskId, date },
  );
  if (!former) return null;
  const { number, octaveBandsDb, lcMinusLaDb } = former;
  const bands = shiftedSpectrumDb(octaveBandsDb, levelDb);
  return {
    number,
    facts: {
      octaveBandsDb: bands as TargetResult["octaveBandsDb"],
      lcMinusLaDb: lcMinusLaDb ?? lcMinusLaOfSpectrumDb(octaveBandsDb),
    },
  };
}
