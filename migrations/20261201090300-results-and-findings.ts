import type { Migration } from "../server/lib/migrator";

export const resultsAndFindings: Migration = {
  name: "20261201090300-results-and-findings",
  up: ({ context: db }) =>
    db.query(`
-- Immutable: one per inputs, rule-set version and method version. \`refs\` names the input revisions, from which the
-- whole input and its working are built again on demand.
CREATE TABLE day_results (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  date date NOT NULL,
  origin text NOT NULL CHECK (origin IN ('computed', 'imported')),
  governing_rule_set text NOT NULL,
  governing_version int NOT NULL,
  method_version int NOT NULL,
  inputs_hash bytea NOT NULL,
  shift_min double precision NOT NULL,
  unaccounted_min double precision NOT NULL,
  grade text NOT NULL,
  is_projected boolean NOT NULL DEFAULT false,
  is_kept boolean NOT NULL DEFAULT false,
  outside_db double precision,
  outside_bound text NOT NULL CHECK (outside_bound IN ('exact', 'upper', 'lower')),
  at_ear_db double precision,
  at_ear_active_db double precision,
  at_ear_as_worked_db double precision,
  uncertainty_db double precision,
  dose_pct double precision,
  while_worn_db double precision,
  verdict_outside text NOT NULL CHECK (verdict_outside IN ('under', 'over', 'cant-tell-yet', 'not-assessed')),
  verdict_at_ear text NOT NULL CHECK (verdict_at_ear IN ('under', 'over', 'cant-tell-yet', 'not-assessed')),
  word text,
  deciding_task_id uuid,
  has_protector text NOT NULL CHECK (has_protector IN ('yes', 'no', 'unknown')),
  reason text,
  criteria jsonb NOT NULL,
  refs jsonb NOT NULL,
  computed_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (worker_id, date, inputs_hash),
  UNIQUE (organization_id, worker_id, date, id),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CREATE INDEX day_results_site_day ON day_results (site_id, date);
CALL protect_tenant('day_results');
CALL make_append_only('day_results');

-- The day's head: which result is current, and whether its inputs have moved since.
CREATE TABLE days (
  organization_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  date date NOT NULL,
  site_id uuid NOT NULL,
  crew_id uuid,
  current_result_id uuid,
  is_stale boolean NOT NULL DEFAULT true,
  PRIMARY KEY (worker_id, date),
  UNIQUE (organization_id, worker_id, date),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, crew_id) REFERENCES crews (organization_id, id),
  FOREIGN KEY (organization_id, worker_id, date, current_result_id) REFERENCES day_results (organization_id, worker_id, date, id)
);
CREATE INDEX days_crew ON days (crew_id, date DESC);
CREATE INDEX days_site ON days (site_id, date DESC, worker_id);
CREATE INDEX days_stale ON days (organization_id, date) WHERE is_stale;
CALL protect_tenant('days');

CREATE TABLE findings (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  worker_id uuid,
  job_id uuid,
  instrument_id uuid,
  kind text NOT NULL,
  -- Rule set and criterion that it is about, or ''.
  criterion text NOT NULL DEFAULT '',
  -- Assignment's use, or ''.
  use_key text NOT NULL DEFAULT '',
  state text NOT NULL CHECK (state IN ('new', 'in-hand', 'done', 'closed', 'came-back')),
  -- What was noticed, as codes and numbers; words are made where it is shown.
  facts jsonb NOT NULL DEFAULT '{}',
  first_date date NOT NULL,
  last_date date NOT NULL,
  last_result_id uuid,
  days_count int NOT NULL DEFAULT 1,
  owner_id uuid,
  due_on date,
  closed_on date,
  closing_reason text CHECK (length(closing_reason) <= 2000),
  previous_id uuid,
  revision int NOT NULL DEFAULT 1,
  opened_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  CHECK ((state = 'closed') = (closed_on IS NOT NULL)),
  CHECK (state <> 'closed' OR closing_reason IS NOT NULL),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, job_id) REFERENCES jobs (organization_id, id),
  FOREIGN KEY (organization_id, instrument_id) REFERENCES instruments (organization_id, id),
  FOREIGN KEY (organization_id, owner_id) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, previous_id) REFERENCES findings (organization_id, id)
);
CREATE UNIQUE INDEX findings_one_open ON findings
  (organization_id, coalesce(worker_id, job_id, instrument_id, site_id), kind, criterion, use_key) WHERE state <> 'closed';
CREATE INDEX findings_cause ON findings (organization_id, worker_id, kind, criterion, use_key);
CREATE INDEX findings_open ON findings (organization_id, site_id, due_on, id) WHERE state <> 'closed';
CALL protect_tenant('findings');

CREATE TABLE finding_evidence (
  organization_id uuid NOT NULL,
  finding_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  date date NOT NULL,
  result_id uuid NOT NULL,
  PRIMARY KEY (finding_id, worker_id, date),
  FOREIGN KEY (organization_id, finding_id) REFERENCES findings (organization_id, id),
  FOREIGN KEY (organization_id, worker_id, date, result_id) REFERENCES day_results (organization_id, worker_id, date, id)
);
CREATE INDEX finding_evidence_day ON finding_evidence (worker_id, date);
CALL protect_tenant('finding_evidence');

CREATE TABLE finding_steps (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  finding_id uuid NOT NULL,
  kind text NOT NULL CHECK (kind IN ('state', 'comment', 'marked-done', 'cannot', 'evidence-gone')),
  from_state text,
  to_state text,
  text text CHECK (length(text) <= 10000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (organization_id, finding_id) REFERENCES findings (organization_id, id)
);
CREATE INDEX finding_steps_finding ON finding_steps (finding_id, created_at);
CALL protect_tenant('finding_steps');
CALL make_append_only('finding_steps');

-- The outbox. Written in the finding's transaction; a job sends it once its time has come.
CREATE TABLE notices (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  recipient_id uuid NOT NULL,
  -- The saving that caused it: one mail per recipient and entry.
  entry_id uuid NOT NULL,
  audience text NOT NULL CHECK (audience IN ('officer', 'supervisor', 'worker')),
  state text NOT NULL CHECK (state IN ('waiting', 'held', 'sending', 'sent', 'possibly-sent', 'failed', 'withdrawn')),
  not_before timestamptz NOT NULL,
  tries int NOT NULL DEFAULT 0,
  -- Attempts after which nobody could say whether the mail server took it.
  unknown_outcomes int NOT NULL DEFAULT 0,
  message_id text NOT NULL UNIQUE,
  replaces_id uuid,
  last_error text,
  attempted_at timestamptz,
  sent_at timestamptz,
  -- As it was sent.
  subject text,
  body_text text,
  body_html text,
  revision int NOT NULL DEFAULT 1,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  UNIQUE (entry_id, recipient_id, audience),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, recipient_id) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, replaces_id) REFERENCES notices (organization_id, id)
);
CREATE INDEX notices_due ON notices (organization_id, state, not_before);
CALL protect_tenant('notices');

CREATE TABLE notice_items (
  organization_id uuid NOT NULL,
  notice_id uuid NOT NULL,
  finding_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  date date NOT NULL,
  result_id uuid NOT NULL,
  PRIMARY KEY (notice_id, finding_id, worker_id, date),
  FOREIGN KEY (organization_id, notice_id) REFERENCES notices (organization_id, id),
  FOREIGN KEY (organization_id, finding_id) REFERENCES findings (organization_id, id),
  FOREIGN KEY (organization_id, worker_id, date, result_id) REFERENCES day_results (organization_id, worker_id, date, id)
);
CREATE INDEX notice_items_finding ON notice_items (finding_id);
CREATE INDEX notice_items_day ON notice_items (worker_id, date);
CALL protect_tenant('notice_items');

CREATE TABLE files (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL REFERENCES organizations,
  sha256 bytea NOT NULL,
  size_bytes bigint NOT NULL CHECK (size_bytes >= 0),
  media_type text NOT NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 255),
  uploaded_by uuid,
  uploaded_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  UNIQUE (organization_id, sha256)
);
CALL protect_tenant('files');

-- Text that a spreadsheet would take for a formula gets a leading apostrophe; numbers never pass through here.
CREATE FUNCTION csv_text(value text) RETURNS text LANGUAGE sql IMMUTABLE PARALLEL SAFE AS
  $$ SELECT CASE WHEN value ~ '^[=+@\\t\\r-]' THEN '''' || value ELSE value END $$;
`),
  down: ({ context: db }) =>
    db.query(`
DROP FUNCTION csv_text;
DROP TABLE files, notice_items, notices, finding_steps, finding_evidence, findings, days, day_results;
`),
};
