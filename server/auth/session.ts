import { randomBytes } from "node:crypto";
import connectPgSimple from "connect-pg-simple";
import type { NextFunction, Request, RequestHandler, Response } from "express";
import session from "express-session";
import { QueryTypes } from "sequelize";
import type { Config } from "../config";
import { CSRF_COOKIE, CSRF_HEADER } from "../lib/csrf";
import { sequelize } from "../lib/db";
import { AppError } from "../lib/errors";

declare module "express-session" {
  interface SessionData {
    userId?: string;
    organizationId?: string;
    epoch?: number;
    /** When it began; it ends SESSION_ABSOLUTE_MIN later however busy it is. */
    startedAt?: number;
    csrf?: string;
    idToken?: string;
    returnTo?: string;
    /** A sign-in was begun here and counts as unfinished: beginning it again counts no further. */
    isSigningIn?: boolean;
    /** Whom the provider vouched for, while no grant matches: such a person may only enter a worker's code. */
    pending?: { issuer: string; subject: string; email: string | null; name: string };
    /** When what was granted to them for a time ended. */
    endedAt?: string;
  }
}

const cookieName = "dinward.sid";

/** connect-pg-simple takes anything with pg's `query`; the one pool of the process serves it too. */
const poolLike = {
  async query(text: string, values: unknown[] = []) {
    const found = await sequelize().query(text, {
      bind: values,
      type: QueryTypes.RAW,
      transaction: null,
    });
    const [rows] = found as [unknown[], unknown];
    return { rows, rowCount: Array.isArray(rows) ? rows.length : 0 };
  },
};

/** A session's idle time counts from its last request, give or take this much: reading needs no write then. */
const TOUCH_AFTER_S = 60;

export function sessions(config: Config<"web">): RequestHandler[] {
  const PgStore = connectPgSimple(session);
  const idleS = config.SESSION_IDLE_MIN * 60;
  class Store extends PgStore {
    override touch(sid: string, _session: session.SessionData, done?: () => void): void {
      poolLike
        .query(
          "UPDATE sessions SET expire = now() + make_interval(secs => $1) WHERE sid = $2 AND expire < now() + make_interval(secs => $3)",
          [idleS, sid, idleS - Math.min(TOUCH_AFTER_S, idleS / 10)],
        )
        // The answer is on its way: an error told now would only cut its connection.
        .then(
          () => done?.(),
          () => done?.(),
        );
    }
  }
  const isHttps = config.PUBLIC_URL.startsWith("https:");
  const store = new Store({
    pool: poolLike as never,
    tableName: "sessions",
    ttl: idleS,
    pruneSessionInterval: false,
    errorLog: () => undefined,
  });
  const handler = session({
    name: cookieName,
    secret: [...config.SESSION_SECRETS],
    store,
    resave: false,
    saveUninitialized: false,
    rolling: true,
    cookie: {
      httpOnly: true,
      sameSite: "lax",
      secure: isHttps,
      maxAge: config.SESSION_IDLE_MIN * 60_000,
      path: "/",
    },
  });
  const absolute = (request: Request, response: Response, next: NextFunction) => {
    const { startedAt } = request.session;
    if (startedAt && Date.now() - startedAt > config.SESSION_ABSOLUTE_MIN * 60_000) {
      request.session.destroy(() => {
        clearCookies(response);
        next(new AppError("signed-out", 401));
      });
    } else next();
  };
  return [handler, absolute];
}

export function clearCookies(response: Response): void {
  response.clearCookie(cookieName, { path: "/" });
  response.clearCookie(CSRF_COOKIE, { path: "/" });
}

/** A new session id with nothing of the old session: whoever knew the old id gains nothing. */
export async function rotateSession(
  request: Request,
  response: Response,
  data: Partial<session.SessionData>,
): Promise<void> {
  await new Promise<void>((resolve, reject) =>
    request.session.regenerate((error) => (error ? reject(error) : resolve())),
  );
  const csrf = randomBytes(24).toString("base64url");
  Object.assign(request.session, { ...data, csrf, startedAt: Date.now() });
  await new Promise<void>((resolve, reject) =>
    request.session.save((error) => (error ? reject(error) : resolve())),
  );
  const { secure } = request.session.cookie;
  response.cookie(CSRF_COOKIE, csrf, {
    httpOnly: false,
    sameSite: "lax",
    secure: Boolean(secure),
    path: "/",
    // It outlives the browser as the session does, and is worth nothing without it.
    maxAge: 30 * 86_400_000,
  });
}

const safe = new Set(["GET", "HEAD", "OPTIONS"]);

/** A change needs the session's own token in a header, which another site can neither read nor send. */
export function refuseForgery(request: Request, _response: Response, next: NextFunction): void {
  next(isForged(request) ? new AppError("csrf", 403) : undefined);
}

function isForged(request: Request): boolean {
  if (safe.has(request.method)) return false;
  const site = request.get("sec-fetch-site");
  if (site && site !== "same-origin" && site !== "none") return true;
  const { csrf, userId, pending } = request.session;
  // Without a session there is nothing to forge: the endpoint answers 401 by itself.
  if (!userId && !pending) return false;
  return !csrf || request.get(CSRF_HEADER) !== csrf;
}
