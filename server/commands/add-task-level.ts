import type { TaskLevelInput } from "../../shared/schemas/task";
import { recordAudit } from "../lib/audit";
import { dateIssues } from "../lib/calendar";
import { execute, row, rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import type { Task } from "../models/task";
import { checkLevel } from "./check-task";
import { markDaysStale } from "./mark-days-stale";

/** A task's noise from a date on, or the correction of what stood from that date. The task's row is locked. */
export async function addTaskLevel(
  actor: Actor,
  task: Task,
  input: TaskLevelInput,
  under: string[] = [],
): Promise<void> {
  checkLevel(input, under);
  const number = await insertTaskLevel(actor, task, input, { under });
  await recordAudit(actor, {
    action: "add-task-level",
    subjectKind: "task",
    subjectId: task.id,
    values: { number, ...input },
  });
  await markDaysStale(actor.organizationId, { taskId: task.id, fromDate: input.effectiveFrom });
}

/** The survey that a level rests on, and each sample's own run. */
export interface LevelSurvey {
  surveyId: string;
  strategy: "task" | "job" | "full-day";
  keptReasons: readonly string[];
  samples: readonly {
    runId: string;
    runRevisionId: string;
    fromS: number | null;
    toS: number | null;
    levelDb: number;
  }[];
}

interface LevelSource {
  under?: string[];
  survey?: LevelSurvey | null;
  /** The recording that it, or its spectrum, comes from. */
  recording?: { recordingId: string; keptReasons: readonly string[] } | null;
  /** The earlier level of the task whose spectrum it keeps, shifted to the new one. */
  spectrumOfNumber?: number | null;
}

/** The row alone, for the change itself and for its preview. */
export async function insertTaskLevel(
  actor: Actor,
  task: Task,
  input: TaskLevelInput,
  { under = [], survey = null, recording = null, spectrumOfNumber = null }: LevelSource = {},
): Promise<number> {
  const last = await row<{ number: number }>(
    "SELECT coalesce(max(number), 0) AS number FROM task_levels WHERE task_id = :id",
    { id: task.id },
  );
  const number = (last?.number ?? 0) + 1;
  const issues = dateIssues([...under, "effectiveFrom"], input.effectiveFrom);
  if (number > 1 && input.reason === null)
    issues.push(issue([...under, "reason"], "reason-needed"));
  if (issues.length > 0) throw unprocessable(issues);
  const added = await rows<{ id: string }>(
    `INSERT INTO task_levels (organization_id, task_id, number, effective_from, metric, level_db, lc_minus_la_db, octave_bands_db,
       las_max_db, peak_db, peak_weighting, samples_db, instrument_class, grade, source_note, reason, author_id, survey_id, strategy, kept_reasons, recording_id, impulse_type, spectrum_of_number)
     VALUES ($1, $2, $3, $4, $5::jsonb, $6, $7, $8::float8[], $9, $10, $11, $12::float8[], $13, $14, $15, $16, $17, $18, $19, $20::text[], $21, $22, $23) RETURNING id`,
    [
      actor.organizationId,
      task.id,
      number,
      input.effectiveFrom,
      JSON.stringify(input.metric),
      input.levelDb,
      input.lcMinusLaDb,
      input.octaveBandsDb,
      input.lasMaxDb,
      input.peak?.levelDb ?? null,
      input.peak?.weighting ?? null,
      input.samplesDb,
      input.instrument,
      input.grade,
      input.sourceNote,
      input.reason,
      actor.userId,
      survey?.surveyId ?? null,
      survey?.strategy ?? "task",
      [...(survey?.keptReasons ?? []), ...(recording?.keptReasons ?? [])],
      recording?.recordingId ?? null,
      input.impulseType,
      spectrumOfNumber,
    ],
  );
  if (survey)
    await execute(
      `INSERT INTO task_level_samples (organization_id, task_level_id, position, run_id, run_revision_id, from_s, to_s, level_db)
       SELECT $1::uuid, $2::uuid, s.ordinality - 1, (s.value->>'runId')::uuid, (s.value->>'runRevisionId')::uuid,
         (s.value->>'fromS')::float8, (s.value->>'toS')::float8, (s.value->>'levelDb')::float8
       FROM jsonb_array_elements($3::jsonb) WITH ORDINALITY s`,
      [actor.organizationId, only(added).id, JSON.stringify(survey.samples)],
    );
  return number;
}
