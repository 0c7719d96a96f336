import { randomUUID } from "node:crypto";
import type { FindingState } from "../../shared/schemas/finding";
import { recordAudit, recordAuditMany } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { fitDues } from "../queries/fit-dues";
import { ratesPair } from "../queries/own-attenuation";

/** What the program itself closes these findings for; whatever else is there, a person wrote. */
const OWN_REASONS = [
  "refitted",
  "other-issued",
  "no-longer-worn",
  "evidence-gone",
  "fit-tested",
  "no-longer-due",
];
const ownReasons = OWN_REASONS.map((reason) => `'${reason}'`).join(", ");

/** When a fit that failed has to be mended, where the site states nothing. Common practice, no source. */
const MEND_WITHIN_DAYS = 1;

interface Standing {
  modelId: string;
  protector: string;
  siteId: string;
  /** The latest test that says whether it fits. */
  test: {
    id: string;
    testedOn: string;
    parDb: number | null;
    needDb: number | null;
    /** Null: nothing had to come off any more. */
    hasPassed: boolean | null;
  } | null;
  /** Another model that fits was handed out since, and this one is no longer worn. */
  isAnswered: boolean;
  /** It was worn after the test, and is no longer or for the last day, without another one that fits. */
  isLaidDown: boolean;
  open: { id: string; state: FindingState; testId: string } | null;
  closed: { id: string; testId: string; isByPerson: boolean; wasWithdrawn: boolean } | null;
}

/**
 * Holds the findings on a worker's fits to what the tests and issues show now: one open finding per model that does not
 * fit, closed by a refit, by another model that fits, or because the model is worn no longer; and those of tests that
 * are due. Called after every change of a test, an issue or an assignment, in its transaction.
 */
export async function followFits(
  organizationId: string,
  { workerId, modelId }: { workerId: string; modelId: string },
): Promise<void> {
  // Two tests of one worker at once take their turns.
  await rows("SELECT 1 FROM workers WHERE id = :workerId FOR UPDATE", { workerId });
  for (const standing of await standings(workerId, modelId)) {
    if (standing.test?.hasPassed === false && !standing.isAnswered && !standing.isLaidDown)
      await openFailed(organizationId, workerId, standing, standing.test);
    else if (standing.open) await closeFailed(organizationId, standing, standing.open);
  }
  await closeFitDues(organizationId, workerId);
  await openFitDues(organizationId, workerId);
}

/** The model in question and those that are open: what is handed out may answer another. */
function standings(workerId: string, modelId: string): Promise<Standing[]> {
  const ofModel = "a.worker_id = w.id AND m.id IN (a.inner_model_id, a.outer_model_id)";
  const isWorn = (until: string) =>
    `EXISTS (SELECT 1 FROM assignments a WHERE ${ofModel} AND coalesce(upper(a.valid) > ${until}, TRUE))`;
  return rows<Standing>(
    `SELECT m.id AS "modelId", m.name AS protector, w.site_id AS "siteId", to_json(t) AS test, to_json(o) AS open, to_json(c) AS closed,
       EXISTS (SELECT 1 FROM protector_issues i JOIN fit_tests f ON f.id = i.fit_test_id AND NOT f.is_void
               JOIN fit_test_revisions v ON v.id = f.current_revision_id AND ${ratesPair("v")} AND (v.has_passed OR v.need_db <= 0)
               WHERE i.worker_id = w.id AND i.model_id <> m.id AND i.ended_on IS NULL AND i.issued_on >= t."testedOn")
       AND NOT ${isWorn("current_date")} AS "isAnswered",
       EXISTS (SELECT 1 FROM assignments a WHERE ${ofModel} AND upper(a.valid) > t."testedOn") AND NOT ${isWorn("current_date + 1")} AS "isLaidDown"
     FROM workers w JOIN protector_models m ON m.id = CAST(:modelId AS uuid) OR CAST(m.id AS text) IN (
       SELECT x.use_key FROM findings x WHERE x.worker_id = w.id AND x.kind = 'fit-failed' AND x.state <> 'closed')
     LEFT JOIN LATERAL (
       SELECT f.id, f.tested_on AS "testedOn", v.par_db AS "parDb", v.need_db AS "needDb", v.has_passed AS "hasPassed"
       FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id
       WHERE f.worker_id = w.id AND f.model_id = m.id AND NOT f.is_void AND ${ratesPair("v")} AND (v.has_passed IS NOT NULL OR v.need_db <= 0)
       ORDER BY f.tested_on DESC, f.created_at DESC LIMIT 1) t ON TRUE
     LEFT JOIN LATERAL (
       SELECT x.id, x.state, x.facts->>'fitTestId' AS "testId" FROM findings x
       WHERE x.worker_id = w.id AND x.kind = 'fit-failed' AND x.use_key = CAST(m.id AS text) AND x.state <> 'closed') o ON TRUE
     LEFT JOIN LATERAL (
       SELECT x.id, x.facts->>'fitTestId' AS "testId", x.closing_reason NOT IN (${ownReasons}) AS "isByPerson",
         x.closing_reason = 'evidence-gone' AS "wasWithdrawn" FROM findings x
       WHERE x.worker_id = w.id AND x.kind = 'fit-failed' AND x.use_key = CAST(m.id AS text) AND x.state = 'closed'
       ORDER BY x.opened_at DESC LIMIT 1) c ON TRUE
     WHERE w.id = :workerId`,
    { workerId, modelId },
  );
}

