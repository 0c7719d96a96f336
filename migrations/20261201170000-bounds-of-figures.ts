import type { Migration } from "../server/lib/migrator";

/**
 * On which side of the true ones a result's level while worn and its dose stand, and the day at the ear as it is judged
 * where an active part is credited. An older result does not say.
 */
export const boundsOfFigures: Migration = {
  name: "20261201170000-bounds-of-figures",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE day_results
  ADD COLUMN while_worn_bound text CHECK (while_worn_bound IN ('exact', 'upper', 'lower')),
  ADD COLUMN at_ear_counted_db double precision,
  ADD COLUMN dose_bound text CHECK (dose_bound IN ('exact', 'upper', 'lower'));
`),
  down: ({ context: db }) =>
    db.query(
      "ALTER TABLE day_results DROP COLUMN while_worn_bound, DROP COLUMN at_ear_counted_db, DROP COLUMN dose_bound",
    ),
};
