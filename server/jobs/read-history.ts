import type { HistoryReport, HistoryStoreOrder } from "../../shared/schemas/history";
import { localDate } from "../../shared/time/zone";
import { loadActor } from "../auth/actor";
import { type HistoryToStore, storeHistory } from "../commands/store-history";
import type { LevelsReply } from "../histories/history-worker";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row } from "../lib/db";
import { fileStore } from "../lib/file-store";
import type { JobPayloads } from "../lib/jobs";
import type { Actor } from "../lib/policy";
import { runWorker } from "../lib/run-worker";
import { checkAgainstRecords } from "../queries/history-checks";
import { settingsToEvaluate } from "../queries/meter-settings";
import { type Watch, whileBeating } from "./job-beat";

interface Ordered extends HistoryToStore {
  state: "reading" | "storing";
  revision: number;
  answers: string[];
  sha256: string;
  startsAt: string | null;
  runDate: string | null;
  userId: string | null;
}

/** An order that ended a process so often is given up. */
const MOST_TRIES = 3;
/** Takes the order up, or says that there is none any more. */
async function claim(importId: string): Promise<Ordered | null> {
  const found = await row<
    Ordered & { tries: number; order: (HistoryStoreOrder & { userId: string }) | null }
  >(
    `SELECT m.id AS "importId", m.state, m.revision, m.tries, m.site_id AS "siteId", s.time_zone AS "timeZone", m.instrument_id AS "instrumentId", m.file_id AS "fileId",
       m.file_name AS "fileName", m.run_id AS "runId", coalesce(m.worker_id, r.worker_id) AS "workerId", m.mapping, m.answers, m.store_order AS "order",
       encode(f.sha256, 'hex') AS sha256, m.report->>'startsAt' AS "startsAt", r.date::text AS "runDate", coalesce(m.store_order->>'userId', m.author_id::text) AS "userId"
     FROM history_imports m JOIN sites s ON s.id = m.site_id JOIN files f ON f.id = m.file_id LEFT JOIN runs r ON r.id = m.run_id
     WHERE m.id = :importId AND m.state IN ('reading', 'storing') FOR UPDATE OF m`,
    { importId },
  );
  if (!found) return null;
  if (found.tries >= MOST_TRIES) {
    await execute(
      "UPDATE history_imports SET state = 'failed', updated_at = now(), revision = revision + 1 WHERE id = $1",
      [importId],
    );
    return null;
  }
  await execute("UPDATE history_imports SET tries = tries + 1, updated_at = now() WHERE id = $1", [
    importId,
  ]);
  return found;
}

/**
 * Reads a file that is on its way in, as its row orders: a report, or the levels themselves and all that follows from
 * them. A retry begins anew and ends as the first would have; what was cancelled meanwhile ends without a trace.
 */
export async function readHistoryImport({
  organizationId,
  importId,
}: JobPayloads["read-history"]): Promise<void> {
  const ordered = await inTransaction({ organizationId }, () => claim(importId));
  if (!ordered) return;
  await whileBeating(
    async (progressPct) => {
      const count = await inTransaction({ organizationId }, () =>
        execute(
          `UPDATE history_imports SET progress_pct = greatest(progress_pct, $4), updated_at = now() WHERE id = $1 AND state = $2 AND revision = $3`,
          [importId, ordered.state, ordered.revision, progressPct],
        ),
      );
      return count > 0;
    },
    (watch) => (ordered.state === "reading" ? report : store)(organizationId, ordered, watch),
  );
}

const task = (organizationId: string, { sha256, mapping, timeZone, answers }: Ordered) => ({
  file: fileStore().pathOf(organizationId, sha256),
  mapping,
  timeZone,
  answers,
});

/** With what the records say to its times; what is still open comes first. */
async function complete(ordered: Ordered, found: HistoryReport): Promise<HistoryReport> {
  const more = await checkAgainstRecords(ordered, found);
  const rank = { refused: 0, asked: 1, told: 2 };
  const issues = [...more, ...found.issues].toSorted((a, b) => rank[a.severity] - rank[b.severity]);
  return { ...found, issues, issuesCount: found.issuesCount + more.length };
}

const isOpen = ({ issues }: HistoryReport, answers: readonly string[]) =>
  issues.some(
    ({ severity, code }) =>
      severity === "refused" ||
      (severity === "asked" &&
        !answers.some((answer) => answer === code || answer === `${code}-second`)),
  );

/** The row, if the order is still the one that was taken up. */
const stillOrdered = (ordered: Ordered) =>
  row<{ id: string }>(
    "SELECT id FROM history_imports WHERE id = :importId AND state = :state AND revision = :revision FOR UPDATE",
    { importId: ordered.importId, state: ordered.state, revision: ordered.revision },
  );

const end = (
  importId: string,
  state: string,
  found: HistoryReport,
  historyId: string | null = null,
) =>
  execute(
    `UPDATE history_imports SET state = $2, report = $3::jsonb, history_id = $4, progress_pct = 100, updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [importId, state, JSON.stringify(found), historyId],
  );

async function report(organizationId: string, ordered: Ordered, watch: Watch): Promise<void> {
  const reply = await runWorker<{ report: HistoryReport }>(
    "history-worker",
    { kind: "report", ...task(organizationId, ordered) },
    watch,
  );
  await inTransaction({ organizationId }, async () => {
    if (!(await stillOrdered(ordered))) return;
    const found = await complete(ordered, reply.report);
    await end(ordered.importId, isOpen(found, ordered.answers) ? "refused" : "ready", found);
  });
}

/** Who ordered it, with the rights of this moment. */
async function authorOf(userId: string | null): Promise<Actor> {
  const found = await row<{ epoch: number }>(
    `SELECT session_epoch AS epoch FROM users WHERE id = :userId`,
    { userId },
  );
  return loadActor(userId ?? "", found?.epoch ?? -1);
}

async function store(organizationId: string, ordered: Ordered, watch: Watch): Promise<void> {
  const date = ordered.runDate ?? localDate(new Date(ordered.startsAt ?? 0), ordered.timeZone);
  const { settings } = await inTransaction({ organizationId, readOnly: true }, () =>
    settingsToEvaluate(ordered.siteId, ordered.instrumentId, date),
  );
  const reply = await runWorker<LevelsReply>(
    "history-worker",
    {
      kind: "levels",
      ...task(organizationId, ordered),
      settings: settings.map((one) => one.settings),
    },
    watch,
  );
  await inTransaction({ organizationId }, async () => {
    if (!(await stillOrdered(ordered))) return;
    const found = await complete(ordered, reply.report);
    const { history } = reply;
    if (!history || isOpen(found, ordered.answers)) {
      await end(ordered.importId, "refused", found);
      return;
    }
    const author = await authorOf(ordered.userId);
    const historyId = await storeHistory(
      author,
      ordered,
      { report: reply.report, history },
      settings,
    );
    await end(ordered.importId, "stored", found, historyId);
    await recordAudit(author, {
      action: "finish-history-import",
      subjectKind: "history-import",
      subjectId: ordered.importId,
      values: { historyId },
    });
  });
  // Kept as evidence and read no more: a year of them is large.
  await fileStore().pack(organizationId, ordered.sha256);
}
