import type { Migration } from "../server/lib/migrator";

/** Private addresses under which people read what is due in a calendar of their own; only a hash of each is kept. */
export const calendarFeeds: Migration = {
  name: "20261202092200-calendar-feeds",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE calendar_feeds (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  user_id uuid NOT NULL,
  secret_hash bytea NOT NULL UNIQUE,
  created_at timestamptz NOT NULL DEFAULT now(),
  revoked_at timestamptz,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, user_id) REFERENCES users (organization_id, id)
);
CREATE UNIQUE INDEX calendar_feeds_one ON calendar_feeds (user_id) WHERE revoked_at IS NULL;
CALL protect_tenant('calendar_feeds');
`),
  down: ({ context: db }) => db.query("DROP TABLE calendar_feeds;"),
};
