import type {
  HistoryReadOrder,
  HistoryReport,
  HistoryStoreOrder,
} from "../../shared/schemas/history";
import type { RunDoubt } from "../../shared/schemas/run-doubts";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import { addJob } from "../lib/jobs";
import type { Actor } from "../lib/policy";
import type { HistoryImport } from "../models/survey";
import type { FacingRun } from "../queries/faced-shifts";
import { runOfImport, spanOf } from "../queries/history-imports";
import { doubtsOf, reasonFor, requireKeptReason } from "./record-run";

export async function queueHistoryReading(organizationId: string, importId: string): Promise<void> {
  await addJob(
    "read-history",
    { organizationId, importId },
    // A job of its own for each order: one that still runs for an earlier order finds that out by itself.
    { key: `history-import:${importId}`, maxAttempts: 5 },
  );
}

/**
 * The file is to be read by this mapping: a report, nothing stored.
 *
 * @throws AppError wrong-state while it is read or stored already, and once it is done with.
 */
export async function orderHistoryReading(
  actor: Actor,
  found: HistoryImport,
  { mapping, answers }: HistoryReadOrder,
): Promise<void> {
  if (!["uploaded", "ready", "refused", "failed"].includes(found.state))
    throw new AppError("wrong-state", 409);
  const { kind } = mapping.time;
  if ((kind === "elapsed" || kind === "time-of-day") && mapping.startsAt === null)
    throw unprocessable([issue(["mapping", "startsAt"], "start-missing")]);
  await execute(
    `UPDATE history_imports SET state = 'reading', progress_pct = 0, mapping = $2::jsonb, answers = $3::text[], report = NULL, store_order = NULL, tries = 0,
       updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [found.id, JSON.stringify(mapping), answers],
  );
  await queueHistoryReading(actor.organizationId, found.id);
  await recordAudit(actor, {
    action: "read-history-import",
    subjectKind: "history-import",
    subjectId: found.id,
    values: { mapping, answers },
  });
}

/** What the instrument itself showed, by a report. */
export const shownIn = ({ channels }: HistoryReport): ("clipped" | "under-range")[] => [
  ...(channels.some(({ overRange }) => overRange > 0) ? (["clipped"] as const) : []),
  ...(channels.some(({ underRange }) => underRange > 0) ? (["under-range"] as const) : []),
];

/** What speaks against the run that a file becomes. */
export function doubtsOfImport(
  run: FacingRun & { instrumentId: string },
  report: HistoryReport,
  covers: HistoryStoreOrder["covers"],
): Promise<RunDoubt[]> {
  const facts = {
    checkBeforeDb: null,
    checkAfterDb: null,
    durationMin: (report.valuesCount * (report.intervalMs ?? 0)) / 60_000,
    covers,
  };
  return doubtsOf({ ...run, span: spanOf(report) }, facts, { shown: shownIn(report) });
}

/**
 * What was read is to be stored, all or nothing.
 *
 * @throws AppError wrong-state unless its report leaves nothing open; invalid where a doubt needs a reason.
 */
export async function orderHistoryStoring(
  actor: Actor,
  found: HistoryImport,
  order: HistoryStoreOrder,
): Promise<void> {
  if (found.state !== "ready" || !found.report) throw new AppError("wrong-state", 409);
  const run = await runOfImport(found.id, found.report);
  const doubts = await doubtsOfImport(run, found.report, order.covers);
  requireKeptReason(doubts, order.keptReason);
  await execute(
    `UPDATE history_imports SET state = 'storing', progress_pct = 0, store_order = $2::jsonb, tries = 0, updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [
      found.id,
      JSON.stringify({
        ...order,
        keptReason: reasonFor(doubts, order.keptReason),
        userId: actor.userId,
      }),
    ],
  );
  await queueHistoryReading(actor.organizationId, found.id);
  await recordAudit(actor, {
    action: "order-history-storing",
    subjectKind: "history-import",
    subjectId: found.id,
    values: { ...order },
  });
}
