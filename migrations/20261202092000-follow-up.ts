import type { Migration } from "../server/lib/migrator";

/** What follows from a finding: measures by the hierarchy of controls, papers, and whom an overdue one goes up to. */
export const followUp: Migration = {
  name: "20261202092000-follow-up",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE finding_measures (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  finding_id uuid NOT NULL,
  control text NOT NULL CHECK (control IN ('eliminate', 'substitute', 'engineer', 'organise', 'protect')),
  what text NOT NULL CHECK (length(what) BETWEEN 3 AND 2000),
  owner_id uuid,
  planned_on date,
  done_on date,
  struck_reason text CHECK (length(struck_reason) BETWEEN 3 AND 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK (num_nonnulls(planned_on, done_on) > 0),
  FOREIGN KEY (organization_id, finding_id) REFERENCES findings (organization_id, id),
  FOREIGN KEY (organization_id, owner_id) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id)
);
CREATE INDEX finding_measures_finding ON finding_measures (finding_id);
CALL protect_tenant('finding_measures');

CREATE TABLE finding_files (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  finding_id uuid NOT NULL,
  file_id uuid NOT NULL,
  title text NOT NULL CHECK (length(title) BETWEEN 1 AND 200),
  is_removed boolean NOT NULL DEFAULT false,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, finding_id) REFERENCES findings (organization_id, id),
  FOREIGN KEY (organization_id, file_id) REFERENCES files (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id)
);
CREATE INDEX finding_files_finding ON finding_files (finding_id);
CREATE INDEX finding_files_file ON finding_files (file_id);
CALL protect_tenant('finding_files');

-- Whom overdue findings of a site go up to.
ALTER TABLE sites ADD COLUMN escalation_user_id uuid,
  ADD CONSTRAINT sites_escalation_user FOREIGN KEY (organization_id, escalation_user_id) REFERENCES users (organization_id, id);

-- One mail for what went up at one time to one person.
CREATE TABLE escalations (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  recipient_id uuid NOT NULL,
  -- As it was sent.
  subject text,
  body_text text,
  body_html text,
  created_at timestamptz NOT NULL DEFAULT now(),
  sent_at timestamptz,
  last_error text,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, recipient_id) REFERENCES users (organization_id, id)
);
CALL protect_tenant('escalations');

ALTER TABLE findings ADD COLUMN escalated_on date, ADD COLUMN escalation_id uuid,
  ADD CONSTRAINT findings_escalated CHECK ((escalated_on IS NULL) = (escalation_id IS NULL)),
  ADD CONSTRAINT findings_escalation FOREIGN KEY (organization_id, escalation_id) REFERENCES escalations (organization_id, id);

ALTER TABLE finding_steps DROP CONSTRAINT finding_steps_kind_check;
ALTER TABLE finding_steps ADD CONSTRAINT finding_steps_kind_check
  CHECK (kind IN ('state', 'comment', 'marked-done', 'cannot', 'evidence-gone', 'rules-changed', 'handed-over', 'escalated'));
`),
  // A step that was taken stays, in the nearest kind that there was for it before.
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE finding_steps DISABLE TRIGGER USER;
UPDATE finding_steps SET kind = 'comment' WHERE kind IN ('handed-over', 'escalated');
ALTER TABLE finding_steps ENABLE TRIGGER USER;
ALTER TABLE finding_steps DROP CONSTRAINT finding_steps_kind_check;
ALTER TABLE finding_steps ADD CONSTRAINT finding_steps_kind_check
  CHECK (kind IN ('state', 'comment', 'marked-done', 'cannot', 'evidence-gone', 'rules-changed'));
ALTER TABLE findings DROP COLUMN escalated_on, DROP COLUMN escalation_id;
DROP TABLE escalations;
ALTER TABLE sites DROP COLUMN escalation_user_id;
DROP TABLE finding_files, finding_measures;
`),
};
