import type { Migration } from "../server/lib/migrator";

/** Which mails somebody does without, of those that nobody's law asks for. */
export const mailChoices: Migration = {
  name: "20261203150100-mail-choices",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE mail_choices (
  user_id uuid PRIMARY KEY,
  organization_id uuid NOT NULL,
  off text[] NOT NULL DEFAULT '{}' CHECK (off <@ ARRAY['own-limit']),
  revision int NOT NULL DEFAULT 1,
  FOREIGN KEY (organization_id, user_id) REFERENCES users (organization_id, id)
);
CALL protect_tenant('mail_choices');
`),
  down: ({ context: db }) => db.query("DROP TABLE mail_choices;"),
};
