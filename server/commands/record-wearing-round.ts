import { randomUUID } from "node:crypto";
import type { WearingRoundInput } from "../../shared/schemas/wearing";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, rows } from "../lib/db";
import { issue, notFound, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import { WearingRound } from "../models/shop-floor";
import { lookPolicy } from "../policies";
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
  await check(actor, site, input);
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
  await markDaysStale(organizationId, {
    workerIds: looks.map(({ workerId }) => workerId),
    fromDate: seenOn,
  });
  return id;
}

async function check(
  actor: Actor,
  site: { id: string; timeZone: string },
  { seenOn, looks }: WearingRoundInput,
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
  });
  if (issues.length > 0) throw unprocessable(issues);
}
