import type { Request } from "express";
import { ipKeyGenerator, rateLimit, type Store } from "express-rate-limit";
import { QueryTypes } from "sequelize";
import { sequelize } from "../lib/db";
import { AppError } from "../lib/errors";

/** Counts in the database, so that every web process counts together. */
class DatabaseStore implements Store {
  private windowMs = 60_000;
  constructor(readonly prefix: string) {}

  init(options: { windowMs: number }) {
    this.windowMs = options.windowMs;
  }

  async increment(key: string) {
    const [found] = await sequelize().query<{ hits: number; resetsAt: Date }>(
      `INSERT INTO rate_limits AS r (key, hits, resets_at) VALUES ($1, 1, now() + $2 * interval '1 millisecond')
       ON CONFLICT (key) DO UPDATE SET
         hits = CASE WHEN r.resets_at <= now() THEN 1 ELSE r.hits + 1 END,
         resets_at = CASE WHEN r.resets_at <= now() THEN excluded.resets_at ELSE r.resets_at END
       RETURNING hits, resets_at AS "resetsAt"`,
      { bind: [this.prefix + key, this.windowMs], type: QueryTypes.SELECT, transaction: null },
    );
    return { totalHits: found?.hits ?? 1, resetTime: found?.resetsAt };
  }

  async decrement(key: string) {
    await sequelize().query("UPDATE rate_limits SET hits = greatest(hits - 1, 0) WHERE key = $1", {
      bind: [this.prefix + key],
      transaction: null,
    });
  }

  async resetKey(key: string) {
    await sequelize().query("DELETE FROM rate_limits WHERE key = $1", {
      bind: [this.prefix + key],
      transaction: null,
    });
  }
}

const keyOf = (request: Request) => ipKeyGenerator(request.ip ?? "unknown");

function tooManyTries(request: Request, resetsAt: Date): AppError {
  const waitS = Math.max(1, Math.ceil((resetsAt.getTime() - Date.now()) / 1000));
  request.res?.setHeader("retry-after", String(waitS));
  return new AppError("too-many-tries", 429, { minutes: Math.ceil(waitS / 60) });
}

/** At most `limit` requests per address and window. */
export function limitTries(name: string, limit: number, windowMin: number) {
  const windowMs = windowMin * 60_000;
  return rateLimit({
    windowMs,
    limit,
    standardHeaders: "draft-8",
    legacyHeaders: false,
    store: new DatabaseStore(`${name}:`),
    keyGenerator: keyOf,
    handler: (request, _response, next) => {
      const { resetTime } = (request as Request & { rateLimit: { resetTime?: Date } }).rateLimit;
      next(tooManyTries(request, resetTime ?? new Date(Date.now() + windowMs)));
    },
  });
}

/**
 * Tries of which only those count that do not end well: a whole crew signs in from behind one address, and somebody who
 * guesses is stopped soon.
 */
export class UnfinishedTries {
  private readonly store: DatabaseStore;

  constructor(
    name: string,
    private readonly limit: number,
    windowMin: number,
  ) {
    this.store = new DatabaseStore(`${name}:`);
    this.store.init({ windowMs: windowMin * 60_000 });
  }

  /**
   * Counts a try, until it ends well; by address, unless something else is to be counted.
   *
   * @throws AppError too-many-tries
   */
  async begin(request: Request, key = keyOf(request)): Promise<void> {
    const { totalHits, resetTime } = await this.store.increment(key);
    if (totalHits > this.limit) throw tooManyTries(request, resetTime ?? new Date());
  }

  /** It ended well: as if it had never been. */
  async endWell(request: Request): Promise<void> {
    await this.store.decrement(keyOf(request));
  }
}
