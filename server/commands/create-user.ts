import type { UserInput } from "../../shared/schemas/user";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import { User } from "../models/user";
import { checkLink, setGrants } from "./set-grants";

export async function createUser(actor: Actor, input: UserInput): Promise<User> {
  const { grants, ...facts } = input;
  await checkLink(facts.workerId, grants);
  const user = await User.create({ organizationId: actor.organizationId, ...facts });
  await setGrants(actor, user.id, grants);
  await recordAudit(actor, {
    action: "create-user",
    subjectKind: "user",
    subjectId: user.id,
    values: input,
  });
  return user;
}
