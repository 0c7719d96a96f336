import type { z } from "zod";
import type { UserChange } from "../../shared/schemas/user";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { User } from "../models/user";
import { checkLink, setGrants } from "./set-grants";

/** Name, language, worker and grants; that somebody stays an administrator is the database's to hold. */
export async function changeUser(
  actor: Actor,
  user: User,
  input: z.infer<typeof UserChange>,
): Promise<void> {
  if (user.revokedAt !== null) throw new AppError("nothing-to-do", 409);
  const { grants, ...facts } = input;
  await checkLink(facts.workerId, grants);
  const changes = changesBetween(user, facts);
  const { added, revoked } = await setGrants(actor, user.id, grants);
  if (isUnchanged(changes) && added.length + revoked.length === 0) return;
  await user.update({ ...facts, revision: user.revision + 1 });
  const values = {
    ...changes,
    ...(added.length > 0 ? { granted: added } : {}),
    ...(revoked.length > 0 ? { revoked } : {}),
  };
  await recordAudit(actor, {
    action: "change-user",
    subjectKind: "user",
    subjectId: user.id,
    values,
  });
}
