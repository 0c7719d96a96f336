import { randomBytes } from "node:crypto";
import type { Mail } from "../emails/frame";
import { execute } from "../lib/db";
import { secretHash } from "../lib/secret";

/** Where a letter's link leads. */
export const LETTER_PATH = "/acknowledge/";
/** Stands in place of the secret in what is kept of a mail. */
export const HIDDEN_SECRET = "…";
/** A link is good for so long. */
const LINK_DAYS = 60;

/**
 * A mail of results with a link of its own in it. Each attempt to send gets another: only hashes are kept, so none can be
 * written a second time; what stands in the mail is otherwise word for word the same.
 */
export async function linkLetter(noticeId: string, mail: Mail): Promise<Mail> {
  const secret = randomBytes(24).toString("base64url");
  await execute(
    `INSERT INTO letter_links (secret_hash, organization_id, letter_id, expires_at)
     SELECT $2, l.organization_id, l.id, now() + interval '${LINK_DAYS} days' FROM result_letters l WHERE l.notice_id = $1`,
    [noticeId, secretHash(secret).toString("hex")],
  );
  const linked = (text: string) =>
    text.replaceAll(`${LETTER_PATH}${HIDDEN_SECRET}`, `${LETTER_PATH}${secret}`);
  return { subject: mail.subject, text: linked(mail.text), html: linked(mail.html) };
}
