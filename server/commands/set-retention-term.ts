import type { TermInput } from "../../shared/schemas/retention";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { termView } from "../queries/retention";

/** The organization's own term from now on; it makes nothing shorter than a rule's. */
export async function setRetentionTerm(
  actor: Actor,
  { yearsAfterLeaving }: TermInput,
  seenRevision: number,
): Promise<void> {
  const { organizationId, userId } = actor;
  await execute("SELECT pg_advisory_xact_lock(hashtextextended('retention:' || $1, 0))", [
    organizationId,
  ]);
  const before = await termView(actor);
  await requireRevision(before, seenRevision, async () => before);
  if (before.yearsAfterLeaving === yearsAfterLeaving) return;
  await execute(
    "INSERT INTO retention_terms (organization_id, number, years_after_leaving, set_by) VALUES ($1, $2, $3, $4)",
    [organizationId, before.revision + 1, yearsAfterLeaving, userId],
  );
  await recordAudit(actor, {
    action: "set-retention-term",
    subjectKind: "organization",
    subjectId: organizationId,
    values: { yearsAfterLeaving: { from: before.yearsAfterLeaving, to: yearsAfterLeaving } },
  });
}
