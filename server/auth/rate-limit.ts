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

/** At most `limit` tries per address and window. */
export function limitTries(name: string, limit: number, windowMin: number) {
  return rateLimit({
    windowMs: windowMin * 60_000,
    limit,
    standardHeaders: "draft-8",
    legacyHeaders: false,
    store: new DatabaseStore(`${name}:`),
    keyGenerator: (request) => ipKeyGenerator(request.ip ?? "unknown"),
    handler: (_request, _response, next, options) =>
      next(new AppError("too-many-tries", 429, { minutes: Math.ceil(options.windowMs / 60_000) })),
  });
}
