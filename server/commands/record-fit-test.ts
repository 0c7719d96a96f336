import { randomUUID } from "node:crypto";
import { fitRating, impossibleTrials } from "../../shared/acoustics/protection/fit-rating";
import type { FitTestChange, FitTestInput } from "../../shared/schemas/fit";
import type { ProblemIssue } from "../../shared/schemas/problem";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, row } from "../lib/db";
import { issue, notFound, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import type { FitTest } from "../models/fit";
import { Site } from "../models/site";
import type { Worker } from "../models/worker";
import { protectorPolicy } from "../policies";
import { barsAtDesk } from "../queries/barred";
import { barCode } from "./bar-code";
import { followFits } from "./follow-fits";
import { markDaysStale } from "./mark-days-stale";

/** What one revision says, whichever method it comes from. */
type Statement = Omit<FitTestInput, "modelId" | "testedOn">;
/** Whether the active part did its work on this worker; null: not checked. */
type ActivePassed = boolean | null;

/**
 * A fit test of a worker and a model: a head and its first revision, tried until an issue names it. The worker's row is
 * locked. The worker's days from that date on are computed anew.
 *
 * @throws AppError not-found, or invalid, as where it is not to be worn with what the worker wears beside it.
 */
export async function recordFitTest(
  actor: Actor,
  worker: Worker,
  { modelId, testedOn, ...statement }: FitTestInput,
  activePassed: ActivePassed = null,
): Promise<{ id: string }> {
  await check(actor, worker, modelId, testedOn, statement);
  const id = randomUUID();
  await execute(
    "INSERT INTO fit_tests (id, organization_id, site_id, worker_id, model_id, tested_on) VALUES ($1, $2, $3, $4, $5, $6)",
    [id, actor.organizationId, worker.siteId, worker.id, modelId, testedOn],
  );
  await addRevision(actor, { id, number: 1 }, statement, activePassed, null);
  await recordAudit(actor, {
    action: "record-fit-test",
    subjectKind: "fit-test",
    subjectId: id,
    values: { workerId: worker.id, modelId, testedOn, ...statement, activePassed },
  });
  await followChange(actor.organizationId, { workerId: worker.id, modelId, testedOn });
  return { id };
}

/**
 * The next revision of a fit test, whose head is locked and was held to the revision that the author saw. What an active
 * check found stays unless it is given anew.
 *
 * @throws AppError invalid.
 */
export async function correctFitTest(
  actor: Actor,
  test: FitTest,
  { reason, ...statement }: FitTestChange,
  activePassed?: ActivePassed,
): Promise<void> {
  const earlier = await currentRevision(test);
  const issues = await sizeIssues(test.modelId, test.testedOn, statement.size);
  if (issues.length > 0) throw unprocessable(issues);
  const number = test.revision + 1;
  await addRevision(
    actor,
    { id: test.id, number },
    statement,
    activePassed === undefined ? earlier.activePassed : activePassed,
    reason,
  );
  await recordAudit(actor, {
    action: "correct-fit-test",
    subjectKind: "fit-test",
    subjectId: test.id,
    values: {
      number,
      reason,
      ...statement,
      ...(activePassed === undefined ? {} : { activePassed }),
    },
  });
  await followChange(actor.organizationId, test);
}

/** Strikes a fit test out: it stays on record, with the reason as its last revision, and counts for nothing. */
export async function voidFitTest(actor: Actor, test: FitTest, reason: string): Promise<void> {
  const { activePassed, ...earlier } = await currentRevision(test);
  const number = test.revision + 1;
  await addRevision(actor, { id: test.id, number }, earlier, activePassed, reason);
  await execute("UPDATE fit_tests SET is_void = TRUE WHERE id = $1", [test.id]);
  await recordAudit(actor, {
    action: "void-fit-test",
    subjectKind: "fit-test",
    subjectId: test.id,
    values: { number, reason },
  });
  await followChange(actor.organizationId, test);
}

async function followChange(
  organizationId: string,
  { workerId, modelId, testedOn }: { workerId: string; modelId: string; testedOn: string },
): Promise<void> {
  await markDaysStale(organizationId, { workerId, fromDate: testedOn });
  await followFits(organizationId, { workerId, modelId });
}

async function currentRevision({
  id,
}: FitTest): Promise<Statement & { activePassed: ActivePassed }> {
  const found = await row<Statement & { activePassed: ActivePassed }>(
    `SELECT v.method, v.size, v.facts, v.confidence_pct AS "confidencePct", v.need_db AS "needDb", v.note, v.active_passed AS "activePassed"
     FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id WHERE f.id = :id`,
    { id },
  );
  if (!found) throw notFound();
  return found;
}

async function addRevision(
  actor: Actor,
  { id, number }: { id: string; number: number },
  statement: Statement,
  activePassed: ActivePassed,
  reason: string | null,
): Promise<void> {
  const { method, size, facts, confidencePct, needDb, note } = statement;
  const { leftDb, rightDb, parDb, hasPassed } = ratingOf(statement, activePassed);
  const revisionId = randomUUID();
  await execute(
    `INSERT INTO fit_test_revisions (id, organization_id, fit_test_id, number, method, size, facts, confidence_pct, left_db, right_db, par_db,
       need_db, has_passed, active_passed, note, reason, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7::jsonb, $8, $9, $10, $11, $12, $13, $14, $15, $16, $17)`,
    [
      revisionId,
      actor.organizationId,
      id,
      number,
      method,
      size,
      JSON.stringify(facts),
      confidencePct,
      leftDb,
      rightDb,
      parDb,
      needDb,
      hasPassed,
      activePassed,
      note,
      reason,
      actor.userId,
    ],
  );
  await execute("UPDATE fit_tests SET current_revision_id = $2, revision = $3 WHERE id = $1", [
    id,
    revisionId,
    number,
  ]);
}

async function check(
  actor: Actor,
  worker: Worker,
  modelId: string,
  testedOn: string,
  { size }: Statement,
): Promise<void> {
  const model = await row<{ isArchived: boolean }>(
    `SELECT m.is_archived AS "isArchived" FROM protector_models m WHERE m.id = :modelId AND ${visible(protectorPolicy, actor, "m")}`,
    { modelId },
  );
  if (!model) throw notFound();
  const site = await Site.findByPk(worker.siteId);
  const today = todayAt(site?.timeZone ?? "UTC");
  const issues: ProblemIssue[] = [
    ...dateIssues(["testedOn"], testedOn),
    ...(await sizeIssues(modelId, testedOn, size)),
  ];
  if (testedOn > today) issues.push(issue(["testedOn"], "in-the-future", { today }));
  if (testedOn < worker.hiredOn)
    issues.push(issue(["testedOn"], "before-hire", { hiredOn: worker.hiredOn }));
  if (worker.leftOn !== null && testedOn > worker.leftOn)
    issues.push(issue(["testedOn"], "after-leaving", { leftOn: worker.leftOn }));
  const { trial } = await barsAtDesk(actor, worker, modelId);
  if (trial) issues.push(issue(["modelId"], barCode(trial)));
  if (issues.length > 0) throw unprocessable(issues);
}

/** A size that the model's data of the day don't know, where they name sizes at all. */
async function sizeIssues(
  modelId: string,
  testedOn: string,
  size: string | null,
): Promise<ProblemIssue[]> {
  if (size === null) return [];
  const found = await row<{ sizes: string[] }>(
    `SELECT ARRAY(SELECT jsonb_array_elements_text(coalesce((
       SELECT r.data->'sizes' FROM protector_model_revisions r WHERE r.model_id = CAST(:modelId AS uuid) AND r.effective_from <= CAST(:testedOn AS date)
       ORDER BY r.effective_from DESC, r.number DESC LIMIT 1), '[]'))) AS sizes`,
    { modelId, testedOn },
  );
  const sizes = found?.sizes ?? [];
  return sizes.length > 0 && !sizes.includes(size) ? [issue(["size"], "size-unknown")] : [];
}

/**
 * What the trials come to, the weaker ear governing; nothing where only the active part was checked.
 *
 * @throws AppError invalid, where a trial is said to have more than the skull lets be reached.
 */
function ratingOf({ facts, confidencePct, needDb }: Statement, activePassed: ActivePassed) {
  const { leftDb, rightDb, methodSdDb } = facts;
  if (leftDb.length + rightDb.length === 0 && activePassed !== null) return NOT_RATED;
  const { rating, refusal } = fitRating({ leftDb, rightDb, methodSdDb, confidencePct, needDb });
  if (refusal) {
    if (refusal.code === "no-trial")
      throw unprocessable([issue(["facts", "leftDb"], refusal.code)]);
    throw unprocessable(
      impossibleTrials(facts).map(({ code, ...params }) =>
        issue(["facts", params.ear === "left" ? "leftDb" : "rightDb"], code, params),
      ),
    );
  }
  return {
    leftDb: rating.left?.parDb ?? null,
    rightDb: rating.right?.parDb ?? null,
    parDb: rating.parDb,
    hasPassed: rating.hasPassed,
  };
}

const NOT_RATED = { leftDb: null, rightDb: null, parDb: null, hasPassed: null } as const;
