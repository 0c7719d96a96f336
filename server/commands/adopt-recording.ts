import { octaveBandValues } from "../../shared/acoustics/signal";
import type { OctaveBandValues } from "../../shared/acoustics/types";
import type { RecordingLevels, RecordingUse } from "../../shared/schemas/recording";
import { TaskLevelInput } from "../../shared/schemas/task";
import { recordAudit } from "../lib/audit";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Recording } from "../models/survey";
import type { Task } from "../models/task";
import { levelInForce } from "../queries/tasks";
import { insertTaskLevel, type LevelSurvey } from "./add-task-level";
import { markDaysStale } from "./mark-days-stale";

/** A recording becomes the task's level, or gives it its spectrum. The task is locked. */
export async function adoptRecording(
  actor: Actor,
  recording: Recording,
  task: Task,
  use: RecordingUse,
): Promise<void> {
  const { number, level } = await insertLevelOfRecording(actor, recording, task, use);
  await recordAudit(actor, {
    action: "adopt-recording",
    subjectKind: "task",
    subjectId: task.id,
    values: { recordingId: recording.id, ...use, number, level },
  });
  await markDaysStale(actor.organizationId, { taskId: task.id, fromDate: use.effectiveFrom });
}

/** The row alone, for the change itself and for its preview. */
export async function insertLevelOfRecording(
  actor: Actor,
  recording: Recording,
  task: Task,
  use: RecordingUse,
): Promise<{ number: number; level: TaskLevelInput }> {
  if (recording.state !== "analysed" || !recording.analysis) throw new AppError("wrong-state", 409);
  const levels = recording.analysis.channels[use.channel - 1];
  if (!levels || levels.isSilent) throw unprocessable([issue(["channel"], "channel-silent")]);
  const { level, survey, keptReasons } =
    use.how === "level"
      ? { level: wholeLevel(levels, use), survey: null, keptReasons: [] }
      : await underOwnLevel(levels, task, use);
  const reasons = [...keptReasons, ...recording.accepted.map(({ reason }) => reason)];
  const number = await insertTaskLevel(actor, task, level, {
    survey,
    recording: { recordingId: recording.id, keptReasons: [...new Set(reasons)] },
  });
  return { number, level };
}

const bandsOf = ({ octaveBandsDb }: RecordingLevels): OctaveBandValues | null =>
  octaveBandValues(
    octaveBandsDb.map(({ frequencyHz, levelDb }) => ({ nominalHz: frequencyHz, levelDb })),
  );

const lcMinusLa = ({ laeqDb, lceqDb }: RecordingLevels) =>
  laeqDb === null || lceqDb === null ? null : lceqDb - laeqDb;

function wholeLevel(levels: RecordingLevels, use: RecordingUse): TaskLevelInput {
  if (!levels.isAbsolute) throw unprocessable([issue(["how"], "recording-relative")]);
  const { effectiveFrom, instrument, reason } = use;
  // A wrong sensitivity shows in levels that nothing has.
  const level = TaskLevelInput.safeParse({
    metric: { kind: "laeq" },
    levelDb: levels.laeqDb,
    lcMinusLaDb: lcMinusLa(levels),
    octaveBandsDb: bandsOf(levels),
    lasMaxDb: levels.lasMaxDb,
    peak: levels.lcPeakDb === null ? null : { levelDb: levels.lcPeakDb, weighting: "C" },
    samplesDb: [levels.laeqDb],
    instrument,
    grade: "measured-group",
    effectiveFrom,
    reason,
  });
  if (!level.success) throw unprocessable([issue(["channel"], "recording-implausible")]);
  return level.data;
}

/**
 * The level that the task has stays, with all that it rests on; the recording says how it is spread over the bands. That
 * needs no calibration: every band is moved by the same difference, that of the two LAeq.
 */
async function underOwnLevel(
  levels: RecordingLevels,
  task: Task,
  { effectiveFrom, reason }: RecordingUse,
): Promise<{ level: TaskLevelInput; survey: LevelSurvey | null; keptReasons: string[] }> {
  const own = await levelInForce(task.id, effectiveFrom);
  if (!own) throw unprocessable([issue(["how"], "task-has-no-level")]);
  // A mean at another exchange rate is no LAeq, and moving bands to it would say more than is known.
  if (own.metric.kind === "lavg") throw unprocessable([issue(["how"], "level-not-laeq")]);
  const bands = bandsOf(levels);
  const { laeqDb } = levels;
  if (!bands || laeqDb === null) throw unprocessable([issue(["channel"], "spectrum-incomplete")]);
  const shift = own.levelDb - laeqDb;
  const [first, ...rest] = bands;
  const { metric, levelDb, lasMaxDb, peak, samplesDb, instrument, grade, sourceNote } = own;
  const level = TaskLevelInput.safeParse({
    metric,
    levelDb,
    lcMinusLaDb: lcMinusLa(levels),
    octaveBandsDb: [first === null ? null : first + shift, ...rest.map((band) => band! + shift)],
    lasMaxDb,
    peak,
    samplesDb,
    instrument,
    grade,
    sourceNote,
    effectiveFrom,
    reason,
  });
  if (!level.success) throw unprocessable([issue(["channel"], "recording-implausible")]);
  const { surveyId, strategy, keptReasons, samples } = own;
  return surveyId === null
    ? { level: level.data, survey: null, keptReasons }
    : { level: level.data, survey: { surveyId, strategy, keptReasons, samples }, keptReasons: [] };
}
