import type { MeasureInput, MeasureView } from "../../shared/schemas/follow-up";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import { execute } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Finding } from "../models/finding";
import { checkMeasure } from "./check-measure";

/** A measure is done, put off, or put in other words; the trail keeps what it was. The measure's row is locked. */
export async function changeMeasure(
  actor: Actor,
  finding: Finding,
  before: MeasureView,
  input: MeasureInput,
): Promise<void> {
  if (before.struckReason !== null) throw new AppError("nothing-to-do", 409);
  const changes = changesBetween(before, input);
  if (isUnchanged(changes)) return;
  await checkMeasure(finding, input);
  await execute(
    `UPDATE finding_measures SET control = $2, what = $3, owner_id = $4, planned_on = $5, done_on = $6, revision = revision + 1 WHERE id = $1`,
    [before.id, input.control, input.what, input.ownerId, input.plannedOn, input.doneOn],
  );
  await recordAudit(actor, {
    action: "change-measure",
    subjectKind: "finding",
    subjectId: finding.id,
    values: { measureId: before.id, ...changes },
  });
}
