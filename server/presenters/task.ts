import type { z } from "zod";
import type { TaskLevelView, TaskView } from "../../shared/schemas/task";
import { type Actor, abilities } from "../lib/policy";
import { programmePolicy } from "../policies";
import type { TaskLevelRow, TaskRow } from "../queries/tasks";

export function presentTaskLevel(row: TaskLevelRow): z.infer<typeof TaskLevelView> {
  const { peakDb, peakWeighting } = row;
  return {
    id: row.id,
    number: row.number,
    effectiveFrom: row.effectiveFrom,
    metric: row.metric,
    levelDb: row.levelDb,
    lcMinusLaDb: row.lcMinusLaDb,
    octaveBandsDb: row.octaveBandsDb,
    lasMaxDb: row.lasMaxDb,
    peak:
      peakDb === null || peakWeighting === null
        ? null
        : { levelDb: peakDb, weighting: peakWeighting },
    samplesDb: row.samplesDb,
    instrument: row.instrument,
    grade: row.grade,
    sourceNote: row.sourceNote,
    reason: row.reason,
    surveyId: row.surveyId,
    surveyName: row.surveyName,
    recordingId: row.recordingId,
    recordingName: row.recordingName,
    strategy: row.strategy,
    keptReasons: row.keptReasons,
    impulseType: row.impulseType,
    spectrumOfNumber: row.spectrumOfNumber,
    samples: row.samples,
    authorName: row.authorName,
    createdAt: row.createdAt.toISOString(),
  };
}

export function presentTask(actor: Actor, row: TaskRow, level: TaskLevelRow | undefined): TaskView {
  return {
    id: row.id,
    siteId: row.siteId,
    areaId: row.areaId,
    areaName: row.areaName,
    zone: row.zone,
    name: row.name,
    requiredGear: row.requiredGear,
    isArchived: row.isArchived,
    revision: row.revision,
    level: level ? presentTaskLevel(level) : null,
    can: abilities(programmePolicy, actor, row),
  };
}
