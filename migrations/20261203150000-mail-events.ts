import type { Migration } from "../server/lib/migrator";

/** What became of a mail after the mail server had taken it, as the server or its provider reports it. */
export const mailEvents: Migration = {
  name: "20261203150000-mail-events",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE notices DROP CONSTRAINT notices_state_check, ADD CONSTRAINT notices_state_check
  CHECK (state IN ('waiting', 'held', 'sending', 'sent', 'possibly-sent', 'failed', 'withdrawn', 'bounced', 'on-paper'));

CREATE TABLE mail_events (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  notice_id uuid NOT NULL,
  -- As whoever reports it names it: the same report twice is one.
  event_id text NOT NULL CHECK (length(event_id) BETWEEN 1 AND 400),
  kind text NOT NULL CHECK (kind IN ('bounced', 'delayed', 'delivered')),
  way text NOT NULL CHECK (way IN ('hook', 'report')),
  -- RFC 3463, such as 5.1.1; null: not said.
  status text CHECK (status ~ '^[245][.][0-9]{1,3}[.][0-9]{1,3}$'),
  said text CHECK (length(said) <= 1000),
  received_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  UNIQUE (organization_id, event_id),
  FOREIGN KEY (organization_id, notice_id) REFERENCES notices (organization_id, id)
);
CREATE INDEX mail_events_notice ON mail_events (notice_id, received_at);
CALL protect_tenant('mail_events');
CALL make_append_only('mail_events');
-- Whoever reports is not signed in: the notice whose message the signed report itself names, and no other.
CREATE POLICY reporting_mail ON notices FOR SELECT USING (message_id = nullif(current_setting('app.mail_report', true), ''));
`),
  down: ({ context: db }) =>
    db.query(`
DROP POLICY reporting_mail ON notices;
DROP TABLE mail_events;
UPDATE notices SET state = 'failed' WHERE state IN ('bounced', 'on-paper');
ALTER TABLE notices DROP CONSTRAINT notices_state_check, ADD CONSTRAINT notices_state_check
  CHECK (state IN ('waiting', 'held', 'sending', 'sent', 'possibly-sent', 'failed', 'withdrawn'));
`),
};
