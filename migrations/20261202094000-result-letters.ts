import type { Migration } from "../server/lib/migrator";

/** Results after monitoring, told to each worker at or over the action value, and that they were read. */
export const resultLetters: Migration = {
  name: "20261202094000-result-letters",
  up: ({ context: db }) =>
    db.query(`
-- A notice of findings is written anew until it goes; one of results carries a letter that stands as it was written.
ALTER TABLE notices ADD COLUMN kind text NOT NULL DEFAULT 'findings' CHECK (kind IN ('findings', 'results'));

CREATE TABLE result_letters (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  -- Null: no mail address, so it goes on paper.
  notice_id uuid,
  replaces_id uuid,
  rule_set text NOT NULL,
  rule_set_version int NOT NULL,
  -- The day by which the worker has to know.
  due_on date NOT NULL,
  language text NOT NULL,
  subject text NOT NULL,
  body_text text NOT NULL,
  written_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, notice_id) REFERENCES notices (organization_id, id),
  FOREIGN KEY (organization_id, replaces_id) REFERENCES result_letters (organization_id, id)
);
CREATE INDEX result_letters_worker ON result_letters (worker_id, written_at DESC);
CREATE INDEX result_letters_list ON result_letters (organization_id, due_on DESC, id);
CREATE INDEX result_letters_notice ON result_letters (notice_id);
CREATE INDEX result_letters_replaced ON result_letters (replaces_id);
CALL protect_tenant('result_letters');
CALL make_append_only('result_letters');

CREATE TABLE result_letter_days (
  organization_id uuid NOT NULL,
  letter_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  date date NOT NULL,
  result_id uuid NOT NULL,
  -- What was told, dB and %, against which action value.
  criterion text NOT NULL,
  is_over boolean NOT NULL,
  level_db double precision,
  dose_pct double precision,
  PRIMARY KEY (letter_id, date),
  FOREIGN KEY (organization_id, letter_id) REFERENCES result_letters (organization_id, id),
  FOREIGN KEY (organization_id, worker_id, date, result_id) REFERENCES day_results (organization_id, worker_id, date, id)
);
CREATE INDEX result_letter_days_day ON result_letter_days (worker_id, date);
CALL protect_tenant('result_letter_days');
CALL make_append_only('result_letter_days');
CREATE INDEX day_results_measured ON day_results (organization_id, date) WHERE grade = 'measured-worker' AND origin = 'computed';

-- The link in a letter; only its hash is kept.
CREATE TABLE letter_links (
  secret_hash text PRIMARY KEY,
  organization_id uuid NOT NULL,
  letter_id uuid NOT NULL,
  expires_at timestamptz NOT NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (organization_id, letter_id) REFERENCES result_letters (organization_id, id)
);
CREATE INDEX letter_links_letter ON letter_links (letter_id);
CALL protect_tenant('letter_links');
CALL make_append_only('letter_links');
-- Whoever opens a link is not signed in: the row that the link itself names, and no other.
CREATE POLICY opening_letter ON letter_links FOR SELECT USING (secret_hash = nullif(current_setting('app.letter_link', true), ''));

CREATE TABLE notice_acknowledgements (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  letter_id uuid NOT NULL,
  way text NOT NULL CHECK (way IN ('link', 'paper')),
  -- On paper: the date beside the signature, and who recorded it.
  signed_on date,
  recorded_by uuid,
  recorded_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  CONSTRAINT notice_acknowledgements_once UNIQUE (letter_id),
  CHECK ((way = 'paper') = (signed_on IS NOT NULL)),
  CHECK ((way = 'paper') = (recorded_by IS NOT NULL)),
  FOREIGN KEY (organization_id, letter_id) REFERENCES result_letters (organization_id, id),
  FOREIGN KEY (organization_id, recorded_by) REFERENCES users (organization_id, id)
);
CALL protect_tenant('notice_acknowledgements');
CALL make_append_only('notice_acknowledgements');
`),
  down: ({ context: db }) =>
    db.query(`
DROP INDEX day_results_measured;
DROP TABLE notice_acknowledgements, letter_links, result_letter_days, result_letters;
DELETE FROM notices WHERE kind = 'results';
ALTER TABLE notices DROP COLUMN kind;
`),
};
