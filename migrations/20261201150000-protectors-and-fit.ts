import type { Migration } from "../server/lib/migrator";

export const protectorsAndFit: Migration = {
  name: "20261201150000-protectors-and-fit",
  up: ({ context: db }) =>
    db.query(`
-- How sure a fit must be, and when it is due again. Null: the site states none.
ALTER TABLE sites
  ADD COLUMN fit_confidence_pct int NOT NULL DEFAULT 84 CHECK (fit_confidence_pct IN (50, 84, 90, 95, 98)),
  ADD COLUMN fit_every_months int CHECK (fit_every_months BETWEEN 1 AND 120),
  ADD COLUMN fit_after_fail_days int CHECK (fit_after_fail_days BETWEEN 1 AND 365);

-- What a worker wears with it, and what a task asks for: helmet, glasses, respirator.
ALTER TABLE workers ADD COLUMN worn_gear text[] NOT NULL DEFAULT '{}' CHECK (worn_gear <@ ARRAY['helmet', 'glasses', 'respirator']);
ALTER TABLE tasks ADD COLUMN required_gear text[] NOT NULL DEFAULT '{}' CHECK (required_gear <@ ARRAY['helmet', 'glasses', 'respirator']);

-- EN 458's type of an impulse noise, 1 low to 3 high frequencies; and the level whose spectrum this one kept, shifted.
ALTER TABLE task_levels
  ADD COLUMN impulse_type int CHECK (impulse_type BETWEEN 1 AND 3),
  ADD COLUMN spectrum_of_number int CHECK (spectrum_of_number < number);

-- Size given, and the level of a radio or signal under the cup while it is worn, dB(A).
ALTER TABLE assignments
  ADD COLUMN size text CHECK (length(size) BETWEEN 1 AND 20),
  ADD COLUMN audio_db double precision CHECK (audio_db BETWEEN 20 AND 120);

CREATE TABLE protector_files (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  model_id uuid NOT NULL,
  file_id uuid NOT NULL,
  title text NOT NULL CHECK (length(title) BETWEEN 1 AND 200),
  is_removed boolean NOT NULL DEFAULT false,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, model_id) REFERENCES protector_models (organization_id, id),
  FOREIGN KEY (organization_id, file_id) REFERENCES files (organization_id, id)
);
CREATE INDEX protector_files_model ON protector_files (model_id);
CREATE INDEX protector_files_file ON protector_files (file_id);
CALL protect_tenant('protector_files');

-- Test data of two models worn together, from a date on.
CREATE TABLE protector_combinations (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  inner_model_id uuid NOT NULL,
  outer_model_id uuid NOT NULL,
  number int NOT NULL,
  effective_from date NOT NULL,
  bands jsonb NOT NULL,
  reason text,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (inner_model_id, outer_model_id, number),
  UNIQUE (organization_id, id),
  CHECK (inner_model_id <> outer_model_id),
  CHECK (number = 1 OR reason IS NOT NULL),
  FOREIGN KEY (organization_id, inner_model_id) REFERENCES protector_models (organization_id, id),
  FOREIGN KEY (organization_id, outer_model_id) REFERENCES protector_models (organization_id, id)
);
CREATE INDEX protector_combinations_in_force ON protector_combinations (inner_model_id, outer_model_id, effective_from DESC, number DESC);
CALL protect_tenant('protector_combinations');
CALL make_append_only('protector_combinations');

-- What a model takes off on one worker. Tried, until an issue names it.
CREATE TABLE fit_tests (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  model_id uuid NOT NULL,
  tested_on date NOT NULL,
  is_void boolean NOT NULL DEFAULT false,
  current_revision_id uuid,
  revision int NOT NULL DEFAULT 1,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, model_id) REFERENCES protector_models (organization_id, id)
);
CREATE INDEX fit_tests_worker ON fit_tests (worker_id, model_id, tested_on DESC, created_at DESC) WHERE NOT is_void;
CREATE INDEX fit_tests_model ON fit_tests (model_id, tested_on DESC);
CREATE INDEX fit_tests_site ON fit_tests (site_id, tested_on DESC, id);
CALL protect_tenant('fit_tests');

CREATE TABLE fit_test_revisions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  fit_test_id uuid NOT NULL,
  number int NOT NULL,
  method text NOT NULL CHECK (method IN ('psychophysical', 'real-ear-microphones', 'two-microphones')),
  size text CHECK (length(size) BETWEEN 1 AND 20),
  -- Trials by ear, bands, the method's own uncertainty: as entered or measured.
  facts jsonb NOT NULL,
  confidence_pct int NOT NULL,
  left_db double precision,
  right_db double precision,
  -- Personal attenuation rating at that confidence, the weaker ear's, dB.
  par_db double precision,
  -- What the worker's noise asks for, dB; null: not known.
  need_db double precision,
  has_passed boolean,
  -- Of an active part on this worker; null: not checked.
  active_passed boolean,
  note text NOT NULL DEFAULT '' CHECK (length(note) <= 10000),
  reason text CHECK (length(reason) BETWEEN 3 AND 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (fit_test_id, number),
  UNIQUE (organization_id, id),
  CHECK (number = 1 OR reason IS NOT NULL),
  FOREIGN KEY (organization_id, fit_test_id) REFERENCES fit_tests (organization_id, id)
);
CALL protect_tenant('fit_test_revisions');
CALL make_append_only('fit_test_revisions');
ALTER TABLE fit_tests ADD FOREIGN KEY (organization_id, current_revision_id) REFERENCES fit_test_revisions (organization_id, id);

-- Recordings of a two-microphone check on their way to a fit test. Audio goes once it is analysed.
CREATE TABLE microphone_checks (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  model_id uuid NOT NULL,
  ear text NOT NULL CHECK (ear IN ('left', 'right')),
  -- What is compared: each part names its files, channels and whether the active part was on.
  parts jsonb NOT NULL,
  calibration jsonb NOT NULL,
  correction jsonb NOT NULL,
  state text NOT NULL CHECK (state IN ('analysing', 'analysed', 'kept', 'failed', 'cancelled')),
  progress_pct double precision NOT NULL DEFAULT 0,
  tries int NOT NULL DEFAULT 0,
  analysis jsonb,
  failure jsonb,
  fit_test_id uuid,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  updated_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, model_id) REFERENCES protector_models (organization_id, id),
  FOREIGN KEY (organization_id, fit_test_id) REFERENCES fit_tests (organization_id, id)
);
CREATE INDEX microphone_checks_worker ON microphone_checks (worker_id, created_at DESC);
CALL protect_tenant('microphone_checks');

CREATE TABLE microphone_check_files (
  organization_id uuid NOT NULL,
  check_id uuid NOT NULL,
  position int NOT NULL,
  file_id uuid NOT NULL,
  file_name text NOT NULL CHECK (length(file_name) BETWEEN 1 AND 255),
  PRIMARY KEY (check_id, position),
  FOREIGN KEY (organization_id, check_id) REFERENCES microphone_checks (organization_id, id),
  FOREIGN KEY (organization_id, file_id) REFERENCES files (organization_id, id)
);
CREATE INDEX microphone_check_files_file ON microphone_check_files (file_id);
CALL protect_tenant('microphone_check_files');

-- A device handed to a worker.
CREATE TABLE protector_issues (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  model_id uuid NOT NULL,
  size text CHECK (length(size) BETWEEN 1 AND 20),
  assignment_id uuid NOT NULL,
  fit_test_id uuid,
  issued_on date NOT NULL,
  -- More than one kind has to be on offer.
  offered_model_ids uuid[] NOT NULL,
  was_instructed boolean NOT NULL,
  acknowledged_at timestamptz,
  acknowledged_how text CHECK (acknowledged_how IN ('in-person', 'own-page')),
  ended_on date CHECK (ended_on >= issued_on),
  ended_how text CHECK (ended_how IN ('returned', 'lost', 'damaged', 'replaced')),
  revision int NOT NULL DEFAULT 1,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  CHECK ((acknowledged_at IS NULL) = (acknowledged_how IS NULL)),
  CHECK ((ended_on IS NULL) = (ended_how IS NULL)),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, model_id) REFERENCES protector_models (organization_id, id),
  FOREIGN KEY (organization_id, assignment_id) REFERENCES assignments (organization_id, id),
  FOREIGN KEY (organization_id, fit_test_id) REFERENCES fit_tests (organization_id, id)
);
CREATE INDEX protector_issues_worker ON protector_issues (worker_id, issued_on DESC);
CREATE INDEX protector_issues_site ON protector_issues (site_id, issued_on DESC, id);
CREATE INDEX protector_issues_fit ON protector_issues (fit_test_id) WHERE fit_test_id IS NOT NULL;
CALL protect_tenant('protector_issues');

CREATE TABLE protector_refusals (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  model_id uuid,
  kind text NOT NULL CHECK (kind IN ('refused', 'not-worn', 'cannot-wear')),
  happened_on date NOT NULL,
  reason text NOT NULL CHECK (length(reason) BETWEEN 3 AND 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, model_id) REFERENCES protector_models (organization_id, id)
);
CREATE INDEX protector_refusals_worker ON protector_refusals (worker_id, happened_on DESC);
CALL protect_tenant('protector_refusals');
CALL make_append_only('protector_refusals');

-- Stock is their sum.
CREATE TABLE stock_moves (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  model_id uuid NOT NULL,
  size text CHECK (length(size) BETWEEN 1 AND 20),
  part text NOT NULL CHECK (part IN ('device', 'cushions', 'tips')),
  kind text NOT NULL CHECK (kind IN ('received', 'issued', 'returned', 'lost', 'damaged', 'counted', 'changed')),
  quantity int NOT NULL CHECK (quantity BETWEEN -100000 AND 100000),
  issue_id uuid,
  moved_on date NOT NULL,
  note text NOT NULL DEFAULT '' CHECK (length(note) <= 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, model_id) REFERENCES protector_models (organization_id, id),
  FOREIGN KEY (organization_id, issue_id) REFERENCES protector_issues (organization_id, id)
);
CREATE INDEX stock_moves_sum ON stock_moves (site_id, model_id, part);
CREATE INDEX stock_moves_list ON stock_moves (site_id, moved_on DESC, created_at DESC, id);
CREATE INDEX stock_moves_issue ON stock_moves (issue_id) WHERE issue_id IS NOT NULL;
CALL protect_tenant('stock_moves');
CALL make_append_only('stock_moves');

-- Who was seen wearing it, in a round through the shop or by own report.
CREATE TABLE wearing_rounds (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  seen_on date NOT NULL,
  source text NOT NULL CHECK (source IN ('round', 'own-report')),
  note text NOT NULL DEFAULT '' CHECK (length(note) <= 2000),
  struck_reason text CHECK (length(struck_reason) BETWEEN 3 AND 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CREATE INDEX wearing_rounds_list ON wearing_rounds (site_id, seen_on DESC, id);
CALL protect_tenant('wearing_rounds');

CREATE TABLE wearing_looks (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  round_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  task_id uuid NOT NULL,
  seen_on date NOT NULL,
  worn_count int NOT NULL CHECK (worn_count >= 0),
  seen_count int NOT NULL CHECK (seen_count BETWEEN 1 AND 1000),
  UNIQUE (organization_id, id),
  UNIQUE (round_id, worker_id, task_id),
  CHECK (worn_count <= seen_count),
  FOREIGN KEY (organization_id, round_id) REFERENCES wearing_rounds (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id)
);
CREATE INDEX wearing_looks_worker ON wearing_looks (worker_id, task_id, seen_on DESC);
CALL protect_tenant('wearing_looks');
CALL make_append_only('wearing_looks');

-- Sounds that must be heard through noise and protector, at the worker's place.
CREATE TABLE warning_signals (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  area_id uuid,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  meaning text NOT NULL DEFAULT '' CHECK (length(meaning) <= 2000),
  octave_bands_db double precision[] NOT NULL CHECK (cardinality(octave_bands_db) = 8),
  is_archived boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  UNIQUE (site_id, name),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, area_id) REFERENCES areas (organization_id, id)
);
CALL protect_tenant('warning_signals');
`),
  down: ({ context: db }) =>
    db.query(`
DROP TABLE warning_signals, wearing_looks, wearing_rounds, stock_moves, protector_refusals, protector_issues,
  microphone_check_files, microphone_checks;
ALTER TABLE fit_tests DROP CONSTRAINT fit_tests_organization_id_current_revision_id_fkey;
DROP TABLE fit_test_revisions, fit_tests, protector_combinations, protector_files;
ALTER TABLE assignments DROP COLUMN size, DROP COLUMN audio_db;
ALTER TABLE task_levels DROP COLUMN impulse_type, DROP COLUMN spectrum_of_number;
ALTER TABLE tasks DROP COLUMN required_gear;
ALTER TABLE workers DROP COLUMN worn_gear;
ALTER TABLE sites DROP COLUMN fit_confidence_pct, DROP COLUMN fit_every_months, DROP COLUMN fit_after_fail_days;
`),
};
