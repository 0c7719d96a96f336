import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import type { Actor } from "../lib/policy";

/** After how many months a level at a site counts as measured too long ago. No day is judged by it. */
export async function setRemeasureInterval(
  actor: Actor,
  site: { id: string },
  from: number | null,
  to: number | null,
): Promise<void> {
  if (from === to) return;
  await execute(
    "UPDATE sites SET remeasure_after_months = $2, revision = revision + 1 WHERE id = $1",
    [site.id, to],
  );
  await recordAudit(actor, {
    action: "set-remeasure-interval",
    subjectKind: "site",
    subjectId: site.id,
    values: { remeasureAfterMonths: { from, to } },
  });
}
