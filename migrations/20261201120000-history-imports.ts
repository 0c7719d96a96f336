import type { Migration } from "../server/lib/migrator";

export const historyImports: Migration = {
  name: "20261201120000-history-imports",
  up: ({ context: db }) =>
    db.query(`
-- A cancelled import keeps its line and loses its file; so the line says itself what the file was.
ALTER TABLE history_imports ALTER COLUMN file_id DROP NOT NULL,
  ADD COLUMN file_name text NOT NULL CHECK (length(file_name) BETWEEN 1 AND 255),
  ADD COLUMN size_bytes bigint NOT NULL CHECK (size_bytes >= 0),
  -- Whose new run it becomes, where it belongs to none that is recorded.
  ADD COLUMN worker_id uuid,
  -- Codes of what was asked and is accepted.
  ADD COLUMN answers text[] NOT NULL DEFAULT '{}',
  ADD COLUMN store_order jsonb,
  ADD COLUMN history_id uuid,
  -- Attempts at the present order; one that fails too often is given up.
  ADD COLUMN tries int NOT NULL DEFAULT 0,
  ADD CONSTRAINT history_imports_file_kept CHECK (file_id IS NOT NULL OR state = 'cancelled'),
  ADD CONSTRAINT history_imports_of_somebody CHECK (num_nonnulls(run_id, worker_id) > 0),
  ADD FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  ADD FOREIGN KEY (organization_id, history_id) REFERENCES time_histories (organization_id, id);
CREATE UNIQUE INDEX history_imports_file ON history_imports (organization_id, file_id)
  WHERE state NOT IN ('stored', 'cancelled', 'failed');
`),
  down: ({ context: db }) =>
    db.query(`
DROP INDEX history_imports_file;
DELETE FROM history_imports WHERE file_id IS NULL;
ALTER TABLE history_imports DROP CONSTRAINT history_imports_file_kept, DROP CONSTRAINT history_imports_of_somebody,
  DROP COLUMN file_name, DROP COLUMN size_bytes, DROP COLUMN worker_id, DROP COLUMN answers, DROP COLUMN store_order,
  DROP COLUMN history_id, DROP COLUMN tries, ALTER COLUMN file_id SET NOT NULL;
`),
};
