import type { Migration } from "../server/lib/migrator";

/** Who read whose record: one row for a reader, a worker, a part of the record and a day. */
export const recordReads: Migration = {
  name: "20261202110100-record-reads",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE record_reads (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  reader_id uuid NOT NULL,
  -- Null: a file of a whole year.
  worker_id uuid,
  -- Of the worker at that time, or of the file.
  site_id uuid NOT NULL,
  year int,
  kind text NOT NULL CHECK (kind IN ('page', 'history', 'result', 'shift', 'run', 'fits', 'training', 'finding', 'letter', 'export')),
  -- By the site's clock.
  read_on date NOT NULL,
  first_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  CHECK ((worker_id IS NULL) = (kind = 'export') AND (year IS NULL) = (worker_id IS NOT NULL)),
  FOREIGN KEY (organization_id, reader_id) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CREATE UNIQUE INDEX record_reads_once ON record_reads (worker_id, reader_id, read_on, kind) WHERE worker_id IS NOT NULL;
CREATE UNIQUE INDEX record_reads_file_once ON record_reads (site_id, year, reader_id, read_on) WHERE worker_id IS NULL;
CREATE INDEX record_reads_list ON record_reads (organization_id, first_at DESC, id DESC);
CREATE INDEX record_reads_worker ON record_reads (worker_id, first_at DESC, id DESC);
CALL protect_tenant('record_reads');
CALL make_append_only('record_reads');
`),
  down: ({ context: db }) => db.query("DROP TABLE record_reads;"),
};
