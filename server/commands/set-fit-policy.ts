import type { FitPolicyInput } from "../../shared/schemas/fit";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import { ASKED_FROM } from "../queries/fit-policy-preview";
import { closeFitDues, openFitDues } from "./follow-fits";

/** How sure a fit has to be at a site, and when it is tested again. Fits on record keep the confidence they were stated at. */
export async function setFitPolicy(
  actor: Actor,
  site: { id: string },
  before: FitPolicyInput,
  input: FitPolicyInput,
): Promise<void> {
  const changes = changesBetween(before, input);
  if (isUnchanged(changes)) return;
  await execute(
    `UPDATE sites SET fit_confidence_pct = $2, fit_every_months = $3, fit_after_fail_days = $4, fit_first_days = $5,
       fit_asked_from = ${ASKED_FROM("$3::int", "$4::int")}, revision = revision + 1 WHERE id = $1`,
    [site.id, input.confidencePct, input.everyMonths, input.afterFailDays, input.firstDays],
  );
  await recordAudit(actor, {
    action: "set-fit-policy",
    subjectKind: "site",
    subjectId: site.id,
    values: changes,
  });
  await closeFitDues(actor.organizationId);
  await openFitDues(actor.organizationId);
}
