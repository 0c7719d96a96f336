import type { UserView } from "../../shared/schemas/user";
import { type Actor, abilities } from "../lib/policy";
import { administersReach, userPolicy } from "../policies";
import type { UserRow } from "../queries/users";

export function presentUser(actor: Actor, row: UserRow): UserView {
  return {
    id: row.id,
    name: row.name,
    email: row.email,
    expectedSubject: row.expectedSubject,
    isBound: row.isBound,
    workerId: row.workerId,
    workerName: row.workerName,
    language: row.language,
    grants: row.grants.map((grant) => ({
      ...grant,
      isWithinReach: administersReach(actor, grant.siteId),
    })),
    lastSignInAt: row.lastSignInAt?.toISOString() ?? null,
    revokedAt: row.revokedAt?.toISOString() ?? null,
    revision: row.revision,
    can: row.revokedAt
      ? { change: false, revoke: false }
      : abilities(userPolicy, actor, {
          id: row.id,
          reaches: row.grants.map(({ siteId }) => siteId),
        }),
  };
}