async function openFailed(
  organizationId: string,
  workerId: string,
  { modelId, protector, siteId, open, closed }: Standing,
  { id: fitTestId, testedOn, parDb, needDb }: NonNullable<Standing["test"]>,
): Promise<void> {
  const facts = JSON.stringify({ protector, parDb, needDb, fitTestId, modelId });
  if (open) {
    await execute(
      `UPDATE findings SET facts = $2::jsonb, last_date = greatest(first_date, $3::date), revision = revision + 1
       WHERE id = $1 AND (facts IS DISTINCT FROM $2::jsonb)`,
      [open.id, facts, testedOn],
    );
    return;
  }
  // Somebody looked at this very test and settled it.
  if (closed?.isByPerson && closed.testId === fitTestId) return;
  const previousId = closed && !closed.wasWithdrawn ? closed.id : null;
  const state: FindingState = previousId ? "came-back" : "new";
  const id = randomUUID();
  await execute(
    `INSERT INTO findings (id, organization_id, site_id, worker_id, kind, use_key, state, facts, first_date, last_date, days_count, previous_id, due_on)
     SELECT $1, $2, $3::uuid, $4, 'fit-failed', $5, $6, $7::jsonb, $8::date, $8::date, 0, $9, $8::date + coalesce(s.fit_after_fail_days, ${MEND_WITHIN_DAYS})
     FROM sites s WHERE s.id = $3::uuid`,
    [id, organizationId, siteId, workerId, modelId, state, facts, testedOn, previousId],
  );
  await execute(
    "INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state) VALUES ($1, $2, 'state', $3, $4)",
    [organizationId, id, previousId ? "closed" : null, state],
  );
  await recordAudit(
    { organizationId },
    {
      action: "open-finding",
      subjectKind: "finding",
      subjectId: id,
      values: { kind: "fit-failed", criterion: "", date: testedOn },
    },
  );
}

/** A refit, another device, or that it is worn no longer answers it whatever its state; evidence that was taken back closes only what nobody took up. */
async function closeFailed(
  organizationId: string,
  { test, isAnswered, isLaidDown }: Standing,
  { id, state, testId }: NonNullable<Standing["open"]>,
): Promise<void> {
  const isWithdrawn = test === null || (test.hasPassed !== false && test.id === testId);
  if (isWithdrawn && state !== "new" && state !== "came-back") {
    const noted = await execute(
      `INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, text)
       SELECT $1, $2, 'evidence-gone', $3, $3, current_date::text
       WHERE NOT EXISTS (SELECT 1 FROM finding_steps WHERE finding_id = $2 AND kind = 'evidence-gone')`,
      [organizationId, id, state],
    );
    if (noted > 0) await execute("UPDATE findings SET revision = revision + 1 WHERE id = $1", [id]);
    return;
  }
  const reason = isWithdrawn
    ? "evidence-gone"
    : test.hasPassed !== false
      ? "refitted"
      : isAnswered || !isLaidDown
        ? "other-issued"
        : "no-longer-worn";
  await execute(
    "UPDATE findings SET state = 'closed', closed_on = current_date, closing_reason = $2, revision = revision + 1 WHERE id = $1",
    [id, reason],
  );
  await execute(
    "INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, text) VALUES ($1, $2, $3, $4, 'closed', $5)",
    [organizationId, id, isWithdrawn ? "evidence-gone" : "state", state, reason],
  );
  await recordAudit(
    { organizationId },
    {
      action: isWithdrawn ? "withdraw-finding" : "close-finding",
      subjectKind: "finding",
      subjectId: id,
      values: { from: state, to: "closed", text: reason },
    },
  );
}

