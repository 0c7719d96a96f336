import { createHash, createHmac, timingSafeEqual } from "node:crypto";
import { type Attachment, simpleParser } from "mailparser";
import type { MailHookEvent } from "../../shared/schemas/mail-event";
import { AppError } from "./errors";

export const HOOK_TIME_HEADER = "x-dinward-time";
export const HOOK_SIGNATURE_HEADER = "x-dinward-signature";
/** A report older than this, or as far ahead, is refused: nobody can send a recorded one again later. */
const WINDOW_S = 300;

/** HMAC-SHA256 over the time in seconds, a point and the body, in hex. */
export const hookSignature = (secret: string, timeS: string, body: Buffer): string =>
  createHmac("sha256", secret).update(`${timeS}.`).update(body).digest("hex");

/**
 * Refuses a report that none of the secrets signed, or that is not of now.
 *
 * @throws AppError not-found: no secret is configured; hook-unsigned; hook-stale
 */
export function checkHook(
  secrets: readonly string[],
  timeS: string | undefined,
  signature: string | undefined,
  body: Buffer,
  now: Date,
): void {
  if (secrets.length === 0) throw new AppError("not-found", 404);
  if (!timeS || !/^\d{1,12}$/.test(timeS) || !signature || !/^[0-9a-f]{64}$/.test(signature))
    throw new AppError("hook-unsigned", 401);
  const given = Buffer.from(signature, "hex");
  const isSigned = secrets.some((secret) =>
    timingSafeEqual(Buffer.from(hookSignature(secret, timeS, body), "hex"), given),
  );
  if (!isSigned) throw new AppError("hook-unsigned", 401);
  if (Math.abs(now.getTime() / 1000 - Number(timeS)) > WINDOW_S)
    throw new AppError("hook-stale", 401);
}

const KINDS: Readonly<Record<string, MailHookEvent["kind"]>> = {
  failed: "bounced",
  delayed: "delayed",
  delivered: "delivered",
};

const textOf = (part: Attachment | undefined): string => part?.content.toString("utf8") ?? "";

/** A field of a report or of a head, its folded lines as one. */
const field = (text: string, name: string): string | null =>
  new RegExp(`^${name}:[ \\t]*(.*(?:\\r?\\n[ \\t].*)*)`, "im")
    .exec(text)?.[1]
    ?.replace(/\r?\n[ \t]+/g, " ")
    .trim() ?? null;

/**
 * What a delivery-status mail says of the mail that it is about; null where it is no such mail or names none (RFC 3464, 2.1 and 2.3).
 */
export async function readDeliveryReport(mail: Buffer): Promise<MailHookEvent | null> {
  const parsed = await simpleParser(mail, { keepDeliveryStatus: true });
  const part = (...types: string[]) =>
    parsed.attachments.find(({ contentType }) => types.includes(contentType));
  const report = textOf(part("message/delivery-status"));
  const kind = KINDS[field(report, "Action")?.toLowerCase() ?? ""];
  // The mail itself, where it comes back whole, is taken apart with the rest: its head stands behind the report.
  const behind = mail.toString("latin1").split(/^Content-Type:[ \t]*message\/delivery-status/im)[1];
  const messageId =
    field(textOf(part("message/rfc822", "text/rfc822-headers")), "Message-ID") ??
    field(behind ?? "", "Message-ID");
  if (!kind || !messageId) return null;
  const status = field(report, "Status")?.match(/^[245]\.\d{1,3}\.\d{1,3}/)?.[0] ?? null;
  return {
    id: parsed.messageId ?? createHash("sha256").update(mail).digest("hex"),
    kind,
    messageId,
    status,
    said: field(report, "Diagnostic-Code"),
  };
}
