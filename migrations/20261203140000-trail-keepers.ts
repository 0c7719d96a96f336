import type { Migration } from "../server/lib/migrator";

/** Who outside keeps the trail's head, and each mail that took one there. */
export const trailKeepers: Migration = {
  name: "20261203140000-trail-keepers",
  up: ({ context: db }) =>
    db.query(`
-- Each naming is the next number; the latest counts.
CREATE TABLE trail_keepers (
  organization_id uuid NOT NULL REFERENCES organizations,
  number int NOT NULL CHECK (number > 0),
  -- Both null: nobody keeps it any more.
  name text CHECK (length(name) BETWEEN 1 AND 200),
  email text CHECK (length(email) BETWEEN 3 AND 320),
  language text NOT NULL DEFAULT 'en',
  -- Whose clock says when the week's mail goes.
  time_zone text NOT NULL,
  named_by uuid NOT NULL,
  named_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (organization_id, number),
  CHECK ((name IS NULL) = (email IS NULL)),
  FOREIGN KEY (organization_id, named_by) REFERENCES users (organization_id, id)
);
CALL protect_tenant('trail_keepers');
CALL make_append_only('trail_keepers');

CREATE TABLE trail_mails (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL REFERENCES organizations,
  kind text NOT NULL CHECK (kind IN ('head', 'no-longer')),
  -- Of a head: the Monday of its week.
  week date,
  name text NOT NULL,
  email text NOT NULL,
  language text NOT NULL,
  time_zone text NOT NULL,
  state text NOT NULL DEFAULT 'waiting' CHECK (state IN ('waiting', 'sent', 'refused')),
  seal_number bigint,
  seal_sha256 bytea CHECK (length(seal_sha256) = 32),
  sealed_at timestamptz,
  subject text,
  body_text text,
  body_html text,
  created_at timestamptz NOT NULL DEFAULT now(),
  sent_at timestamptz,
  last_error text,
  CHECK ((week IS NULL) = (kind = 'no-longer')),
  CHECK (num_nulls(seal_number, seal_sha256, sealed_at) IN (0, 3))
);
-- A week's head goes to one address once.
CREATE UNIQUE INDEX trail_mails_week ON trail_mails (organization_id, week, lower(email)) WHERE kind = 'head';
CREATE INDEX trail_mails_latest ON trail_mails (organization_id, created_at DESC);
CALL protect_tenant('trail_mails');
`),
  down: ({ context: db }) => db.query("DROP TABLE trail_mails, trail_keepers;"),
};
