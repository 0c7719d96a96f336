import { randomUUID } from "node:crypto";
import type { Role } from "../../server/lib/policy";
import { insert, next } from "./insert";
import { buildOrganization } from "./organization";

export interface User {
  id: string;
  organizationId: string;
  name: string;
  email: string;
}

interface UserOverrides {
  organizationId?: string;
  name?: string;
  email?: string;
  workerId?: string;
  language?: string;
  roles?: Role[];
  /** Where the roles hold; everywhere unless told. */
  siteId?: string;
}

/** Somebody who may sign in, with these roles. */
export async function buildUser(overrides: UserOverrides = {}): Promise<User> {
  const organizationId = overrides.organizationId ?? (await buildOrganization()).id;
  const count = next();
  const {
    name = `Person ${count}`,
    // All files of a run share one mail catcher.
    email = `person-${randomUUID().slice(0, 8)}@dinward.example`,
    workerId,
    language,
  } = overrides;
  const id = await insert("users", { organizationId, name, email, workerId, language });
  for (const role of overrides.roles ?? []) {
    await insert("role_grants", { organizationId, userId: id, role, siteId: overrides.siteId });
  }
  return { id, organizationId, name, email };
}
