import { randomUUID } from "node:crypto";
import type { RunCorrection, RunInput, StoredReading } from "../../shared/schemas/run";
import { findRunDoubts, type RunDoubt } from "../../shared/schemas/run-doubts";
import type { StoredLeftOut } from "../histories/left-out";
import { recordAudit } from "../lib/audit";
import { execute, row, rows } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import type { Run } from "../models/instrument";
import { calibrationOn } from "../queries/calibrations";
import { type FacingRun, facedShift, facedShifts } from "../queries/faced-shifts";
import { leastRunMin } from "../queries/outings";

type GivenReading = RunInput["readings"][number] &
  Partial<Pick<StoredReading, "octaveBandsDb" | "source">>;

/** What one revision of a run states. */
export interface RunRevisionFacts {
  /** Null while it is out. */
  durationMin: number | null;
  checkBeforeDb: number | null;
  checkAfterDb: number | null;
  covers: RunInput["covers"];
  keptReason: string | null;
  unusual: string | null;
  doubts: readonly string[];
  readings: readonly GivenReading[];
  /** Of its history. Undefined: as the revision before says. */
  leftOut?: StoredLeftOut | null;
  /** ISO instants, where the run names them. */
  outAt?: string | null;
  backAt?: string | null;
}

interface RevisionKind {
  reason: string | null;
  isVoid?: boolean;
  isReturn?: boolean;
  entryId?: string | null;
}

/** Adds a revision with its readings and gives its id; that the head points at it is the caller's to do. */
export async function insertRunRevision(
  actor: Pick<Actor, "organizationId" | "userId">,
  runId: string,
  number: number,
  facts: RunRevisionFacts,
  { reason, isVoid = false, isReturn = false, entryId = null }: RevisionKind,
): Promise<string> {
  const id = randomUUID();
  await execute(
    `INSERT INTO run_revisions (id, organization_id, run_id, number, out_at, back_at, duration_min, check_before_db, check_after_db, covers, kept_reason, unusual,
       doubts, is_void, is_return, reason, entry_id, author_id, left_out)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12, $13::text[], $14, $15, $16, $17, $18,
       CASE WHEN $19 THEN $20::jsonb ELSE (SELECT b.left_out FROM run_revisions b WHERE b.run_id = $3 AND b.number = $4 - 1) END)`,
    [
      id,
      actor.organizationId,
      runId,
      number,
      facts.outAt ?? null,
      facts.backAt ?? null,
      facts.durationMin,
      facts.checkBeforeDb,
      facts.checkAfterDb,
      facts.covers,
      facts.keptReason,
      facts.unusual,
      facts.doubts,
      isVoid,
      isReturn,
      reason,
      entryId,
      actor.userId,
      facts.leftOut !== undefined,
      facts.leftOut ? JSON.stringify(facts.leftOut) : null,
    ],
  );
  await execute(
    `INSERT INTO readings (organization_id, run_id, run_revision_id, position, criterion_level_db, exchange_rate_db, threshold_db, weighting, response,
       dose_pct, average_db, lceq_db, las_max_db, peak_db, peak_weighting, octave_bands_db, source)
     SELECT $1, $2, $3, x.position, (x.settings->>'criterionLevelDb')::float8, (x.settings->>'exchangeRateDb')::float8, (x.settings->>'thresholdDb')::float8,
       x.settings->>'weighting', x.settings->>'response', x."dosePct", x."averageDb", x."lceqDb", x."lasMaxDb", (x.peak->>'levelDb')::float8, x.peak->>'weighting',
       x."octaveBandsDb", x.source
     FROM jsonb_to_recordset($4::jsonb) AS x(position int, settings jsonb, "dosePct" float8, "averageDb" float8, "lceqDb" float8, "lasMaxDb" float8, peak jsonb,
       "octaveBandsDb" float8[], source text)`,
    [
      actor.organizationId,
      runId,
      id,
      JSON.stringify(
        facts.readings.map((reading, position) => ({
          ...reading,
          position,
          peak: reading.peak ?? {},
          octaveBandsDb: reading.octaveBandsDb ?? null,
          source: reading.source ?? "instrument",
        })),
      ),
    ],
  );
  return id;
}

/** What speaks against a run, by its instrument's calibrations and its worker's shift on its date, and by its own facts. */
export async function doubtsOf(
  run: FacingRun & { instrumentId: string },
  facts: Pick<RunRevisionFacts, "checkBeforeDb" | "checkAfterDb" | "durationMin" | "covers">,
  more: {
    leastMin?: number | null;
    shown?: readonly ("clipped" | "under-range")[];
    needsChecks?: boolean;
    leftOut?: StoredLeftOut | null;
  } = {},
): Promise<RunDoubt[]> {
  const { checkBeforeDb, checkAfterDb, durationMin, covers } = facts;
  const { leastMin = null, shown = [], needsChecks = false, leftOut = null } = more;
  const isOfDay = covers !== "part" && run.workerId !== null;
  return findRunDoubts({
    checkBeforeDb,
    checkAfterDb,
    date: run.date,
    calibration: await calibrationOn(run.instrumentId, run.date),
    durationMin,
    leastMin,
    needsChecks,
    covers,
    shift: isOfDay ? await facedShift(run) : null,
    leftOut: leftOut && durationMin !== null ? await leftOutOf(run, leftOut, durationMin) : null,
    shown,
  });
}

