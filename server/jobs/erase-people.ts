import { randomBytes } from "node:crypto";
import { createI18n, isLocale } from "../../shared/i18n";
import { queueErasure } from "../commands/propose-erasure";
import { recordAudit } from "../lib/audit";
import { currentTransaction, execute, inTransaction, row } from "../lib/db";
import { fileStore } from "../lib/file-store";
import type { JobPayloads } from "../lib/jobs";
import { formerWorker } from "../queries/retention";

/** After so many the job makes room for others and goes on as a new one. */
const PEOPLE_A_JOB = 50;

/**
 * Erases those of an approved order, one a transaction: a restart goes on where it stopped. Whoever is held, or not due any
 * more, since it was proposed stays as they are, and the order says why.
 */
export async function erasePeople(
  { organizationId, erasureId }: JobPayloads["erase-people"],
  shouldStop: () => boolean = () => false,
): Promise<void> {
  for (let count = 0; count < PEOPLE_A_JOB && !shouldStop(); count += 1) {
    const isMore = await inTransaction({ organizationId }, () =>
      eraseNext(organizationId, erasureId),
    );
    if (!isMore) return;
  }
  await inTransaction({ organizationId }, () => queueErasure(organizationId, erasureId));
}

/** @returns false where nobody is left. */
async function eraseNext(organizationId: string, erasureId: string): Promise<boolean> {
  const order = await row<{ approvedBy: string }>(
    `SELECT approved_by AS "approvedBy" FROM erasures WHERE id = :erasureId AND state = 'approved' FOR UPDATE`,
    { erasureId },
  );
  if (!order) return false;
  const next = await row<{ workerId: string; language: string }>(
    `SELECT p.worker_id AS "workerId", s.language FROM erasure_people p JOIN workers w ON w.id = p.worker_id JOIN sites s ON s.id = w.site_id
     WHERE p.erasure_id = :erasureId AND p.state = 'waiting' ORDER BY p.worker_id LIMIT 1 FOR UPDATE OF p`,
    { erasureId },
  );
  if (!next) {
    await finish(organizationId, erasureId);
    return false;
  }
  const { workerId, language } = next;
  const stands = await formerWorker(workerId);
  const because = stands ? stands.keptBecause : "employed";
  if (because !== null) {
    await execute(
      "UPDATE erasure_people SET state = 'kept', kept_because = $3, done_at = now() WHERE erasure_id = $1 AND worker_id = $2",
      [erasureId, workerId, because],
    );
  } else {
    await erase(organizationId, erasureId, workerId, language);
  }
  await execute("UPDATE erasures SET updated_at = now() WHERE id = $1", [erasureId]);
  return true;
}

interface Erased {
  accounts: number;
  notes: number;
  messages: number;
  files: number;
  values: number;
  /** SHA-256 of contents that nothing names any more. */
  removed: string[];
}

async function erase(
  organizationId: string,
  erasureId: string,
  workerId: string,
  language: string,
): Promise<void> {
  const i18n = await createI18n(isLocale(language) ? language : "en");
  const code = await freeCode(organizationId);
  const found = await row<{ erased: Erased }>(
    "SELECT erase_person(:erasureId, :workerId, :name, :code, :mark) AS erased",
    {
      erasureId,
      workerId,
      name: i18n.t("Former worker {code}", { code }),
      code,
      mark: i18n.t("(erased)"),
    },
  );
  const { removed, ...counts } = found!.erased;
  await execute(
    "UPDATE erasure_people SET state = 'erased', erased = $3, done_at = now() WHERE erasure_id = $1 AND worker_id = $2",
    [erasureId, workerId, JSON.stringify(counts)],
  );
  await recordAudit(
    { organizationId },
    {
      action: "erase-person",
      subjectKind: "worker",
      subjectId: workerId,
      values: { erasureId, code, ...counts },
    },
  );
  // Only once the rows say so for good.
  currentTransaction().afterCommit(async () => {
    for (const sha256 of removed) await fileStore().remove(organizationId, sha256);
  });
}

/** Drawn, not derived: who it was can't be worked out from it. */
async function freeCode(organizationId: string): Promise<string> {
  for (let bytes = 2; ; bytes += 1) {
    const code = randomBytes(bytes).toString("hex").toUpperCase();
    const taken = await row(
      "SELECT 1 AS one FROM workers WHERE organization_id = :organizationId AND employee_number = :code",
      { organizationId, code },
    );
    if (!taken) return code;
  }
}

async function finish(organizationId: string, erasureId: string): Promise<void> {
  await execute(
    "UPDATE erasures SET state = 'done', done_at = now(), updated_at = now(), revision = revision + 1 WHERE id = $1",
    [erasureId],
  );
  const counts = await row<{ erased: number; kept: number }>(
    `SELECT count(*) FILTER (WHERE state = 'erased')::int AS erased, count(*) FILTER (WHERE state = 'kept')::int AS kept
     FROM erasure_people WHERE erasure_id = :erasureId`,
    { erasureId },
  );
  await recordAudit(
    { organizationId },
    {
      action: "finish-erasure",
      subjectKind: "erasure",
      subjectId: erasureId,
      values: { ...counts },
    },
  );
}
