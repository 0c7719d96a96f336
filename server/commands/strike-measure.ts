import type { MeasureView } from "../../shared/schemas/follow-up";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Finding } from "../models/finding";

/** A measure entered by mistake, or given up, is struck with the reason and stays to be read. The row is locked. */
export async function strikeMeasure(
  actor: Actor,
  finding: Finding,
  measure: MeasureView,
  reason: string,
): Promise<void> {
  if (measure.struckReason !== null) throw new AppError("nothing-to-do", 409);
  await execute(
    "UPDATE finding_measures SET struck_reason = $2, revision = revision + 1 WHERE id = $1",
    [measure.id, reason],
  );
  await recordAudit(actor, {
    action: "strike-measure",
    subjectKind: "finding",
    subjectId: finding.id,
    values: { measureId: measure.id, what: measure.what, reason },
  });
}