/** Closes what is open on fits of devices whose assignment has run out by itself since. */
export async function closeLaidDownFits(organizationId: string): Promise<void> {
  const open = await rows<{ workerId: string; modelId: string }>(
    `SELECT f.worker_id AS "workerId", f.use_key AS "modelId" FROM findings f
     WHERE f.organization_id = :organizationId AND f.kind = 'fit-failed' AND f.state <> 'closed'
       AND EXISTS (SELECT 1 FROM assignments a WHERE a.worker_id = f.worker_id AND f.use_key IN (a.inner_model_id::text, a.outer_model_id::text)
         AND upper(a.valid) <= current_date + 1 AND upper(a.valid) > f.last_date)`,
    { organizationId },
  );
  for (const of of open) await followFits(organizationId, of);
}

/** One open finding per worker and model whose test is due by the site's policy; of one worker, or of everybody. */
export async function openFitDues(
  organizationId: string,
  workerId: string | null = null,
): Promise<void> {
  const opened = await rows<{ id: string; dueOn: string }>(
    `INSERT INTO findings (organization_id, site_id, worker_id, kind, use_key, state, facts, first_date, last_date, days_count, due_on)
     SELECT d.organization_id, d.site_id, d.worker_id, 'fit-due', CAST(d.model_id AS text), 'new',
       jsonb_build_object('protector', d.protector, 'testedOn', d.tested_on, 'dueOn', d.due_on, 'modelId', d.model_id),
       current_date, current_date, 0, d.due_on
     FROM (${fitDues("(CAST(:workerId AS uuid) IS NULL OR a.worker_id = :workerId)")}) d
     WHERE d.organization_id = :organizationId AND d.due_on <= current_date
       -- Somebody has settled it for this date.
       AND NOT EXISTS (SELECT 1 FROM findings f WHERE f.worker_id = d.worker_id AND f.kind = 'fit-due' AND f.use_key = CAST(d.model_id AS text)
         AND (f.state <> 'closed' OR (f.facts->>'dueOn' = CAST(d.due_on AS text) AND f.closing_reason NOT IN (${ownReasons}))))
     ON CONFLICT DO NOTHING RETURNING id, due_on::text AS "dueOn"`,
    { organizationId, workerId },
  );
  if (opened.length === 0) return;
  await execute(
    "INSERT INTO finding_steps (organization_id, finding_id, kind, to_state) SELECT $1, x, 'state', 'new' FROM unnest($2::uuid[]) x",
    [organizationId, opened.map(({ id }) => id)],
  );
  await recordAuditMany(
    { organizationId },
    opened.map(({ id, dueOn }) => ({
      action: "open-finding",
      subjectKind: "finding",
      subjectId: id,
      values: { kind: "fit-due", criterion: "", date: dueOn },
    })),
  );
}

/** Closes those whose test was done, or is no longer asked for. */
export async function closeFitDues(
  organizationId: string,
  workerId: string | null = null,
): Promise<void> {
  const ofWorker = "(CAST(:workerId AS uuid) IS NULL OR f.worker_id = :workerId)";
  const due = await rows<{ id: string; state: FindingState; reason: string }>(
    `WITH open AS (SELECT f.* FROM findings f WHERE f.organization_id = :organizationId AND f.kind = 'fit-due' AND f.state <> 'closed' AND ${ofWorker})
     SELECT f.id, f.state, CASE WHEN EXISTS (SELECT 1 FROM fit_tests t WHERE t.worker_id = f.worker_id AND CAST(t.model_id AS text) = f.use_key
         AND NOT t.is_void AND t.created_at >= f.opened_at) THEN 'fit-tested' ELSE 'no-longer-due' END AS reason
     FROM open f WHERE NOT EXISTS (SELECT 1 FROM (${fitDues("a.worker_id IN (SELECT o.worker_id FROM open o)")}) d
       WHERE d.worker_id = f.worker_id AND CAST(d.model_id AS text) = f.use_key AND d.due_on <= current_date)`,
    { organizationId, workerId },
  );
  if (due.length === 0) return;
  const json = JSON.stringify(due);
  await execute(
    `UPDATE findings f SET state = 'closed', closed_on = current_date, closing_reason = x.reason, revision = f.revision + 1
     FROM jsonb_to_recordset($1::jsonb) AS x(id uuid, reason text) WHERE f.id = x.id`,
    [json],
  );
  await execute(
    `INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, text)
     SELECT $1, x.id, 'state', x.state, 'closed', x.reason FROM jsonb_to_recordset($2::jsonb) AS x(id uuid, state text, reason text)`,
    [organizationId, json],
  );
  await recordAuditMany(
    { organizationId },
    due.map(({ id, state, reason }) => ({
      action: "close-finding",
      subjectKind: "finding",
      subjectId: id,
      values: { from: state, to: "closed", text: reason },
    })),
  );
}
