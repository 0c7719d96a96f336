import type { z } from "zod";
import type { RunFilter, RunPage, RunView } from "../../shared/schemas/run";
import { leftOutIn, type StoredLeftOut } from "../histories/left-out";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { type Actor, abilities, visible } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import type { Run } from "../models/instrument";
import { runPolicy } from "../policies";

type Found = Omit<RunView, "can" | "recordedAt" | "leftOut"> & {
  recordedAt: Date;
  leftOut: StoredLeftOut | null;
};

const SELECT_RUNS = `SELECT r.id, r.site_id AS "siteId", r.instrument_id AS "instrumentId", i.name AS "instrumentName", i.serial_number AS "serialNumber",
    r.worker_id AS "workerId", w.name AS "workerName", a.name AS "areaName", r.task_id AS "taskId", t.name AS "taskName", r.survey_id AS "surveyId",
    y.name AS "surveyName", r.place, r.date::text AS date, r.shift_id AS "shiftId", r.is_out AS "isOut", ${isoInstant("lower(r.span)")} AS "outAt",
    ${isoInstant("upper(r.span)")} AS "backAt", r.is_void AS "isVoid", r.revision,
    v.duration_min AS "durationMin", v.check_before_db AS "checkBeforeDb", v.check_after_db AS "checkAfterDb", v.covers, v.kept_reason AS "keptReason",
    v.doubts, v.left_out AS "leftOut", v.unusual, u.name AS "authorName", v.created_at AS "recordedAt",
    (SELECT h.id FROM time_histories h WHERE h.run_id = r.id AND NOT h.is_void) AS "historyId",
    coalesce((SELECT json_agg(json_build_object('id', f.id, 'name', f.name, 'mediaType', f.media_type) ORDER BY x.added_at, f.id)
     FROM run_files x JOIN files f ON f.id = x.file_id WHERE x.run_id = r.id), '[]') AS files,
    coalesce((SELECT json_agg(json_build_object(
       'settings', json_build_object('criterionLevelDb', g.criterion_level_db, 'exchangeRateDb', g.exchange_rate_db, 'thresholdDb', g.threshold_db, 'weighting', g.weighting, 'response', g.response),
       'dosePct', g.dose_pct, 'averageDb', g.average_db, 'lceqDb', g.lceq_db, 'lasMaxDb', g.las_max_db,
       'peak', CASE WHEN g.peak_db IS NOT NULL THEN json_build_object('levelDb', g.peak_db, 'weighting', g.peak_weighting) END,
       'octaveBandsDb', g.octave_bands_db, 'source', g.source) ORDER BY g.position)
     FROM readings g WHERE g.run_revision_id = v.id), '[]') AS readings
  FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id JOIN instruments i ON i.id = r.instrument_id
  LEFT JOIN workers w ON w.id = r.worker_id LEFT JOIN areas a ON a.id = r.area_id LEFT JOIN tasks t ON t.id = r.task_id
  LEFT JOIN surveys y ON y.id = r.survey_id LEFT JOIN users u ON u.id = v.author_id`;

const present = (actor: Actor, { recordedAt, leftOut, ...run }: Found): RunView => ({
  ...run,
  leftOut: (leftOut && leftOutIn(leftOut, null)) ?? undefined,
  recordedAt: recordedAt.toISOString(),
  can: abilities(runPolicy, actor, run),
});

export async function listRuns(
  actor: Actor,
  filter: z.output<typeof RunFilter>,
): Promise<z.input<typeof RunPage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const conditions = [visible(runPolicy, actor, "r")];
  if (filter.workerId) conditions.push("r.worker_id = :workerId");
  if (filter.instrumentId) conditions.push("r.instrument_id = :instrumentId");
  if (filter.siteId) conditions.push("r.site_id = :siteId");
  if (filter.surveyId) conditions.push("r.survey_id = :surveyId");
  if (filter.taskId) conditions.push("r.task_id = :taskId");
  if (filter.date) conditions.push("r.date = :date");
  if (cursor)
    conditions.push("(r.date, r.id) < (CAST(:beforeDate AS date), CAST(:beforeId AS uuid))");
  const found = await rows<Found>(
    `${SELECT_RUNS} WHERE ${conditions.join(" AND ")} ORDER BY r.date DESC, r.id DESC LIMIT :limit`,
    {
      workerId: filter.workerId,
      instrumentId: filter.instrumentId,
      siteId: filter.siteId,
      surveyId: filter.surveyId,
      taskId: filter.taskId,
      date: filter.date,
      beforeDate: cursor?.[0] ?? null,
      beforeId: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(
    found.map((one) => present(actor, one)),
    filter.limit,
    ({ date, id }) => [date, id],
  );
}

export async function runView(actor: Actor, run: Run): Promise<RunView> {
  const [found] = await rows<Found>(`${SELECT_RUNS} WHERE r.id = :id`, { id: run.id });
  return present(actor, found as Found);
}
