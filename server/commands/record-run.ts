import { randomUUID } from "node:crypto";
import type { RunCorrection, RunInput } from "../../shared/schemas/run";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import type { Run } from "../models/instrument";

type RunFacts = Omit<RunInput, "instrumentId" | "workerId" | "date" | "shiftId">;

async function insertRevision(
  actor: Actor,
  runId: string,
  number: number,
  facts: RunFacts,
  more: { reason: string | null; isVoid: boolean; entryId: string | null },
): Promise<string> {
  const id = randomUUID();
  await execute(
    `INSERT INTO run_revisions (id, organization_id, run_id, number, duration_min, check_before_db, check_after_db, covers, kept_reason, unusual, is_void, reason, entry_id, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12, $13, $14)`,
    [
      id,
      actor.organizationId,
      runId,
      number,
      facts.durationMin,
      facts.checkBeforeDb,
      facts.checkAfterDb,
      facts.covers,
      facts.keptReason,
      facts.unusual,
      more.isVoid,
      more.reason,
      more.entryId,
      actor.userId,
    ],
  );
  await execute(
    `INSERT INTO readings (organization_id, run_id, run_revision_id, position, criterion_level_db, exchange_rate_db, threshold_db, weighting, response,
       dose_pct, average_db, lceq_db, las_max_db, peak_db, peak_weighting)
     SELECT $1, $2, $3, x.position, (x.settings->>'criterionLevelDb')::float8, (x.settings->>'exchangeRateDb')::float8, (x.settings->>'thresholdDb')::float8,
       x.settings->>'weighting', x.settings->>'response', x."dosePct", x."averageDb", x."lceqDb", x."lasMaxDb", (x.peak->>'levelDb')::float8, x.peak->>'weighting'
     FROM jsonb_to_recordset($4::jsonb) AS x(position int, settings jsonb, "dosePct" float8, "averageDb" float8, "lceqDb" float8, "lasMaxDb" float8, peak jsonb)`,
    [
      actor.organizationId,
      runId,
      id,
      JSON.stringify(
        facts.readings.map((reading, position) => ({
          ...reading,
          position,
          peak: reading.peak ?? {},
        })),
      ),
    ],
  );
  return id;
}

/**
 * A new run with its readings. Head and revision name each other: both foreign keys are checked at the end of the
 * transaction. The day's recomputation is the caller's.
 */
export async function recordRun(
  actor: Actor,
  siteId: string,
  input: RunInput,
  entryId: string | null = null,
): Promise<string> {
  const runId = randomUUID();
  const revisionId = await insertRevision(actor, runId, 1, input, {
    reason: null,
    isVoid: false,
    entryId,
  });
  await execute(
    "INSERT INTO runs (id, organization_id, site_id, instrument_id, worker_id, shift_id, date, current_revision_id) VALUES ($1, $2, $3, $4, $5, $6, $7, $8)",
    [
      runId,
      actor.organizationId,
      siteId,
      input.instrumentId,
      input.workerId,
      input.shiftId,
      input.date,
      revisionId,
    ],
  );
  await recordAudit(actor, {
    action: "record-run",
    subjectKind: "run",
    subjectId: runId,
    values: { ...input },
  });
  return runId;
}

/** The next revision of a run: what was recorded stays, with the reason why it no longer counts. */
export async function correctRun(
  actor: Actor,
  run: Run,
  input: RunCorrection,
  entryId: string | null = null,
): Promise<void> {
  const { reason, isVoid, ...facts } = input;
  const number = run.revision + 1;
  const revisionId = await insertRevision(actor, run.id, number, facts, {
    reason,
    isVoid,
    entryId,
  });
  await execute(
    "UPDATE runs SET revision = $2, current_revision_id = $3, is_void = $4 WHERE id = $1",
    [run.id, number, revisionId, isVoid],
  );
  await recordAudit(actor, {
    action: isVoid ? "void-run" : "correct-run",
    subjectKind: "run",
    subjectId: run.id,
    values: { number, ...input },
  });
}
