import type { NextFunction, Request, RequestHandler, Response } from "express";
import type { TokenScope } from "../../shared/schemas/api-token";
import { execute, inTransaction, row } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { organizationOfSecret, secretHash } from "../lib/secret";
import { loadActor } from "./actor";
import { UnfinishedTries } from "./rate-limit";

/** The token of a request that comes with one; such a request has no session, whatever cookies it brings. */
export function bearerOf(request: Request): string | null {
  const match = /^Bearer +(\S+)$/i.exec(request.get("authorization") ?? "");
  return match?.[1] ?? null;
}

/** Sessions and their guard against forged requests are for browsers: no other site can send a token it does not have. */
export const unlessBearer =
  (handler: RequestHandler): RequestHandler =>
  (request: Request, response: Response, next: NextFunction) => {
    if (bearerOf(request) === null) return handler(request, response, next);
    next();
  };

export interface TokenHolder {
  userId: string;
  organizationId: string;
  epoch: number;
  scopes: TokenScope[];
}

/** Tokens that nobody has, from one address in ten minutes. */
const guesses = new UnfinishedTries("token-guess", 60, 10);
/** What one token may ask in ten minutes. */
const uses = new UnfinishedTries("token", 1200, 10);

/** How old the last use has to be to be written anew, minutes. */
const NOTE_USE_AFTER_MIN = 10;

/** What a refusal of a token has to say beside its status (RFC 6750, 3). */
const challenge = (request: Request) =>
  request.res?.setHeader("www-authenticate", 'Bearer realm="Dinward"');

/**
 * Whose token it is, and what it opens: asked at every request, so that it ends with the person or its own time.
 *
 * @throws AppError token-unknown, token-over, token-person-gone, too-many-tries
 */
export async function findToken(token: string, request: Request): Promise<TokenHolder> {
  challenge(request);
  const unknown = async (): Promise<never> => {
    await guesses.begin(request);
    throw new AppError("token-unknown", 401);
  };
  const organizationId = organizationOfSecret(token);
  if (!organizationId) return unknown();
  const found = await inTransaction({ organizationId }, async () => {
    const held = await row<
      TokenHolder & { id: string; isOver: boolean; isGone: boolean; notesUse: boolean }
    >(
      `SELECT t.id, t.user_id AS "userId", t.organization_id AS "organizationId", u.session_epoch AS epoch, to_jsonb(t.scopes) AS scopes,
         t.revoked_at IS NOT NULL OR t.expires_at <= now() AS "isOver",
         u.revoked_at IS NOT NULL OR coalesce(w.left_on < (now() AT TIME ZONE s.time_zone)::date, FALSE) AS "isGone",
         t.last_used_at IS NULL OR t.last_used_at < now() - interval '${NOTE_USE_AFTER_MIN} minutes' AS "notesUse"
       FROM api_tokens t JOIN users u ON u.id = t.user_id LEFT JOIN workers w ON w.id = u.worker_id LEFT JOIN sites s ON s.id = w.site_id
       WHERE t.secret_hash = decode(:hash, 'hex')`,
      { hash: secretHash(token).toString("hex") },
    );
    if (!held) return null;
    if (held.isGone) throw new AppError("token-person-gone", 401);
    if (held.isOver) throw new AppError("token-over", 401);
    if (held.notesUse)
      await execute("UPDATE api_tokens SET last_used_at = now() WHERE id = $1", [held.id]);
    return held;
  });
  if (!found) return unknown();
  await uses.begin(request, found.id);
  request.res?.removeHeader("www-authenticate");
  return found;
}

/**
 * The person whom a token acts for. With the last grant gone it has nobody to act for.
 *
 * @throws AppError token-person-gone
 */
export async function loadTokenActor(
  { userId, epoch }: TokenHolder,
  request: Request,
): Promise<Actor> {
  return loadActor(userId, epoch).catch((error: unknown) => {
    if (!(error instanceof AppError)) throw error;
    challenge(request);
    throw new AppError("token-person-gone", 401);
  });
}
