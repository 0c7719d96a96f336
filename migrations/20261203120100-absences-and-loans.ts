import type { Migration } from "../server/lib/migrator";

/**
 * Days on which somebody is not in, as a crew's supervisor says it ahead, and loans that have a revision of their own. Why
 * somebody is not in is nowhere asked and has no column.
 */
export const absencesAndLoans: Migration = {
  name: "20261203120100-absences-and-loans",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE absence_spans (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  -- Through which it was entered, and whose supervisors may change it.
  crew_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  valid daterange NOT NULL CHECK (NOT isempty(valid) AND NOT lower_inf(valid)),
  is_struck boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  author_id uuid NOT NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, crew_id) REFERENCES crews (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id),
  CONSTRAINT absence_spans_overlap EXCLUDE USING gist (worker_id WITH =, valid WITH &&) WHERE (NOT is_struck)
);
CREATE INDEX absence_spans_crew ON absence_spans (crew_id);
CALL protect_tenant('absence_spans');

ALTER TABLE crew_memberships ADD COLUMN revision int NOT NULL DEFAULT 1;
`),
  down: ({ context: db }) =>
    db.query(`
DROP TABLE absence_spans;
ALTER TABLE crew_memberships DROP COLUMN revision;
CALL watch_table('crew_memberships');
`),
};
