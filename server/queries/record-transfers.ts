import { SUCCESSION } from "../../shared/rule-sets/retention";
import type { RecordTransferView, SuccessionDutyView } from "../../shared/schemas/record-transfer";
import { rows } from "../lib/db";
import { type Actor, abilities, visible } from "../lib/policy";
import {
  assignmentPolicy,
  dayPolicy,
  drawPolicy,
  findingPolicy,
  fitTestPolicy,
  noticePolicy,
  planPolicy,
  recordTransferPolicy,
  runPolicy,
  shiftPolicy,
} from "../policies";

const LIST_LIMIT = 50;
const FILES_LIMIT = 20;

type TransferRow = Omit<
  RecordTransferView,
  "proposedAt" | "approvedAt" | "receipt" | "files" | "can"
> & {
  proposedById: string;
  proposedAt: Date;
  approvedAt: Date | null;
  sha256: string | null;
  signedBy: string | null;
  signedOn: string | null;
  recordedBy: string | null;
  recordedAt: Date | null;
  files: RecordTransferView["files"];
};

/** Records of sites that were or are to be handed over, the latest first, with the files that went out and the receipt. */
export async function listRecordTransfers(
  actor: Actor,
  id: string | null = null,
): Promise<RecordTransferView[]> {
  const found = await rows<TransferRow>(
    `SELECT t.id, t.site_id AS "siteId", s.name AS "siteName", t.successor, t.passes_on::text AS "passesOn", t.note, t.state, t.proposed_by AS "proposedById",
       p.name AS "proposedBy", t.proposed_at AS "proposedAt", a.name AS "approvedBy", t.approved_at AS "approvedAt", w.name AS "withdrawnBy", t.revision,
       encode(t.received_sha256, 'hex') AS sha256, t.signed_by AS "signedBy", t.signed_on::text AS "signedOn", r.name AS "recordedBy", t.received_at AS "recordedAt",
       (SELECT coalesce(jsonb_agg(to_jsonb(x) ORDER BY x."takenAt" DESC), '[]') FROM (
          SELECT u.name AS "takenBy", f.taken_at AS "takenAt", f.size_bytes AS "sizeBytes", f.years FROM record_transfer_files f JOIN users u ON u.id = f.taken_by
          WHERE f.transfer_id = t.id ORDER BY f.taken_at DESC LIMIT ${FILES_LIMIT}) x) AS files
     FROM record_transfers t JOIN sites s ON s.id = t.site_id JOIN users p ON p.id = t.proposed_by LEFT JOIN users a ON a.id = t.approved_by
     LEFT JOIN users w ON w.id = t.withdrawn_by LEFT JOIN users r ON r.id = t.received_by
     WHERE ${visible(recordTransferPolicy, actor, "t")} AND (CAST(:id AS uuid) IS NULL OR t.id = :id) ORDER BY t.proposed_at DESC, t.id LIMIT ${LIST_LIMIT}`,
    { id },
  );
  return found.map(
    ({
      proposedById,
      proposedAt,
      approvedAt,
      sha256,
      signedBy,
      signedOn,
      recordedBy,
      recordedAt,
      files,
      ...transfer
    }) => ({
      ...transfer,
      proposedAt: proposedAt.toISOString(),
      approvedAt: approvedAt?.toISOString() ?? null,
      files: files.map((file) => ({ ...file, takenAt: new Date(file.takenAt).toISOString() })),
      receipt:
        sha256 !== null &&
        signedBy !== null &&
        signedOn !== null &&
        recordedBy !== null &&
        recordedAt !== null
          ? { sha256, signedBy, signedOn, recordedBy, recordedAt: recordedAt.toISOString() }
          : null,
      can: abilities(recordTransferPolicy, actor, {
        siteId: transfer.siteId,
        state: transfer.state,
        proposedBy: proposedById,
      }),
    }),
  );
}

/** What rules at the actor's sites say of records whose employer ends or sells a site. */
export async function successionDuties(actor: Actor): Promise<SuccessionDutyView[]> {
  const keys = await rows<{ key: string }>(
    `SELECT DISTINCT k.key FROM site_settings x, unnest(x.governing_rule_set || x.comparison_rule_sets) k(key)
     WHERE ${visible(recordTransferPolicy, actor, "x")} ORDER BY 1`,
  );
  return keys.flatMap(({ key }) =>
    (SUCCESSION[key] ?? []).map((duty) => ({ ruleSetKey: key, ...duty })),
  );
}

/** Years of a site with something in a table of their file, the first first. */
export async function yearsWithRecords(actor: Actor, siteId: string): Promise<number[]> {
  const ofDate = (from: string, date: string, condition: string) =>
    `SELECT extract(year FROM ${date})::int AS year FROM ${from} WHERE ${condition}`;
  const ofSpan = (from: string, first: string, last: string, condition: string) =>
    `SELECT generate_series(extract(year FROM ${first})::int, extract(year FROM ${last})::int) AS year FROM ${from} WHERE ${condition}`;
  const parts = [
    ofDate("days d", "d.date", `d.site_id = :siteId AND ${visible(dayPolicy, actor, "d")}`),
    ofDate("shifts f", "f.date", `f.site_id = :siteId AND ${visible(shiftPolicy, actor, "f")}`),
    ofDate("runs r", "r.date", `r.site_id = :siteId AND ${visible(runPolicy, actor, "r")}`),
    ofDate(
      "fit_tests t",
      "t.tested_on",
      `t.site_id = :siteId AND ${visible(fitTestPolicy, actor, "t")}`,
    ),
    ofSpan(
      "assignments x JOIN workers w ON w.id = x.worker_id",
      "lower(x.valid)",
      "least(coalesce(upper(x.valid) - 1, current_date), current_date)",
      `w.site_id = :siteId AND ${visible(assignmentPolicy, actor, "x")}`,
    ),
    ofSpan(
      "findings n",
      "n.first_date",
      "n.last_date",
      `n.site_id = :siteId AND ${visible(findingPolicy, actor, "n")}`,
    ),
    ofDate(
      "notices n",
      "n.created_at AT TIME ZONE 'UTC'",
      `n.site_id = :siteId AND ${visible(noticePolicy, actor, "n")}`,
    ),
    ofDate(
      "plans p",
      "p.base_date",
      `p.site_id = :siteId AND p.kind = 'timetable' AND ${visible(planPolicy, actor, "p")}`,
    ),
    `SELECT d.year FROM record_draws d WHERE d.site_id = :siteId AND ${visible(drawPolicy, actor, "d")}`,
  ];
  const found = await rows<{ year: number }>(
    `SELECT DISTINCT y.year FROM (${parts.map((part) => `(${part})`).join(" UNION ALL ")}) y ORDER BY 1`,
    { siteId },
  );
  return found.map(({ year }) => year);
}
