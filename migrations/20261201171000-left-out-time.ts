import type { Migration } from "../server/lib/migrator";

/**
 * How the time that is left out of a history was, as the officer said; null: nothing is left out, or nobody said. A run's
 * revision carries it to the day: {how, levelDb, countedMin, spans: [[from, to], …]}, of what its history gives.
 */
export const leftOutTime: Migration = {
  name: "20261201171000-left-out-time",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE time_history_revisions
  ADD COLUMN left_out_how text CHECK (left_out_how IN ('unknown', 'like-the-rest', 'quiet')),
  ADD COLUMN left_out_level_db double precision CHECK (left_out_level_db BETWEEN 20 AND 160),
  ADD CONSTRAINT time_history_revisions_left_out CHECK ((left_out_how IS NOT DISTINCT FROM 'quiet') = (left_out_level_db IS NOT NULL));
ALTER TABLE run_revisions ADD COLUMN left_out jsonb;
`),
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE time_history_revisions DROP COLUMN left_out_how, DROP COLUMN left_out_level_db;
ALTER TABLE run_revisions DROP COLUMN left_out;
`),
};
