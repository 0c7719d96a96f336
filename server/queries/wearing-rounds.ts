import type { z } from "zod";
import {
  OWN_REPORT_CHANGE_DAYS,
  type OwnReports,
  type WearingCrews,
  type WearingFilter,
  type WearingRoundPage,
  type WearingRoundView,
  type WearingTally,
} from "../../shared/schemas/wearing";
import { addDays } from "../../shared/time/zone";
import { todayAt } from "../lib/calendar";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import type { Crew } from "../models/worker";
import { roundPolicy, wearingPolicy } from "../policies";
import { isAbsentOn, isLentOn } from "./attendance";
import { lookReplaced } from "./own-attenuation";

type Found = Omit<WearingRoundView, "can">;

const SELECT_ROUNDS = `SELECT o.id, o.revision, o.site_id AS "siteId", s.name AS "siteName", o.seen_on::text AS "seenOn", o.source, o.note,
    u.name AS "authorName", o.struck_reason AS "struckReason", k."wornCount", k."seenCount", k.looks
  FROM wearing_rounds o JOIN sites s ON s.id = o.site_id LEFT JOIN users u ON u.id = o.author_id
  CROSS JOIN LATERAL (
    SELECT sum(l.worn_count)::int AS "wornCount", sum(l.seen_count)::int AS "seenCount",
      json_agg(json_build_object('workerId', l.worker_id, 'workerName', w.name, 'taskId', l.task_id, 'taskName', t.name,
        'wornCount', l.worn_count, 'seenCount', l.seen_count, 'isReplaced', ${lookReplaced("l", "o")}) ORDER BY w.name, t.name) AS looks
    FROM wearing_looks l JOIN workers w ON w.id = l.worker_id JOIN tasks t ON t.id = l.task_id WHERE l.round_id = o.id) k`;

const present = (actor: Actor, found: Found): WearingRoundView => ({
  ...found,
  can: abilities(wearingPolicy, actor, found),
});

