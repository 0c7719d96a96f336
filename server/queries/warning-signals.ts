import type { z } from "zod";
import { hearSignal, type SignalHeard } from "../../shared/acoustics/protection/warning-signal";
import type { OctaveBandValues, Protection, TaskLevel } from "../../shared/acoustics/types";
import type {
  Audibility,
  WarningSignalDetail,
  WarningSignalView,
} from "../../shared/schemas/warning-signal";
import { todayAt } from "../lib/calendar";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { signalPolicy } from "../policies";
import { modelsOn } from "./day-grid";
import { LEVEL_COLUMNS, toTaskLevel } from "./day-inputs";
import { combinationInForce } from "./own-attenuation";

type Found = Omit<WarningSignalView, "can">;

export async function listWarningSignals(
  actor: Actor,
  { siteId = null, id = null }: { siteId?: string | null; id?: string | null },
): Promise<WarningSignalView[]> {
  const found = await rows<Found>(
    `SELECT g.id, g.revision, g.site_id AS "siteId", s.name AS "siteName", g.area_id AS "areaId", a.name AS "areaName", g.name, g.meaning,
       g.octave_bands_db AS "octaveBandsDb", g.is_archived AS "isArchived"
     FROM warning_signals g JOIN sites s ON s.id = g.site_id LEFT JOIN areas a ON a.id = g.area_id
     WHERE ${visible(signalPolicy, actor, "g")} AND (CAST(:id AS uuid) IS NULL OR g.id = :id) AND (CAST(:siteId AS uuid) IS NULL OR g.site_id = :siteId)
     ORDER BY g.is_archived, s.name, g.name`,
    { id, siteId },
  );
  return found.map((one) => ({ ...one, can: abilities(signalPolicy, actor, one) }));
}

interface Worn {
  taskId: string;
  taskName: string;
  level: Parameters<typeof toTaskLevel>[0] | null;
  innerModelId: string | null;
  outerModelId: string | null;
  combination: Protection["combinationBands"];
}

/** A signal with whether it is heard in each task of its place, bare and under each protector that is worn there today. */
export async function warningSignalDetail(
  actor: Actor,
  id: string,
): Promise<z.infer<typeof WarningSignalDetail>> {
  const signal = only(await listWarningSignals(actor, { id }));
  const worn = await rows<Worn>(
    `SELECT k.id AS "taskId", k.name AS "taskName", (SELECT to_jsonb(x) FROM (
        SELECT ${LEVEL_COLUMNS("l")} FROM task_levels l WHERE l.task_id = k.id AND l.effective_from <= current_date
        ORDER BY l.effective_from DESC, l.number DESC LIMIT 1) x) AS level,
       u.inner_model_id AS "innerModelId", u.outer_model_id AS "outerModelId",
       (SELECT c.bands FROM protector_combinations c WHERE c.id = ${combinationInForce("u.inner_model_id", "u.outer_model_id", "current_date")}) AS combination
     FROM tasks k LEFT JOIN LATERAL (
       SELECT DISTINCT x.inner_model_id, x.outer_model_id FROM assignments x JOIN workers w ON w.id = x.worker_id
       WHERE x.valid @> current_date AND (x.task_id = k.id OR x.area_id = k.area_id OR (x.task_id IS NULL AND x.area_id IS NULL
         AND EXISTS (SELECT 1 FROM job_tasks j WHERE j.job_id = w.job_id AND j.task_id = k.id)))
       UNION SELECT NULL, NULL) u ON TRUE
     WHERE k.site_id = :siteId AND NOT k.is_archived AND (CAST(:areaId AS uuid) IS NULL OR k.area_id = :areaId)
     ORDER BY k.name, u.inner_model_id NULLS FIRST, u.outer_model_id NULLS FIRST`,
    { siteId: signal.siteId, areaId: signal.areaId },
  );
  const today = todayAt("UTC");
  const ids = worn.flatMap(({ innerModelId, outerModelId }) => [innerModelId, outerModelId]);
  const models = new Map(
    (
      await modelsOn(
        [...new Set(ids)].filter((one) => one !== null),
        today,
      )
    ).map((model) => [model.modelId, model]),
  );
  const audibility = worn.map((one): z.infer<typeof Audibility> => {
    const inner = one.innerModelId === null ? null : (models.get(one.innerModelId) ?? null);
    const outer = one.outerModelId === null ? null : (models.get(one.outerModelId) ?? null);
    const protection: Protection | null = inner && {
      assignmentId: null,
      inner,
      outer,
      combinationBands: one.combination,
      ownFitDb: null,
      activeCheckPassed: false,
    };
    const level = one.level && toTaskLevel(one.level);
    return {
      taskId: one.taskId,
      taskName: one.taskName,
      protectorId: inner?.modelId ?? null,
      protectorName: inner && [inner.name, outer?.name].filter(Boolean).join(" + "),
      ...wordsOf(signal.octaveBandsDb, level, protection),
    };
  });
  return { ...signal, audibility };
}

const NOT_ASSESSED = { word: "not-assessed", bestBandHz: null, aboveDb: null } as const;

function wordsOf(
  signalDb: OctaveBandValues,
  level: TaskLevel | null,
  protection: Protection | null,
): Pick<z.infer<typeof Audibility>, "off" | "on" | "reason"> {
  if (!level) return { off: NOT_ASSESSED, on: null, reason: "level-missing" };
  if (!level.octaveBandsDb) return { off: NOT_ASSESSED, on: null, reason: "no-spectrum" };
  const found = hearSignal(signalDb, level.octaveBandsDb, protection, level.levelDb);
  if (found.off === null) return { off: NOT_ASSESSED, on: null, reason: found.reason };
  return { off: wordOf(found.off), on: found.on && wordOf(found.on), reason: null };
}

const wordOf = ({ isAudible, bestBandHz, aboveDb }: NonNullable<SignalHeard["off"]>) => ({
  word: isAudible ? ("audible" as const) : ("not-audible" as const),
  bestBandHz,
  aboveDb,
});
