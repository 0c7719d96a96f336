import { recordAudit } from "../lib/audit";
import { execute, row, rows } from "../lib/db";
import { leavesNobodyToAdminister } from "../lib/grants";
import type { Role } from "../lib/policy";

interface Mapped {
  id: string;
  role: Role;
  siteId: string | null;
}

/**
 * Brings what a user holds by groups in line with the groups that the sign-in service states now; none stated is none
 * held. Roles granted by hand are not touched. The organization's last administrator stays one, and the trail says so.
 */
export async function followGroups(
  user: { id: string; organizationId: string },
  groups: readonly string[],
): Promise<void> {
  const wanted = await rows<Mapped>(
    `SELECT m.id, m.role, m.site_id AS "siteId" FROM group_mappings m
     WHERE m.ended_at IS NULL AND m.group_name = ANY ($1::text[]) ORDER BY m.id`,
    [[...groups]],
  );
  const held = await rows<Mapped & { mappingId: string }>(
    `SELECT g.id, g.mapping_id AS "mappingId", g.role, g.site_id AS "siteId" FROM role_grants g
     WHERE g.user_id = $1 AND g.mapping_id IS NOT NULL AND g.revoked_at IS NULL FOR UPDATE`,
    [user.id],
  );
  const granted = wanted.filter(({ id }) => !held.some(({ mappingId }) => mappingId === id));
  const lost = held.filter(({ mappingId }) => !wanted.some(({ id }) => id === mappingId));
  if (granted.length > 0)
    await execute(
      `INSERT INTO role_grants (organization_id, user_id, role, site_id, mapping_id)
       SELECT m.organization_id, $1, m.role, m.site_id, m.id FROM group_mappings m WHERE m.id = ANY ($2::uuid[])`,
      [user.id, granted.map(({ id }) => id)],
    );
  const ruling = lost.filter(({ role }) => role === "administrator");
  const kept =
    ruling.length > 0 &&
    (await leavesNobodyToAdminister(user.organizationId, { grantIds: ruling.map(({ id }) => id) }))
      ? ruling
      : [];
  const revoked = lost.filter((grant) => !kept.includes(grant));
  if (revoked.length > 0)
    await execute("UPDATE role_grants SET revoked_at = now() WHERE id = ANY ($1::uuid[])", [
      revoked.map(({ id }) => id),
    ]);
  if (granted.length + lost.length === 0) return;
  const plain = ({ role, siteId }: Mapped) => ({ role, siteId });
  await recordAudit(
    { organizationId: user.organizationId },
    {
      action: "follow-groups",
      subjectKind: "user",
      subjectId: user.id,
      values: {
        ...(granted.length > 0 ? { granted: granted.map(plain) } : {}),
        ...(revoked.length > 0 ? { revoked: revoked.map(plain) } : {}),
        ...(kept.length > 0 ? { keptAsLastAdministrator: kept.map(plain) } : {}),
      },
    },
  );
}

/** Somebody whom nobody granted anything by hand, and whom a group lets in. */
export async function admitByGroup(
  organizationId: string,
  identity: { issuer: string; subject: string; email: string | null; name: string },
): Promise<{ id: string; epoch: number } | null> {
  // Whose access was ended by hand is let in by hand only.
  const before = await row(
    `SELECT 1 AS one FROM users WHERE revoked_at IS NOT NULL AND (expected_subject = :subject OR lower(email) = lower(:email)) LIMIT 1`,
    { subject: identity.subject, email: identity.email ?? "" },
  );
  if (before) return null;
  const { issuer, subject, email, name } = identity;
  const made = await row<{ id: string; epoch: number }>(
    `INSERT INTO users (organization_id, name, email, issuer, subject)
     VALUES (:organizationId, :name, :email, :issuer, :subject) ON CONFLICT DO NOTHING RETURNING id, session_epoch AS epoch`,
    { organizationId, name: name.slice(0, 200), email, issuer, subject },
  );
  if (!made) return null;
  await recordAudit(
    { organizationId },
    {
      action: "admit-by-group",
      subjectKind: "user",
      subjectId: made.id,
      values: { name, email },
    },
  );
  return made;
}