export async function listWearingRounds(
  actor: Actor,
  filter: z.output<typeof WearingFilter>,
): Promise<z.input<typeof WearingRoundPage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const conditions = [visible(wearingPolicy, actor, "o")];
  if (filter.siteId) conditions.push("o.site_id = :siteId");
  if (cursor)
    conditions.push("(o.seen_on, o.id) < (CAST(:beforeDate AS date), CAST(:beforeId AS uuid))");
  const found = await rows<Found>(
    `${SELECT_ROUNDS} WHERE ${conditions.join(" AND ")} ORDER BY o.seen_on DESC, o.id DESC LIMIT :limit`,
    {
      siteId: filter.siteId,
      beforeDate: cursor?.[0] ?? null,
      beforeId: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(
    found.map((one) => present(actor, one)),
    filter.limit,
    ({ seenOn, id }) => [seenOn, id],
  );
}

export async function wearingRoundView(actor: Actor, id: string): Promise<WearingRoundView> {
  return present(actor, only(await rows<Found>(`${SELECT_ROUNDS} WHERE o.id = :id`, { id })));
}

/** Crews through which the caller may make a round on a date. */
export function wearingCrews(actor: Actor, date: string): Promise<WearingCrews["rows"]> {
  return rows<WearingCrews["rows"][number]>(
    `SELECT c.id, c.name, c.site_id AS "siteId", s.name AS "siteName" FROM crews c JOIN sites s ON s.id = c.site_id
     WHERE NOT c.is_archived AND ${visible(roundPolicy(date), actor, "c")} ORDER BY s.name, c.name, c.id`,
  );
}

/** Whom a round through a crew looks at: its people of a date who are there, with the tasks of their nominal day that have a protector or call for one. */
export async function wearingTally(crew: Crew, date: string): Promise<WearingTally> {
  const workers = await rows<WearingTally["workers"][number]>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber",
       coalesce((SELECT json_agg(j.task_id ORDER BY j.position) FROM job_tasks j JOIN tasks t ON t.id = j.task_id LEFT JOIN areas a ON a.id = t.area_id
         WHERE j.job_id = w.job_id AND t.site_id = :siteId AND (coalesce(a.zone, 'none') <> 'none' OR EXISTS (SELECT 1 FROM assignments x
           WHERE x.worker_id = w.id AND x.valid @> CAST(:date AS date) AND (x.task_id = t.id OR x.area_id = t.area_id OR (x.task_id IS NULL AND x.area_id IS NULL)))
           AND coalesce((SELECT l.level_db FROM task_levels l WHERE l.task_id = t.id AND l.effective_from <= CAST(:date AS date)
             ORDER BY l.effective_from DESC, l.number DESC LIMIT 1), 0) >= g.wear_from_db)), '[]') AS "taskIds",
       coalesce((SELECT json_agg(json_build_object('taskId', t.id, 'name', z.name) ORDER BY j.position) FROM job_tasks j JOIN tasks t ON t.id = j.task_id
         CROSS JOIN LATERAL (SELECT concat_ws(' + ', i.name, o.name) AS name FROM assignments x JOIN protector_models i ON i.id = x.inner_model_id
           LEFT JOIN protector_models o ON o.id = x.outer_model_id WHERE x.worker_id = w.id AND x.valid @> CAST(:date AS date)
             AND (x.task_id = t.id OR x.area_id = t.area_id OR (x.task_id IS NULL AND x.area_id IS NULL))
           ORDER BY x.task_id NULLS LAST, x.area_id NULLS LAST LIMIT 1) z
         WHERE j.job_id = w.job_id AND t.site_id = :siteId), '[]') AS protectors
     FROM crew_memberships m JOIN workers w ON w.id = m.worker_id
     JOIN LATERAL (SELECT t.wear_from_db FROM site_settings t WHERE t.site_id = :siteId AND t.effective_from <= CAST(:date AS date)
       ORDER BY t.effective_from DESC, t.number DESC LIMIT 1) g ON TRUE
     WHERE m.crew_id = :crewId AND m.valid @> CAST(:date AS date) AND (w.left_on IS NULL OR w.left_on >= CAST(:date AS date))
       AND NOT ${isAbsentOn("w.id", "CAST(:date AS date)")} AND NOT ${isLentOn("m", "CAST(:date AS date)")}
     ORDER BY w.name, w.id`,
    { crewId: crew.id, siteId: crew.siteId, date },
  );
  const ids = [...new Set(workers.flatMap(({ taskIds }) => taskIds))];
  const tasks =
    ids.length === 0
      ? []
      : await rows<WearingTally["tasks"][number]>(
          "SELECT id, name FROM tasks WHERE id IN (:ids) ORDER BY name",
          { ids },
        );
  return { crewId: crew.id, crewName: crew.name, siteId: crew.siteId, date, tasks, workers };
}

type StandingReport = Omit<OwnReports["rows"][number], "changeableUntil" | "canChange"> & {
  firstSaidOn: string;
};

/** The last day on which a worker may say anew what was first said on a day. */
export const changeableUntil = (firstSaidOn: string): string =>
  addDays(firstSaidOn, OWN_REPORT_CHANGE_DAYS);

/** SQL: what the shifts of a look's day state of its task, by the minutes; null where a stretch of it states none. */
const STATED_PCT = `(SELECT CASE WHEN bool_and(t.worn_pct IS NOT NULL) THEN sum(t.worn_pct * t.duration_min) / nullif(sum(t.duration_min), 0) END
  FROM shifts s JOIN shift_tasks t ON t.shift_revision_id = s.current_revision_id
  WHERE s.worker_id = l.worker_id AND s.date = l.seen_on AND NOT s.is_void AND t.task_id = l.task_id)::float8`;

/** Own reports of a worker that stand, from a day on: the latest of each day and task. */
export async function ownReports(
  worker: { id: string; timeZone: string },
  from: string,
): Promise<OwnReports["rows"]> {
  const today = todayAt(worker.timeZone);
  const found = await rows<StandingReport>(
    `SELECT DISTINCT ON (l.seen_on, l.task_id) l.seen_on::text AS date, l.task_id AS "taskId", t.name AS "taskName", l.worn_count AS "wornCount",
       l.seen_count AS "seenCount", ${STATED_PCT} AS "statedPct", o.note, (o.created_at AT TIME ZONE :timeZone)::date::text AS "saidOn",
       (min(o.created_at) OVER (PARTITION BY l.seen_on, l.task_id) AT TIME ZONE :timeZone)::date::text AS "firstSaidOn",
       coalesce(u.worker_id = l.worker_id, FALSE) AS "isByWorker"
     FROM wearing_looks l JOIN wearing_rounds o ON o.id = l.round_id JOIN tasks t ON t.id = l.task_id LEFT JOIN users u ON u.id = o.author_id
     WHERE l.worker_id = :workerId AND l.seen_on >= CAST(:from AS date) AND o.source = 'own-report' AND o.struck_reason IS NULL
     ORDER BY l.seen_on DESC, l.task_id, o.created_at DESC, o.id DESC`,
    { workerId: worker.id, from, timeZone: worker.timeZone },
  );
  return found.map(({ firstSaidOn, ...report }) => {
    const until = changeableUntil(firstSaidOn);
    return { ...report, changeableUntil: until, canChange: today <= until };
  });
}
