import type { OutingReturn, OutingUndo } from "../../shared/schemas/outing";
import { recordAudit } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { AppError } from "../lib/errors";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import type { Run } from "../models/instrument";
import { leastRunMin } from "../queries/outings";
import { checkInstants } from "./check-instants";
import { requireReadings } from "./record-outing";
import {
  doubtsOf,
  insertRunRevision,
  reasonFor,
  requireFreeInstrument,
  requireKeptReason,
} from "./record-run";

interface Start {
  outAt: string;
  checkBeforeDb: number | null;
  keptReason: string | null;
  doubts: string[];
}

async function startOf(run: Run): Promise<Start> {
  if (!run.isOut || run.isVoid) throw new AppError("wrong-state", 409);
  return only(
    await rows<Start>(
      `SELECT ${isoInstant("v.out_at")} AS "outAt", v.check_before_db AS "checkBeforeDb", v.kept_reason AS "keptReason", v.doubts
       FROM run_revisions v WHERE v.id = :id`,
      { id: run.currentRevisionId },
    ),
  );
}

/**
 * An instrument is back: the run's second revision has its length and what was read. What speaks against the run is kept
 * with a reason, or the run is discarded with one, and stays on record.
 *
 * @throws AppError wrong-state where it is back already; invalid with every doubt that nobody has given a reason for.
 */
export async function endOuting(
  actor: Actor,
  run: Run,
  site: { timeZone: string },
  input: OutingReturn,
  entryId: string,
): Promise<void> {
  const start = await startOf(run);
  checkInstants(site, { date: run.date, from: start.outAt, fromField: "outAt", to: input.backAt });
  requireReadings([], input.readings);
  const facts = {
    checkBeforeDb: start.checkBeforeDb,
    checkAfterDb: input.checkAfterDb,
    durationMin: (Date.parse(input.backAt) - Date.parse(start.outAt)) / 60_000,
    covers: input.covers,
  };
  const { instrumentId, workerId, shiftId, date } = run;
  const span = { from: start.outAt, to: input.backAt };
  const doubts = await doubtsOf({ instrumentId, workerId, shiftId, date, span }, facts, {
    leastMin: await leastRunMin(run),
    shown: input.doubts,
    needsChecks: true,
  });
  const codes = doubts.map(({ code }) => code);
  // What was said in the morning holds for what was known in the morning, and for nothing that came to light since.
  const isNothingNew = codes.every((code) => start.doubts.includes(code));
  const keptReason = input.keptReason ?? (isNothingNew ? start.keptReason : null);
  const isDiscarded = input.discardReason !== null;
  if (!isDiscarded) requireKeptReason(doubts, keptReason);
  const number = run.revision + 1;
  const revisionId = await insertRunRevision(
    actor,
    run.id,
    number,
    {
      ...facts,
      keptReason: reasonFor(doubts, keptReason),
      unusual: input.unusual,
      doubts: codes,
      readings: input.readings,
      outAt: start.outAt,
      backAt: input.backAt,
    },
    { reason: input.discardReason, isVoid: isDiscarded, isReturn: true, entryId },
  );
  await execute(
    `UPDATE runs SET revision = $2, current_revision_id = $3, is_out = FALSE, is_void = $4, span = tstzrange(lower(span), $5::timestamptz) WHERE id = $1`,
    [run.id, number, revisionId, isDiscarded, input.backAt],
  );
  await requireFreeInstrument(actor, run.id);
  await recordAudit(actor, {
    action: isDiscarded ? "discard-outing" : "end-outing",
    subjectKind: "run",
    subjectId: run.id,
    values: { number, ...input },
  });
}

/** It never went out: the run is struck, and the instrument free again. */
export async function undoOuting(actor: Actor, run: Run, { reason }: OutingUndo): Promise<void> {
  const start = await startOf(run);
  const number = run.revision + 1;
  const revisionId = await insertRunRevision(
    actor,
    run.id,
    number,
    {
      durationMin: null,
      checkBeforeDb: start.checkBeforeDb,
      checkAfterDb: null,
      covers: "part",
      keptReason: start.keptReason,
      unusual: null,
      doubts: start.doubts,
      readings: [],
      outAt: start.outAt,
    },
    { reason, isVoid: true },
  );
  await execute(
    "UPDATE runs SET revision = $2, current_revision_id = $3, is_void = TRUE WHERE id = $1",
    [run.id, number, revisionId],
  );
  await recordAudit(actor, {
    action: "undo-outing",
    subjectKind: "run",
    subjectId: run.id,
    values: { number, reason },
  });
}
