import type { Migration } from "../server/lib/migrator";

/** Reports of a site's year that were issued, each with the figures that it states and the results that it rests on. */
export const yearReports: Migration = {
  name: "20261203130000-year-reports",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE year_reports (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  year int NOT NULL,
  -- 1, 2, 3… of the site and year: each says what changed since the one before it.
  number int NOT NULL CHECK (number > 0),
  as_of timestamptz NOT NULL,
  figures jsonb NOT NULL,
  -- The results in force then, in order, and the SHA-256 of their ids, one a line.
  results uuid[] NOT NULL,
  results_sha256 bytea NOT NULL CHECK (length(results_sha256) = 32),
  -- The trail's last seal then; null: there was none.
  seal_number bigint,
  seal_sha256 bytea CHECK (length(seal_sha256) = 32),
  author_id uuid NOT NULL,
  UNIQUE (organization_id, id),
  UNIQUE (site_id, year, number),
  CHECK ((seal_number IS NULL) = (seal_sha256 IS NULL)),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id)
);
CALL protect_tenant('year_reports');
CALL make_append_only('year_reports');
`),
  down: ({ context: db }) => db.query("DROP TABLE year_reports;"),
};
