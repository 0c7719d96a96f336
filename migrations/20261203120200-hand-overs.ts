import type { Migration } from "../server/lib/migrator";

/** What one shift's supervisor hands to the next, frozen as it was given, and that it was read. */
export const handOvers: Migration = {
  name: "20261203120200-hand-overs",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE hand_overs (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  crew_id uuid NOT NULL,
  -- The day that the sheet was for.
  sheet_date date NOT NULL,
  content jsonb NOT NULL,
  note text NOT NULL CHECK (length(note) <= 4000),
  author_id uuid NOT NULL,
  recipient_id uuid NOT NULL CHECK (recipient_id <> author_id),
  given_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, crew_id) REFERENCES crews (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, recipient_id) REFERENCES users (organization_id, id)
);
CREATE INDEX hand_overs_crew ON hand_overs (crew_id, given_at DESC, id);
CREATE INDEX hand_overs_recipient ON hand_overs (recipient_id, crew_id);
CALL protect_tenant('hand_overs');
CALL make_append_only('hand_overs');

CREATE TABLE hand_over_receipts (
  hand_over_id uuid PRIMARY KEY,
  organization_id uuid NOT NULL,
  received_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  FOREIGN KEY (organization_id, hand_over_id) REFERENCES hand_overs (organization_id, id)
);
CALL protect_tenant('hand_over_receipts');
CALL make_append_only('hand_over_receipts');
`),
  down: ({ context: db }) => db.query("DROP TABLE hand_over_receipts, hand_overs;"),
};
