import type { Migration } from "../server/lib/migrator";

/** On which side of the true level at the ear a result's stands, and a target stricter than the rule's. An older result has neither. */
export const atEarBounds: Migration = {
  name: "20261201140000-at-ear-bounds",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE day_results
  ADD COLUMN at_ear_bound text CHECK (at_ear_bound IN ('exact', 'upper', 'lower')),
  ADD COLUMN own_target_db double precision;
`),
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE day_results DROP COLUMN at_ear_bound, DROP COLUMN own_target_db;
`),
};
