import type { z } from "zod";
import type { SupervisorInput } from "../../shared/schemas/crew";
import { recordAudit } from "../lib/audit";
import { checkSpan, daysFromTo } from "../lib/date-range";
import { execute, row } from "../lib/db";
import { issue, notFound, unprocessable } from "../lib/errors";
import { inForce } from "../lib/grants";
import type { Actor } from "../lib/policy";
import type { Crew } from "../models/worker";

export async function addCrewSupervisor(
  actor: Actor,
  crew: Crew,
  input: z.infer<typeof SupervisorInput>,
): Promise<void> {
  const { userId, fromDate, toDate } = input;
  checkSpan(fromDate, toDate);
  const user = await row<{ isSupervisor: boolean }>(
    `SELECT EXISTS (SELECT 1 FROM role_grants g WHERE g.user_id = u.id AND g.role = 'supervisor' AND ${inForce("g")}
       AND (g.site_id IS NULL OR g.site_id = :siteId)) AS "isSupervisor"
     FROM users u WHERE u.id = :userId AND u.revoked_at IS NULL`,
    { userId, siteId: crew.siteId },
  );
  if (!user) throw notFound();
  if (!user.isSupervisor) throw unprocessable([issue(["userId"], "not-a-supervisor")]);
  await execute(
    `INSERT INTO crew_supervisors (organization_id, crew_id, user_id, valid) VALUES ($1, $2, $3, ${daysFromTo("$4", "$5")})`,
    [actor.organizationId, crew.id, userId, fromDate, toDate],
  );
  await crew.update({ revision: crew.revision + 1 });
  await recordAudit(actor, {
    action: "add-crew-supervisor",
    subjectKind: "crew",
    subjectId: crew.id,
    values: input,
  });
}
