import type { z } from "zod";
import type { GrantInput } from "../../shared/schemas/user";
import { execute, rows } from "../lib/db";
import { forbidden, issue, notFound, unprocessable } from "../lib/errors";
import { type Actor, findVisible, type Role } from "../lib/policy";
import { Site } from "../models/site";
import { RoleGrant } from "../models/user";
import { administersReach, sitePolicy } from "../policies";

type Grant = z.infer<typeof GrantInput>;
interface Held {
  id: string;
  role: Role;
  siteId: string | null;
}

const key = ({ role, siteId }: Grant) => `${role} ${siteId ?? "everywhere"}`;

/** Asks the database now, and not at the commit, whether somebody is left who administers. */
export const keepAnAdministrator = () => execute("SET CONSTRAINTS keep_an_administrator IMMEDIATE");

/** A user's worker has to be one of the organization; a worker's role without one would show nothing. */
export async function checkLink(workerId: string | null, grants: readonly Grant[]): Promise<void> {
  if (workerId !== null) {
    const [worker] = await rows<{ id: string }>("SELECT id FROM workers WHERE id = :workerId", {
      workerId,
    });
    if (!worker) throw notFound();
  } else if (grants.some(({ role }) => role === "worker")) {
    throw unprocessable([issue(["workerId"], "worker-needed")]);
  }
}

/**
 * Puts one set of grants in the place of another: what is missing is revoked, what is new is added. Nobody grants or
 * revokes beyond the sites that they administer. Not of the set are
 * grants with an end, which end by themselves, and those that follow a group.
 */
export async function setGrants(actor: Actor, userId: string, wanted: readonly Grant[]) {
  const twice = wanted.findIndex(
    (grant, index) => wanted.findIndex((other) => key(other) === key(grant)) < index,
  );
  if (twice >= 0) throw unprocessable([issue(["grants", twice], "grant-twice")]);
  const held = await rows<Held>(
    `SELECT id, role, site_id AS "siteId" FROM role_grants WHERE user_id = :userId AND revoked_at IS NULL AND ends_at IS NULL AND mapping_id IS NULL FOR UPDATE`,
    { userId },
  );
  const added = wanted.filter((grant) => !held.some((other) => key(other) === key(grant)));
  const revoked = held.filter((grant) => !wanted.some((other) => key(other) === key(grant)));
  for (const { siteId } of [...added, ...revoked]) {
    if (siteId !== null) await findVisible(Site, sitePolicy, siteId, actor);
    if (!administersReach(actor, siteId)) throw forbidden();
  }
  if (revoked.length > 0) {
    await RoleGrant.update(
      { revokedAt: new Date() },
      { where: { id: revoked.map(({ id }) => id) } },
    );
  }
  await RoleGrant.bulkCreate(
    added.map(({ role, siteId }) => ({
      organizationId: actor.organizationId,
      userId,
      role,
      siteId,
      grantedBy: actor.userId,
    })),
  );
  await keepAnAdministrator();
  const plain = ({ role, siteId }: Grant) => ({ role, siteId });
  return { added: added.map(plain), revoked: revoked.map(plain) };
}
