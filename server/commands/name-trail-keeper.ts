import type { KeeperInput } from "../../shared/schemas/trail-keeper";
import { recordAudit } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { keeperView } from "../queries/trail-keeper";
import { queueTrailMail } from "./order-trail-heads";

/**
 * Names who outside keeps the trail's head from now on. Whoever kept it until now is told so: an address that falls silent
 * is no sign that somebody rewrites the trail.
 */
export async function nameTrailKeeper(
  actor: Actor,
  { keeper }: KeeperInput,
  seenRevision: number,
): Promise<void> {
  const { organizationId, userId } = actor;
  await execute("SELECT pg_advisory_xact_lock(hashtextextended('keeper:' || $1, 0))", [
    organizationId,
  ]);
  const before = await keeperView(actor);
  await requireRevision(before, seenRevision, async () => before);
  if (keeper && !before.timeZones.includes(keeper.timeZone))
    throw unprocessable([issue(["keeper", "timeZone"], "not-a-clock-here")]);
  const old = before.keeper;
  if (JSON.stringify(old) === JSON.stringify(keeper)) return;
  await execute(
    "INSERT INTO trail_keepers (organization_id, number, name, email, language, time_zone, named_by) VALUES ($1, $7, $2, $3, $4, $5, $6)",
    [
      organizationId,
      keeper?.name ?? null,
      keeper?.email ?? null,
      keeper?.language ?? old?.language ?? "en",
      keeper?.timeZone ?? old?.timeZone ?? "UTC",
      userId,
      before.revision + 1,
    ],
  );
  await recordAudit(actor, {
    action: "name-trail-keeper",
    subjectKind: "organization",
    subjectId: organizationId,
    values: {
      name: { from: old?.name ?? null, to: keeper?.name ?? null },
      email: { from: old?.email ?? null, to: keeper?.email ?? null },
    },
  });
  if (old && old.email.toLowerCase() !== keeper?.email.toLowerCase()) {
    const told = await rows<{ id: string }>(
      `INSERT INTO trail_mails (organization_id, kind, name, email, language, time_zone) VALUES ($1, 'no-longer', $2, $3, $4, $5) RETURNING id`,
      [organizationId, old.name, old.email, old.language, old.timeZone],
    );
    for (const { id } of told) await queueTrailMail(organizationId, id);
  }
}
