import { execute, row } from "./db";

/** SQL: a grant of the alias counts at this moment. */
export const inForce = (grant: string): string =>
  `(${grant}.revoked_at IS NULL AND (${grant}.ends_at IS NULL OR ${grant}.ends_at > now()))`;

/** SQL: when the last of a user's grants that had an end was over, by itself or before its time; null where none was. */
export const lastEnd = (user: string): string =>
  `(SELECT max(least(x.ends_at, x.revoked_at)) FROM role_grants x
    WHERE x.user_id = ${user}.id AND x.ends_at IS NOT NULL AND least(x.ends_at, x.revoked_at) <= now())`;

/**
 * Whether some reach, of one site or of all, would have nobody left who administers it without these grants and these
 * workers: who administers a site can't give back what reaches all of them. Two who lose the role at one moment
 * wait for each other, so that neither takes the other for the one who stays.
 */
export async function leavesNobodyToAdminister(
  organizationId: string,
  {
    grantIds = [],
    workerIds = [],
  }: { grantIds?: readonly string[]; workerIds?: readonly string[] },
): Promise<boolean> {
  await execute("SELECT 1 FROM organizations WHERE id = $1 FOR NO KEY UPDATE", [organizationId]);
  const held = await row<{ isLast: boolean }>(
    `WITH held AS (
       SELECT g.site_id, g.id = ANY (CAST(:grants AS uuid[])) OR coalesce(u.worker_id = ANY (CAST(:workers AS uuid[])), FALSE) AS is_lost
       FROM role_grants g JOIN users u ON u.id = g.user_id WHERE g.role = 'administrator' AND ${inForce("g")} AND u.revoked_at IS NULL)
     SELECT EXISTS (SELECT 1 FROM held lost WHERE lost.is_lost AND NOT EXISTS (
       SELECT 1 FROM held kept WHERE NOT kept.is_lost AND (kept.site_id IS NULL OR kept.site_id = lost.site_id))) AS "isLast"`,
    { grants: `{${grantIds.join(",")}}`, workers: `{${workerIds.join(",")}}` },
  );
  return held?.isLast ?? false;
}
