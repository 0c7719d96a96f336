import { type MailChoiceInput, OPTIONAL_MAILS } from "../../shared/schemas/mail-choice";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { ownMails } from "../queries/mail-choices";

/**
 * Which mails the actor does without.
 *
 * @throws AppError invalid: one of them is required
 */
export async function chooseMails(
  actor: Actor,
  { off }: MailChoiceInput,
  seenRevision: number,
): Promise<void> {
  const before = await ownMails(actor);
  await requireRevision(before, seenRevision, async () => before);
  const issues = off.flatMap((kind, place) =>
    OPTIONAL_MAILS.includes(kind) ? [] : [issue(["off", place], "mail-required")],
  );
  if (issues.length > 0) throw unprocessable(issues);
  const wanted = [...new Set(off)].toSorted();
  const wasOff = before.rows.filter(({ isOn }) => !isOn).map(({ kind }) => kind);
  if (wanted.join() === wasOff.toSorted().join()) return;
  await execute(
    `INSERT INTO mail_choices (user_id, organization_id, off) VALUES ($1, $2, $3)
     ON CONFLICT (user_id) DO UPDATE SET off = $3, revision = mail_choices.revision + 1`,
    [actor.userId, actor.organizationId, wanted],
  );
  await recordAudit(actor, {
    action: "choose-mails",
    subjectKind: "user",
    subjectId: actor.userId,
    values: { off: { from: wasOff, to: wanted } },
  });
}
