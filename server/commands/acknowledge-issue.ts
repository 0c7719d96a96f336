import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import type { ProtectorIssue } from "../models/issue";

/** That the device was received: said by the worker on the own page, or in person before an officer. */
export async function acknowledgeIssue(actor: Actor, issued: ProtectorIssue): Promise<void> {
  const acknowledgedHow = actor.workerId === issued.workerId ? "own-page" : "in-person";
  await issued.update({
    acknowledgedAt: new Date(),
    acknowledgedHow,
    revision: issued.revision + 1,
  });
  await recordAudit(actor, {
    action: "acknowledge-issue",
    subjectKind: "protector-issue",
    subjectId: issued.id,
    values: { workerId: issued.workerId, acknowledgedHow },
  });
}
