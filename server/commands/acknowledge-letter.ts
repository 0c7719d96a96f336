import type { OpenedLetter } from "../../shared/schemas/letter";
import { localDate } from "../../shared/time/zone";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { execute, inTransaction, row } from "../lib/db";
import { AppError, issue, notFound, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { secretHash } from "../lib/secret";
import type { LetterHead } from "../queries/letters";

interface Opened {
  letterId: string;
  workerId: string;
  timeZone: string;
  language: string;
  organizationName: string;
  siteName: string;
  subject: string;
  text: string;
  isExpired: boolean;
  acknowledgedAt: Date | null;
  signedOn: string | null;
}

/** Who is signed in in the browser that opened the link, if anybody. */
export interface Visitor {
  userId?: string;
  organizationId?: string;
}

/**
 * Runs something on the letter that a link belongs to, in its organization.
 *
 * @throws AppError not-found: no such link; link-not-yours: somebody else is signed in here.
 */
async function atLink<T>(
  secret: string,
  visitor: Visitor,
  isChange: boolean,
  work: (opened: Opened, organizationId: string) => Promise<T>,
): Promise<T> {
  const hash = secretHash(secret).toString("hex");
  const link = await inTransaction({ settings: { "app.letter_link": hash }, readOnly: true }, () =>
    row<{ organizationId: string }>(
      `SELECT organization_id AS "organizationId" FROM letter_links WHERE secret_hash = :hash`,
      { hash },
    ),
  );
  if (!link) throw notFound();
  const { organizationId } = link;
  return inTransaction({ organizationId, readOnly: !isChange }, async () => {
    const opened = await row<Opened>(
      `SELECT l.id AS "letterId", l.worker_id AS "workerId", s.time_zone AS "timeZone", l.language, o.name AS "organizationName", s.name AS "siteName",
         l.subject, l.body_text AS text, k.expires_at <= now() AS "isExpired", a.recorded_at AS "acknowledgedAt", a.signed_on::text AS "signedOn"
       FROM letter_links k JOIN result_letters l ON l.id = k.letter_id JOIN sites s ON s.id = l.site_id JOIN organizations o ON o.id = l.organization_id
       LEFT JOIN notice_acknowledgements a ON a.letter_id = l.id WHERE k.secret_hash = :hash`,
      { hash },
    );
    if (!opened) throw notFound();
    if (visitor.userId && !(await isReader(visitor.userId, opened.workerId)))
      throw new AppError("link-not-yours", 403);
    return work(opened, organizationId);
  });
}

/** Somebody of another organization is not seen from here, and so is nobody's reader either. */
async function isReader(userId: string, workerId: string): Promise<boolean> {
  const reader = await row(
    "SELECT 1 AS one FROM users WHERE id = :userId AND worker_id = :workerId",
    {
      userId,
      workerId,
    },
  );
  return reader !== null;
}

function present(opened: Opened): OpenedLetter {
  const { acknowledgedAt, signedOn, isExpired, language, organizationName, siteName } = opened;
  const state = acknowledgedAt ? "acknowledged" : isExpired ? "expired" : "open";
  return {
    state,
    language,
    from: `${organizationName}, ${siteName}`,
    subject: state === "open" ? opened.subject : null,
    text: state === "open" ? opened.text : null,
    acknowledgedOn: acknowledgedAt
      ? (signedOn ?? localDate(acknowledgedAt, opened.timeZone))
      : null,
  };
}

/** What a link leads to. Opening it changes nothing: mail servers open links to look at them. */
export const openLetter = (secret: string, visitor: Visitor): Promise<OpenedLetter> =>
  atLink(secret, visitor, false, async (opened) => present(opened));

/**
 * The worker says by the link that the letter was read.
 *
 * @throws AppError link-used, link-expired
 */
export const acknowledgeByLink = (secret: string, visitor: Visitor): Promise<OpenedLetter> =>
  atLink(secret, visitor, true, async (opened, organizationId) => {
    if (opened.acknowledgedAt) throw new AppError("link-used", 409);
    if (opened.isExpired) throw new AppError("link-expired", 409);
    const now = new Date();
    const stored = await execute(
      `INSERT INTO notice_acknowledgements (organization_id, letter_id, way, recorded_at) VALUES ($1, $2, 'link', $3)
       ON CONFLICT ON CONSTRAINT notice_acknowledgements_once DO NOTHING`,
      [organizationId, opened.letterId, now],
    );
    if (stored === 0) throw new AppError("link-used", 409);
    await recordAudit(
      { organizationId },
      {
        action: "acknowledge-letter",
        subjectKind: "letter",
        subjectId: opened.letterId,
        values: { way: "link" },
      },
    );
    return present({ ...opened, acknowledgedAt: now });
  });

/**
 * The officer records a signed letter.
 *
 * @throws AppError letter-acknowledged; invalid: signed before it was written, or in days to come.
 */
export async function acknowledgeOnPaper(
  actor: Actor,
  letter: LetterHead,
  signedOn: string,
): Promise<void> {
  const writtenOn = localDate(letter.writtenAt, letter.timeZone);
  const today = todayAt(letter.timeZone);
  if (signedOn < writtenOn)
    throw unprocessable([issue(["signedOn"], "signed-before-written", { writtenOn })]);
  if (signedOn > today) throw unprocessable([issue(["signedOn"], "in-the-future")]);
  const stored = await execute(
    `INSERT INTO notice_acknowledgements (organization_id, letter_id, way, signed_on, recorded_by) VALUES ($1, $2, 'paper', $3, $4)
     ON CONFLICT ON CONSTRAINT notice_acknowledgements_once DO NOTHING`,
    [actor.organizationId, letter.id, signedOn, actor.userId],
  );
  if (stored === 0) throw new AppError("letter-acknowledged", 409);
  await recordAudit(actor, {
    action: "acknowledge-letter",
    subjectKind: "letter",
    subjectId: letter.id,
    values: { way: "paper", signedOn },
  });
}