/** A run's minutes are those that count, unless an instrument's own figures stand beside its history's. */
export async function leftOutOf(run: FacingRun, leftOut: StoredLeftOut, durationMin: number) {
  const shifts = await facedShifts(
    leftOut.spans.map(([from, to]) => ({ ...run, span: { from, to } })),
  );
  const minutes = leftOut.spans.reduce(
    (sum, [from, to], at) =>
      sum + (shifts[at]?.insideMin ?? (Date.parse(to) - Date.parse(from)) / 60_000),
    0,
  );
  const isCountedOnly = Math.abs(durationMin - leftOut.countedMin) < SAME_MIN;
  return { minutes, isKnown: leftOut.how !== "unknown", isInDuration: !isCountedOnly };
}

/** A length that was typed is whole minutes. */
const SAME_MIN = 1;

/** The reason why a run is kept goes with its doubts: without one there is nothing to be kept in spite of. */
export const reasonFor = (doubts: readonly unknown[], keptReason: string | null): string | null =>
  doubts.length > 0 ? keptReason : null;

/**
 * With a doubt a run counts only if somebody says why it is kept.
 *
 * @throws AppError invalid, which names every doubt.
 */
export function requireKeptReason(doubts: readonly RunDoubt[], keptReason: string | null): void {
  if (keptReason !== null || doubts.length === 0) return;
  throw unprocessable(doubts.map(({ code, params }) => issue(["keptReason"], code, { ...params })));
}

/** Where a run is known by its two instants, its instrument is nowhere else between them. */
export interface RunPlace {
  siteId: string;
  instrumentId: string;
  workerId: string | null;
  areaId?: string | null;
  shiftId?: string | null;
  surveyId?: string | null;
  taskId?: string | null;
  place?: string | null;
  date: string;
  isOut?: boolean;
  /** ISO instants; the end is null while it is out. */
  span?: { from: string; to: string | null } | null;
}

/**
 * Asks at once whether the instrument was anywhere else, and not when everything else is done: a commit can't be refused
 * well.
 *
 * @throws AppError instruments-overlap, with the times of the other run, and the run itself where the actor may see it.
 */
export async function requireFreeInstrument(
  actor: Pick<Actor, "isAt">,
  runId: string,
): Promise<void> {
  const other = await row<{ id: string; siteId: string; from: string; to: string | null }>(
    `SELECT o.id, o.site_id AS "siteId", ${isoInstant("lower(o.span)")} AS "from", ${isoInstant("upper(o.span)")} AS "to"
     FROM runs r JOIN runs o ON o.instrument_id = r.instrument_id AND o.id <> r.id AND NOT o.is_void AND o.span && r.span
     WHERE r.id = :runId AND NOT r.is_void ORDER BY lower(o.span) LIMIT 1`,
    { runId },
  );
  if (other) {
    const { id, siteId, from, to } = other;
    const times: Record<string, string> = to === null ? { from } : { from, to };
    const isTheirs = actor.isAt(siteId, "officer", "auditor");
    throw new AppError("instruments-overlap", 409, times, [], isTheirs ? { runId: id } : {});
  }
  // Another transaction may have been first.
  await execute("SET CONSTRAINTS runs_overlap IMMEDIATE");
}

/** Head and first revision, which name each other: both foreign keys are checked at the end of the transaction. */
export async function insertRun(
  actor: Pick<Actor, "organizationId" | "userId" | "isAt">,
  head: RunPlace,
  facts: RunRevisionFacts,
  entryId: string | null = null,
): Promise<string> {
  const runId = randomUUID();
  const { from, to } = head.span ?? { from: null, to: null };
  const revisionId = await insertRunRevision(
    actor,
    runId,
    1,
    { ...facts, outAt: from, backAt: to },
    { reason: null, entryId },
  );
  await execute(
    `INSERT INTO runs (id, organization_id, site_id, instrument_id, worker_id, area_id, shift_id, survey_id, task_id, place, date, is_out, span, current_revision_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12,
       CASE WHEN $13::timestamptz IS NOT NULL THEN tstzrange($13::timestamptz, $14::timestamptz) END, $15)`,
    [
      runId,
      actor.organizationId,
      head.siteId,
      head.instrumentId,
      head.workerId,
      head.areaId ?? null,
      head.shiftId ?? null,
      head.surveyId ?? null,
      head.taskId ?? null,
      head.place ?? null,
      head.date,
      head.isOut ?? false,
      from,
      to,
      revisionId,
    ],
  );
  if (head.span) await requireFreeInstrument(actor, runId);
  return runId;
}

