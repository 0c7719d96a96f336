import { randomUUID } from "node:crypto";
import { OWN_REPORT_CHANGE_DAYS, type WearingRoundInput } from "../../shared/schemas/wearing";
import { recordAudit, recordAuditMany } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, rows } from "../lib/db";
import { issue, notFound, unprocessable } from "../lib/errors";
import { groupBy } from "../lib/group-by";
import { type Actor, visible } from "../lib/policy";
import { WearingRound } from "../models/shop-floor";
import { lookPolicy } from "../policies";
import { changeableUntil } from "../queries/wearing-rounds";
import { markDaysStale } from "./mark-days-stale";

/**
 * What a round saw: it is the wearing time of those days of these workers that say none themselves, from its date on.
 *
 * @throws AppError not-found or invalid.
 */
export async function recordWearingRound(
  actor: Actor,
  site: { id: string; timeZone: string },
  input: WearingRoundInput,
): Promise<string> {
  const before = input.source === "own-report" ? await reportsBefore(site, input) : [];
  await check(actor, site, input, before);
  const { seenOn, source, note, looks } = input;
  const id = randomUUID();
  const { organizationId, userId: authorId } = actor;
  await WearingRound.create({
    id,
    organizationId,
    siteId: site.id,
    seenOn,
    source,
    note,
    authorId,
  });
  await execute(
    `INSERT INTO wearing_looks (organization_id, round_id, worker_id, task_id, seen_on, worn_count, seen_count)
     SELECT $1, $2, x."workerId", x."taskId", $3, x."wornCount", x."seenCount"
     FROM jsonb_to_recordset($4::jsonb) AS x("workerId" uuid, "taskId" uuid, "wornCount" int, "seenCount" int)`,
    [organizationId, id, seenOn, JSON.stringify(looks)],
  );
  await recordAudit(actor, {
    action: "record-wearing-round",
    subjectKind: "wearing-round",
    subjectId: id,
    values: { siteId: site.id, seenOn, source, looks },
  });
  await recordAuditMany(
    actor,
    [...groupBy(before, ({ roundId }) => roundId)].map(([roundId, replaced]) => ({
      action: "replace-own-report",
      subjectKind: "wearing-round",
      subjectId: roundId,
      values: {
        seenOn,
        looks: replaced.map(({ workerId, taskId, wornCount, seenCount }) => ({
          workerId,
          taskId,
          wornCount,
          seenCount,
        })),
      },
    })),
  );
  await markDaysStale(organizationId, {
    workerIds: looks.map(({ workerId }) => workerId),
    fromDate: seenOn,
  });
  return id;
}

interface ReportBefore {
  roundId: string;
  workerId: string;
  taskId: string;
  wornCount: number;
  seenCount: number;
  /** When the worker's first report of this task and day was given, by the site's clock. */
  firstSaidOn: string;
}

/** The own reports that stand for what is said anew: one of each worker and task, which this one takes the place of. */
const reportsBefore = (
  { timeZone }: { timeZone: string },
  { seenOn, looks }: WearingRoundInput,
): Promise<ReportBefore[]> =>
  rows<ReportBefore>(
    `SELECT DISTINCT ON (l.worker_id, l.task_id) o.id AS "roundId", l.worker_id AS "workerId", l.task_id AS "taskId", l.worn_count AS "wornCount",
       l.seen_count AS "seenCount",
       (min(o.created_at) OVER (PARTITION BY l.worker_id, l.task_id) AT TIME ZONE :timeZone)::date::text AS "firstSaidOn"
     FROM jsonb_to_recordset(CAST(:looks AS jsonb)) AS x("workerId" uuid, "taskId" uuid)
     JOIN wearing_looks l ON l.worker_id = x."workerId" AND l.task_id = x."taskId" AND l.seen_on = CAST(:seenOn AS date)
     JOIN wearing_rounds o ON o.id = l.round_id AND o.source = 'own-report' AND o.struck_reason IS NULL
     ORDER BY l.worker_id, l.task_id, o.created_at DESC, o.id DESC`,
    { looks: JSON.stringify(looks), seenOn, timeZone },
  );

async function check(
  actor: Actor,
  site: { id: string; timeZone: string },
  { seenOn, looks }: WearingRoundInput,
  before: readonly ReportBefore[],
): Promise<void> {
  const today = todayAt(site.timeZone);
  const issues = dateIssues(["seenOn"], seenOn);
  if (seenOn > today) issues.push(issue(["seenOn"], "in-the-future", { today }));
  const workers = await rows<{ id: string; siteId: string }>(
    `SELECT w.id, w.site_id AS "siteId" FROM workers w WHERE w.id IN (:ids) AND ${visible(lookPolicy(seenOn), actor, "w")}`,
    { ids: looks.map(({ workerId }) => workerId) },
  );
  const tasks = await rows<{ id: string; siteId: string }>(
    `SELECT id, site_id AS "siteId" FROM tasks WHERE id IN (:ids)`,
    { ids: looks.map(({ taskId }) => taskId) },
  );
  const siteOfWorker = new Map(workers.map((one) => [one.id, one.siteId]));
  const siteOfTask = new Map(tasks.map((one) => [one.id, one.siteId]));
  const pairs = new Set<string>();
  looks.forEach(({ workerId, taskId }, index) => {
    if (!siteOfWorker.has(workerId) || !siteOfTask.has(taskId)) throw notFound();
    if (siteOfTask.get(taskId) !== site.id)
      issues.push(issue(["looks", index, "taskId"], "task-of-other-site"));
    const pair = `${workerId} ${taskId}`;
    if (pairs.has(pair)) issues.push(issue(["looks", index, "taskId"], "look-twice"));
    pairs.add(pair);
    const said = before.find((one) => one.workerId === workerId && one.taskId === taskId);
    // What was said long ago is not said anew by the worker alone: the officer strikes it.
    if (said && !actor.is("officer", "supervisor") && today > changeableUntil(said.firstSaidOn))
      issues.push(
        issue(["looks", index, "taskId"], "said-long-ago", { days: OWN_REPORT_CHANGE_DAYS }),
      );
  });
  if (issues.length > 0) throw unprocessable(issues);
}
