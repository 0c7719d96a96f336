import type { Migration } from "../server/lib/migrator";

const NOT_SIGNED_IN = ["trail_mails", "digests", "escalations"];

/** Mails that are no notices come back too: the trail's head, a daily mail, word of what is overdue. */
export const bouncesOfOtherMails: Migration = {
  name: "20261203150200-bounces-of-other-mails",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE trail_mails DROP CONSTRAINT trail_mails_state_check, ADD CONSTRAINT trail_mails_state_check
  CHECK (state IN ('waiting', 'sent', 'refused', 'bounced'));
ALTER TABLE digests DROP CONSTRAINT digests_state_check, ADD CONSTRAINT digests_state_check
  CHECK (state IN ('waiting', 'nothing', 'sent', 'refused', 'bounced'));
ALTER TABLE escalations ADD COLUMN bounced_at timestamptz;

-- Of a mail whose Message-ID is its row's id.
CREATE FUNCTION reported_mail() RETURNS uuid LANGUAGE sql STABLE AS $$
  SELECT substring(current_setting('app.mail_report', true) FROM '^<([0-9a-f]{8}(?:-[0-9a-f]{4}){3}-[0-9a-f]{12})@')::uuid
$$;
${NOT_SIGNED_IN.map((table) => `CREATE POLICY reporting_mail ON ${table} FOR SELECT USING (id = reported_mail());`).join("\n")}
`),
  down: ({ context: db }) =>
    db.query(`
${NOT_SIGNED_IN.map((table) => `DROP POLICY reporting_mail ON ${table};`).join("\n")}
DROP FUNCTION reported_mail;
ALTER TABLE escalations DROP COLUMN bounced_at;
CALL watch_table('escalations');
UPDATE trail_mails SET state = 'refused' WHERE state = 'bounced';
UPDATE digests SET state = 'refused' WHERE state = 'bounced';
ALTER TABLE digests DROP CONSTRAINT digests_state_check, ADD CONSTRAINT digests_state_check
  CHECK (state IN ('waiting', 'nothing', 'sent', 'refused'));
ALTER TABLE trail_mails DROP CONSTRAINT trail_mails_state_check, ADD CONSTRAINT trail_mails_state_check
  CHECK (state IN ('waiting', 'sent', 'refused'));
`),
};
