import type { Migration } from "../server/lib/migrator";

/** An auditor's random draw of a year's records, what each was marked, and the signature under them. */
export const recordDraws: Migration = {
  name: "20261202140000-record-draws",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE record_draws (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  year int NOT NULL,
  seed text NOT NULL CHECK (length(seed) BETWEEN 1 AND 100),
  -- Results in force that were drawn from: how many, and the SHA-256 of their ids in order, one a line.
  drawn_from int NOT NULL CHECK (drawn_from > 0),
  drawn_from_sha256 bytea NOT NULL CHECK (length(drawn_from_sha256) = 32),
  author_id uuid NOT NULL,
  created_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id)
);
CREATE INDEX record_draws_year ON record_draws (site_id, year, created_at DESC);
CALL protect_tenant('record_draws');
CALL make_append_only('record_draws');

CREATE TABLE record_draw_items (
  organization_id uuid NOT NULL,
  draw_id uuid NOT NULL,
  position int NOT NULL CHECK (position > 0),
  worker_id uuid NOT NULL,
  date date NOT NULL,
  result_id uuid NOT NULL,
  PRIMARY KEY (draw_id, position),
  UNIQUE (organization_id, draw_id, position),
  UNIQUE (draw_id, result_id),
  FOREIGN KEY (organization_id, draw_id) REFERENCES record_draws (organization_id, id),
  FOREIGN KEY (organization_id, worker_id, date, result_id) REFERENCES day_results (organization_id, worker_id, date, id)
);
CREATE INDEX record_draw_items_result ON record_draw_items (worker_id, date, result_id);
CALL protect_tenant('record_draw_items');
CALL make_append_only('record_draw_items');

-- The latest mark of a record is the one that counts; earlier ones stay to be read.
CREATE TABLE record_draw_marks (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  draw_id uuid NOT NULL,
  position int NOT NULL,
  number int NOT NULL CHECK (number > 0),
  word text NOT NULL CHECK (word IN ('in-order', 'question')),
  note text NOT NULL DEFAULT '' CHECK (length(note) <= 2000),
  author_id uuid NOT NULL,
  created_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  UNIQUE (draw_id, position, number),
  CHECK (word = 'in-order' OR length(note) >= 3),
  FOREIGN KEY (organization_id, draw_id, position) REFERENCES record_draw_items (organization_id, draw_id, position),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id)
);
CALL protect_tenant('record_draw_marks');
CALL make_append_only('record_draw_marks');

CREATE TABLE record_draw_signatures (
  draw_id uuid PRIMARY KEY,
  organization_id uuid NOT NULL,
  records int NOT NULL CHECK (records > 0),
  questions int NOT NULL CHECK (questions BETWEEN 0 AND records),
  author_id uuid NOT NULL,
  signed_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  FOREIGN KEY (organization_id, draw_id) REFERENCES record_draws (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id)
);
CALL protect_tenant('record_draw_signatures');
CALL make_append_only('record_draw_signatures');
`),
  down: ({ context: db }) =>
    db.query(
      "DROP TABLE record_draw_signatures, record_draw_marks, record_draw_items, record_draws;",
    ),
};
