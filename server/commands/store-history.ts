import { randomUUID } from "node:crypto";
import type { HistoryMapping, HistoryStoreOrder } from "../../shared/schemas/history";
import { historyReadings } from "../histories/history-readings";
import type { LevelsReply } from "../histories/history-worker";
import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import type { Actor } from "../lib/policy";
import { runOfImport } from "../queries/history-imports";
import type { LabelledSettings } from "../queries/meter-settings";
import { doubtsOfImport } from "./order-history-reading";
import { recomputeRunDay } from "./recompute-run-day";
import { insertRun, reasonFor } from "./record-run";
import { writeHistoryReadings } from "./write-history-readings";

/** Doubts that hang on what a run covers. */
const OF_SHIFT: readonly string[] = ["outside-shift", "shorter-than-shift"];

export interface HistoryToStore {
  importId: string;
  siteId: string;
  timeZone: string;
  instrumentId: string;
  fileId: string;
  fileName: string;
  runId: string | null;
  workerId: string | null;
  mapping: HistoryMapping;
  order: HistoryStoreOrder;
}

/**
 * Stores what a file holds: the levels, the first revision of the history, the run with the readings that follow from it,
 * and how the instrument's files are to be read. The day is computed anew. One transaction: all of it or nothing.
 */
export async function storeHistory(
  actor: Actor,
  given: HistoryToStore,
  { report, history }: LevelsReply & { history: NonNullable<LevelsReply["history"]> },
  labelled: readonly LabelledSettings[],
): Promise<string> {
  const { organizationId } = actor;
  const entryId = randomUUID();
  const historyId = randomUUID();
  const revisionId = randomUUID();
  const { startMs, intervalMs, valuesCount, evaluation } = history;
  const startsAt = new Date(startMs).toISOString();
  const endsAt = new Date(startMs + valuesCount * intervalMs).toISOString();
  const settings = labelled.map((one) => one.settings);
  const run = await runFor(actor, given, {
    startsAt,
    endsAt,
    report,
    evaluation,
    settings,
    entryId,
  });
  await execute(
    `INSERT INTO time_histories (id, organization_id, site_id, run_id, instrument_id, file_id, starts_at, interval_ms, values_count, channels, span, current_revision_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10::text[], tstzrange($7::timestamptz, $11::timestamptz), $12)`,
    [
      historyId,
      organizationId,
      given.siteId,
      run.id,
      given.instrumentId,
      given.fileId,
      startsAt,
      intervalMs,
      valuesCount,
      history.channels.map(({ channel }) => channel),
      endsAt,
      revisionId,
    ],
  );
  await execute(
    `INSERT INTO time_history_revisions (id, organization_id, history_id, number, stretches, author_id) VALUES ($1, $2, $3, 1, '[]', $4)`,
    [revisionId, organizationId, historyId, actor.userId],
  );
  const chunks = history.channels.flatMap(({ channel, chunks: ofChannel }) =>
    ofChannel.map((chunk, position) => ({ channel, position, ...chunk })),
  );
  await execute(
    `INSERT INTO time_history_chunks (organization_id, history_id, channel, position, values_count, packed)
     SELECT $1, $2, x.channel, x.position, x.count, x.packed FROM unnest($3::text[], $4::int[], $5::int[], $6::bytea[]) AS x(channel, position, count, packed)`,
    [
      organizationId,
      historyId,
      chunks.map(({ channel }) => channel),
      chunks.map(({ position }) => position),
      chunks.map((chunk) => chunk.valuesCount),
      chunks.map(({ packed }) => `\\x${Buffer.from(packed).toString("hex")}`),
    ],
  );
  await execute(
    `INSERT INTO history_mappings (organization_id, instrument_id, mapping, author_id) VALUES ($1, $2, $3::jsonb, $4)
     ON CONFLICT (instrument_id) DO UPDATE SET mapping = excluded.mapping, author_id = excluded.author_id, updated_at = now()`,
    [
      organizationId,
      given.instrumentId,
      JSON.stringify({ ...given.mapping, startsAt: null }),
      actor.userId,
    ],
  );
  await recordAudit(actor, {
    action: "store-history",
    subjectKind: "time-history",
    subjectId: historyId,
    values: {
      fileName: given.fileName,
      runId: run.id,
      startsAt,
      endsAt,
      intervalMs,
      channels: history.channels.map(({ channel }) => channel),
      ...given.order,
    },
  });
  if (run.workerId !== null)
    await recomputeRunDay(actor, {
      siteId: given.siteId,
      workerId: run.workerId,
      date: run.date,
      entryId,
    });
  return historyId;
}

interface RunFacts {
  startsAt: string;
  endsAt: string;
  report: LevelsReply["report"];
  evaluation: NonNullable<LevelsReply["history"]>["evaluation"];
  settings: LabelledSettings["settings"][];
  entryId: string;
}

/** The run that the history belongs to, with its readings: the one it was imported for, or a new one of the worker's. */
async function runFor(
  actor: Actor,
  given: HistoryToStore,
  { startsAt, endsAt, report, evaluation, settings, entryId }: RunFacts,
): Promise<{ id: string; workerId: string | null; date: string }> {
  const { covers, keptReason } = given.order;
  const facing = await runOfImport(given.importId, { startsAt, endsAt });
  if (given.runId !== null) {
    const run = await row<{
      id: string;
      workerId: string | null;
      date: string;
      doubts: string[];
      keptReason: string | null;
    }>(
      `SELECT r.id, r.worker_id AS "workerId", r.date::text AS date, v.doubts, v.kept_reason AS "keptReason"
       FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id WHERE r.id = :runId FOR UPDATE OF r`,
      { runId: given.runId },
    );
    if (!run) throw new Error("a run that is named by an import is there");
    const doubts = await doubtsOfImport(facing, report, covers);
    // What an earlier span or purpose spoke against is judged anew by the history's own.
    const codes = [
      ...run.doubts.filter((code) => !OF_SHIFT.includes(code)),
      ...doubts.map(({ code }) => code),
    ];
    await writeHistoryReadings(actor, run.id, evaluation, settings, {
      reason: "history",
      entryId,
      leftOut: null,
      facts: {
        covers,
        keptReason: reasonFor(codes, keptReason ?? run.keptReason),
        doubts: [...new Set(codes)],
      },
    });
    return run;
  }
  const { workerId, shiftId, date } = facing;
  const doubts = await doubtsOfImport(facing, report, covers);
  const id = await insertRun(
    actor,
    {
      siteId: given.siteId,
      instrumentId: given.instrumentId,
      workerId,
      shiftId,
      date,
      span: { from: startsAt, to: endsAt },
    },
    {
      durationMin: evaluation.counted.durationS / 60,
      checkBeforeDb: null,
      checkAfterDb: null,
      covers,
      keptReason: reasonFor(doubts, keptReason),
      unusual: null,
      doubts: doubts.map(({ code }) => code),
      readings: historyReadings(evaluation, settings).map((reading) => ({
        ...reading,
        source: "history" as const,
      })),
    },
    entryId,
  );
  return { id, workerId, date };
}