/** A new run with its readings. The day's recomputation is the caller's. */
export async function recordRun(
  actor: Actor,
  siteId: string,
  input: RunInput,
  entryId: string | null = null,
): Promise<string> {
  const { instrumentId, workerId, shiftId, date, ...facts } = input;
  const doubts = await doubtsOf(input, facts);
  requireKeptReason(doubts, facts.keptReason);
  const runId = await insertRun(
    actor,
    { siteId, instrumentId, workerId, shiftId, date },
    { ...facts, doubts: doubts.map(({ code }) => code) },
    entryId,
  );
  await recordAudit(actor, {
    action: "record-run",
    subjectKind: "run",
    subjectId: runId,
    values: { ...input },
  });
  return runId;
}

/**
 * The next revision of a run: what was recorded stays, with the reason why it no longer counts. In the grid of a day only
 * its length is set against its shift, for that is what stands there.
 */
export async function correctRun(
  actor: Actor,
  run: Run,
  input: RunCorrection,
  entryId: string | null = null,
  { isInGrid = false }: { isInGrid?: boolean } = {},
): Promise<void> {
  const { reason, isVoid, ...facts } = input;
  const number = run.revision + 1;
  const before = await readingsOf(run.currentRevisionId);
  const { instrumentId, workerId, date, shiftId } = run;
  const span = isInGrid || before.outAt === null ? null : { from: before.outAt, to: before.backAt };
  const doubts = await doubtsOf({ instrumentId, workerId, date, shiftId, span }, facts, {
    leastMin: await leastRunMin(run),
    shown: before.shown,
    needsChecks: run.taskId !== null || before.neededChecks,
    leftOut: before.leftOut,
  });
  if (!isVoid) requireKeptReason(doubts, facts.keptReason);
  const revisionId = await insertRunRevision(
    actor,
    run.id,
    number,
    {
      ...facts,
      doubts: doubts.map(({ code }) => code),
      outAt: before.outAt,
      backAt: before.backAt,
      readings: facts.readings.map((reading) => withOrigin(reading, before.readings)),
    },
    { reason, isVoid, entryId },
  );
  await execute(
    "UPDATE runs SET revision = $2, current_revision_id = $3, is_void = $4 WHERE id = $1",
    [run.id, number, revisionId, isVoid],
  );
  // A history is what its run logged: it counts as long as the run does, and its file can come in again after that.
  await execute("UPDATE time_histories SET is_void = $2 WHERE run_id = $1 AND is_void <> $2", [
    run.id,
    isVoid,
  ]);
  await recordAudit(actor, {
    action: isVoid ? "void-run" : "correct-run",
    subjectKind: "run",
    subjectId: run.id,
    values: { number, ...input },
  });
}

interface Before {
  /** What its instrument showed is no figure that a correction could take back. */
  shown: ("clipped" | "under-range")[];
  /** Its field checks were asked for, or are there. */
  neededChecks: boolean;
  leftOut: StoredLeftOut | null;
  outAt: string | null;
  backAt: string | null;
  readings: StoredReading[];
}

async function readingsOf(revisionId: string): Promise<Before> {
  return only(
    await rows<Before>(
      `SELECT ARRAY(SELECT d FROM unnest(v.doubts) d WHERE d IN ('clipped', 'under-range')) AS shown,
         'field-check-missing' = ANY (v.doubts) OR v.check_before_db IS NOT NULL AS "neededChecks", v.left_out AS "leftOut",
         ${isoInstant("v.out_at")} AS "outAt", ${isoInstant("v.back_at")} AS "backAt",
         coalesce((SELECT json_agg(json_build_object(
           'settings', json_build_object('criterionLevelDb', g.criterion_level_db, 'exchangeRateDb', g.exchange_rate_db, 'thresholdDb', g.threshold_db,
             'weighting', g.weighting, 'response', g.response),
           'dosePct', g.dose_pct, 'averageDb', g.average_db, 'octaveBandsDb', g.octave_bands_db, 'source', g.source))
           FROM readings g WHERE g.run_revision_id = v.id), '[]') AS readings
       FROM run_revisions v WHERE v.id = :revisionId`,
      { revisionId },
    ),
  );
}

/** A correction that leaves a reading's figures alone leaves its spectrum and where it came from, too. */
function withOrigin(reading: GivenReading, before: readonly StoredReading[]): GivenReading {
  const earlier = before.find(
    ({ settings, averageDb, dosePct }) =>
      (Object.keys(settings) as (keyof typeof settings)[]).every(
        (name) => settings[name] === reading.settings[name],
      ) &&
      averageDb === reading.averageDb &&
      dosePct === reading.dosePct,
  );
  return earlier
    ? { ...reading, octaveBandsDb: earlier.octaveBandsDb, source: earlier.source }
    : reading;
}
