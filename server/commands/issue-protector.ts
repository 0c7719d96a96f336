import { randomUUID } from "node:crypto";
import { type IssueInput, reasonAskedFor } from "../../shared/schemas/fit";
import type { ProblemIssue } from "../../shared/schemas/problem";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { execute, row, rows } from "../lib/db";
import { issue, notFound, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import type { Worker } from "../models/worker";
import { fitPolicy, protectorPolicy } from "../policies";
import { barsAtDesk } from "../queries/barred";
import { pairPassed } from "../queries/own-attenuation";
import { assignIssued } from "./assign-issued";
import { barCode } from "./bar-code";
import { followFits } from "./follow-fits";
import { moveStock, stockOf } from "./move-stock";

/**
 * Hands a device out: assignment, stock and acknowledgement stand or fall together. The worker's row is locked. Returns
 * the issue's id, and what it takes the place of.
 *
 * @throws AppError not-found or invalid.
 */
export async function issueProtector(
  actor: Actor,
  worker: Worker,
  site: { timeZone: string },
  input: IssueInput,
): Promise<{ id: string; replacedName: string | null }> {
  const { modelId, size, fitTestId, issuedOn, isAcknowledged, reason, offeredModelIds } = input;
  const { organizationId, userId } = actor;
  const stock = await stockOf(worker.siteId, modelId, size);
  await check(actor, worker, todayAt(site.timeZone), input, stock);
  const { assignmentId, replacedName } = await assignIssued(actor, worker, {
    taskId: input.taskId,
    areaId: input.areaId,
    innerModelId: modelId,
    outerModelId: null,
    fromDate: issuedOn,
    toDate: null,
    size,
    audioDb: null,
  });
  const id = randomUUID();
  await execute(
    `INSERT INTO protector_issues (id, organization_id, site_id, worker_id, model_id, size, assignment_id, fit_test_id, issued_on,
       offered_model_ids, was_instructed, acknowledged_at, acknowledged_how, reason, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10::uuid[], $11, CASE WHEN $12 THEN now() END, CASE WHEN $12 THEN 'in-person' END, $13, $14)`,
    [
      id,
      organizationId,
      worker.siteId,
      worker.id,
      modelId,
      size,
      assignmentId,
      fitTestId,
      issuedOn,
      offeredModelIds,
      input.wasInstructed,
      isAcknowledged,
      reason,
      userId,
    ],
  );
  if (stock !== null)
    await moveStock(actor, {
      siteId: worker.siteId,
      modelId,
      size,
      kind: "issued",
      quantity: -1,
      issueId: id,
      movedOn: issuedOn,
    });
  const { reason: _, ...facts } = input;
  await recordAudit(actor, {
    action: "issue-protector",
    subjectKind: "protector-issue",
    subjectId: id,
    // Why only one was on offer may be a medical reason: it stands in its own row and nowhere else.
    values: { workerId: worker.id, assignmentId, ...facts, isReasonGiven: reason !== null },
  });
  await followFits(organizationId, { workerId: worker.id, modelId });
  return { id, replacedName };
}

async function check(
  actor: Actor,
  worker: Worker,
  today: string,
  input: IssueInput,
  stock: number | null,
): Promise<void> {
  const { modelId, size, fitTestId, issuedOn, reason, offeredModelIds } = input;
  const offered = await rows<{ id: string; kind: string; sizes: string[] }>(
    `SELECT m.id, m.kind, ARRAY(SELECT jsonb_array_elements_text(coalesce((
         SELECT r.data->'sizes' FROM protector_model_revisions r WHERE r.model_id = m.id AND r.effective_from <= CAST(:issuedOn AS date)
         ORDER BY r.effective_from DESC, r.number DESC LIMIT 1), '[]'))) AS sizes
     FROM protector_models m WHERE m.id IN (:ids) AND ${visible(protectorPolicy, actor, "m")}`,
    { ids: [...new Set([modelId, ...offeredModelIds])], issuedOn },
  );
  const model = offered.find(({ id }) => id === modelId);
  if (!model || offeredModelIds.some((id) => !offered.some((one) => one.id === id)))
    throw notFound();
  const issues: ProblemIssue[] = [];
  if (issuedOn > today) issues.push(issue(["issuedOn"], "in-the-future", { today }));
  if (size !== null && model.sizes.length > 0 && !model.sizes.includes(size))
    issues.push(issue(["size"], "size-unknown"));
  if (!offeredModelIds.includes(modelId))
    issues.push(issue(["offeredModelIds"], "issued-not-offered"));
  const fit = fitTestId === null ? null : await fitOf(actor, fitTestId);
  const asked = reasonAskedFor(
    offered.map(({ kind }) => kind),
    stock,
    fit,
  );
  if (reason === null && asked !== null) issues.push(issue(["reason"], asked));
  const bar = (await barsAtDesk(actor, worker, modelId)).issue;
  if (bar) issues.push(issue(["modelId"], barCode(bar)));
  if (fit && !isOfThis(fit, worker, input)) issues.push(issue(["fitTestId"], "fit-of-another"));
  if (fit && issuedOn < fit.testedOn)
    issues.push(issue(["issuedOn"], "before-its-fit", { testedOn: fit.testedOn }));
  if (issues.length > 0) throw unprocessable(issues);
}

interface FitBehind {
  workerId: string;
  modelId: string;
  size: string | null;
  testedOn: string;
  isVoid: boolean;
  hasPassed: boolean | null;
  needDb: number | null;
}

async function fitOf(actor: Actor, fitTestId: string): Promise<FitBehind> {
  const test = await row<FitBehind>(
    `SELECT f.worker_id AS "workerId", f.model_id AS "modelId", v.size, f.tested_on::text AS "testedOn", f.is_void AS "isVoid", ${pairPassed("v")} AS "hasPassed",
       v.need_db AS "needDb"
     FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id
     WHERE f.id = :fitTestId AND ${visible(fitPolicy, actor, "f")}`,
    { fitTestId },
  );
  if (!test) throw notFound();
  return test;
}

/** A fit test stands behind the issue only if it is this worker's, of this model and this size. */
const isOfThis = (fit: FitBehind, worker: Worker, { modelId, size }: IssueInput): boolean =>
  fit.workerId === worker.id &&
  fit.modelId === modelId &&
  !fit.isVoid &&
  (fit.size === null || size === null || fit.size === size);
