import type { Migration } from "../server/lib/migrator";

/** How a task's noise runs, which decides how long its samples last. Earlier plans took every task as steady. */
export const samplingPatterns: Migration = {
  name: "20261201160000-sampling-patterns",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE survey_targets
  ADD COLUMN pattern text NOT NULL DEFAULT 'steady' CHECK (pattern IN ('steady', 'cyclic', 'fluctuating')),
  ADD COLUMN cycle_min double precision CHECK (cycle_min > 0 AND cycle_min <= 1440),
  ADD CONSTRAINT survey_targets_cycle CHECK (cycle_min IS NULL OR pattern = 'cyclic');
`),
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE survey_targets DROP CONSTRAINT survey_targets_cycle, DROP COLUMN cycle_min, DROP COLUMN pattern;
`),
};
