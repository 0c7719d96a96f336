import { recordAudit } from "../lib/audit";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { User } from "../models/user";
import { keepAnAdministrator } from "./set-grants";

/**
 * Ends a person's access at their next request. The provider's identity is let go, so that the same person can be
 * granted access anew; the event keeps it.
 */
export async function revokeUser(actor: Actor, user: User): Promise<void> {
  if (user.revokedAt !== null) throw new AppError("nothing-to-do", 409);
  const { issuer, subject, expectedSubject } = user;
  await user.update({
    revokedAt: new Date(),
    sessionEpoch: user.sessionEpoch + 1,
    issuer: null,
    subject: null,
    // What stood in for an e-mail has to stay readable on the revoked row.
    expectedSubject: expectedSubject ?? subject,
    revision: user.revision + 1,
  });
  await keepAnAdministrator();
  await recordAudit(actor, {
    action: "revoke-user",
    subjectKind: "user",
    subjectId: user.id,
    values: { issuer, subject },
  });
}
