import type { Migration } from "../server/lib/migrator";

/**
 * By when those who wear a protector that was never tested on them have their test: within so many days of being given
 * it, and where they had it before the site began to ask, of the day on which it did.
 */
export const firstFits: Migration = {
  name: "20261202090500-first-fits",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE sites
  ADD COLUMN fit_first_days int NOT NULL DEFAULT 90 CHECK (fit_first_days BETWEEN 1 AND 365),
  ADD COLUMN fit_asked_from date;
UPDATE sites SET fit_asked_from = current_date WHERE fit_every_months IS NOT NULL OR fit_after_fail_days IS NOT NULL;
`),
  down: ({ context: db }) =>
    db.query("ALTER TABLE sites DROP COLUMN fit_first_days, DROP COLUMN fit_asked_from;"),
};
