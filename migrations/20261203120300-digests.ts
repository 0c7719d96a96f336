import type { Migration } from "../server/lib/migrator";

/** A mail a day with what stands on one's crews' sheets, at an hour that the person chose; nobody has to. */
export const digests: Migration = {
  name: "20261203120300-digests",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE digest_choices (
  user_id uuid PRIMARY KEY,
  organization_id uuid NOT NULL,
  -- By the clock of each site; null: no mail.
  hour int CHECK (hour BETWEEN 0 AND 23),
  chosen_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  FOREIGN KEY (organization_id, user_id) REFERENCES users (organization_id, id)
);
CALL protect_tenant('digest_choices');

-- One a person, site and local date: an hour that comes twice sends once.
CREATE TABLE digests (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  user_id uuid NOT NULL,
  site_id uuid NOT NULL,
  date date NOT NULL,
  state text NOT NULL DEFAULT 'waiting' CHECK (state IN ('waiting', 'nothing', 'sent', 'refused')),
  subject text,
  body_text text,
  body_html text,
  created_at timestamptz NOT NULL DEFAULT now(),
  sent_at timestamptz,
  last_error text,
  UNIQUE (user_id, site_id, date),
  FOREIGN KEY (organization_id, user_id) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CALL protect_tenant('digests');
`),
  down: ({ context: db }) => db.query("DROP TABLE digests, digest_choices;"),
};
