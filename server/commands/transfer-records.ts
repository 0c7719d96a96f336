import type {
  RecordReceiptInput,
  RecordTransferInput,
  RecordTransferView,
} from "../../shared/schemas/record-transfer";
import { localDate } from "../../shared/time/zone";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { execute, row, rows } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { approveProposal, withdrawProposal } from "./decide-proposal";

/** A site's end is known years before. */
const AHEAD_DAYS = 3 * 366;

type Transfer = Pick<RecordTransferView, "id">;

const told = (
  actor: Actor,
  action: string,
  { id }: Transfer,
  values: Record<string, unknown> = {},
) => recordAudit(actor, { action, subjectKind: "record-transfer", subjectId: id, values });

/** @throws AppError 422 for a date nobody means; exists-already where the site's records are being handed over. */
export async function proposeTransfer(
  actor: Actor,
  { siteId, successor, passesOn, note }: RecordTransferInput,
): Promise<string> {
  const issues = dateIssues(["passesOn"], passesOn, AHEAD_DAYS);
  if (issues.length > 0) throw unprocessable(issues);
  const [proposed] = await rows<{ id: string }>(
    `INSERT INTO record_transfers (organization_id, site_id, successor, passes_on, note, proposed_by) VALUES ($1, $2, $3, $4, $5, $6) RETURNING id`,
    [actor.organizationId, siteId, successor, passesOn, note, actor.userId],
  );
  await told(actor, "propose-transfer", proposed!, { siteId, successor, passesOn, note });
  return proposed!.id;
}

/**
 * From now on the file can be taken. Nobody approves what they proposed.
 *
 * @throws AppError own-proposal, or wrong-state where it was decided already.
 */
export async function approveTransfer(
  actor: Actor,
  transfer: Transfer,
  proposedBy: string,
): Promise<void> {
  await approveProposal(actor, "record_transfers", transfer.id, proposedBy);
  await told(actor, "approve-transfer", transfer);
}

/** A sale may come to nothing after it was approved too. @throws AppError wrong-state where it is over. */
export async function withdrawTransfer(actor: Actor, transfer: Transfer): Promise<void> {
  await withdrawProposal(actor, "record_transfers", transfer.id, ["proposed", "approved"]);
  await told(actor, "withdraw-transfer", transfer);
}

/** A file that went out whole: what the successor counts over theirs has to equal the hash of one of them. */
export async function recordHandedOut(
  actor: Actor,
  transfer: Transfer,
  { sha256, sizeBytes, years }: { sha256: string; sizeBytes: number; years: readonly number[] },
): Promise<void> {
  await execute(
    `INSERT INTO record_transfer_files (organization_id, transfer_id, sha256, size_bytes, years, taken_by) VALUES ($1, $2, decode($3, 'hex'), $4, $5::int[], $6)`,
    [actor.organizationId, transfer.id, sha256, sizeBytes, `{${years.join(",")}}`, actor.userId],
  );
  await told(actor, "hand-out-transfer-file", transfer, { sha256, sizeBytes, years });
}

/**
 * The successor's receipt, with which the handing over is done.
 *
 * @throws AppError 422: no file that went out has this hash, or signed before it went out or in days to come; wrong-state where
 * it is over.
 */
export async function receiveTransfer(
  actor: Actor,
  transfer: Pick<RecordTransferView, "id" | "state">,
  { sha256, signedBy, signedOn }: RecordReceiptInput,
): Promise<void> {
  if (transfer.state !== "approved") throw new AppError("wrong-state", 409);
  const file = await row<{ takenAt: Date; timeZone: string }>(
    `SELECT f.taken_at AS "takenAt", s.time_zone AS "timeZone" FROM record_transfer_files f JOIN record_transfers t ON t.id = f.transfer_id JOIN sites s ON s.id = t.site_id
     WHERE f.transfer_id = :id AND f.sha256 = decode(:sha256, 'hex')`,
    { id: transfer.id, sha256 },
  );
  if (!file) throw unprocessable([issue(["sha256"], "sha256-not-handed-out")]);
  const takenOn = localDate(file.takenAt, file.timeZone);
  if (signedOn < takenOn)
    throw unprocessable([issue(["signedOn"], "signed-before-handed-out", { takenOn })]);
  if (signedOn > todayAt(file.timeZone))
    throw unprocessable([issue(["signedOn"], "in-the-future")]);
  await execute(
    `UPDATE record_transfers SET state = 'done', received_sha256 = decode($2, 'hex'), signed_by = $3, signed_on = $4, received_by = $5, received_at = clock_timestamp(),
       updated_at = now(), revision = revision + 1 WHERE id = $1 AND state = 'approved'`,
    [transfer.id, sha256, signedBy, signedOn, actor.userId],
  );
  await told(actor, "receive-transfer", transfer, { sha256, signedBy, signedOn });
}
