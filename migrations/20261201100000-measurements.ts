import type { Migration } from "../server/lib/migrator";

export const measurements: Migration = {
  name: "20261201100000-measurements",
  up: ({ context: db }) =>
    db.query(`
-- Null: the site states no interval, and no level is ever too old.
ALTER TABLE sites ADD COLUMN remeasure_after_months int CHECK (remeasure_after_months BETWEEN 1 AND 240);

-- Changes to process, machine or control. They re-open monitoring and the protectors chosen on it.
CREATE TABLE workplace_changes (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  area_id uuid,
  task_id uuid,
  job_id uuid,
  kind text NOT NULL CHECK (kind IN ('process', 'machine', 'control', 'work-pattern')),
  happened_on date NOT NULL,
  what text NOT NULL CHECK (length(what) BETWEEN 3 AND 2000),
  struck_reason text CHECK (length(struck_reason) BETWEEN 3 AND 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK (num_nonnulls(area_id, task_id, job_id) = 1),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, area_id) REFERENCES areas (organization_id, id),
  FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id),
  FOREIGN KEY (organization_id, job_id) REFERENCES jobs (organization_id, id)
);
CREATE INDEX workplace_changes_list ON workplace_changes (organization_id, site_id, happened_on DESC, id);
CALL protect_tenant('workplace_changes');

-- Runs taken for one purpose with one strategy. The group is the workers of a job.
CREATE TABLE surveys (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  job_id uuid NOT NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  purpose text NOT NULL DEFAULT '' CHECK (length(purpose) <= 2000),
  strategy text NOT NULL CHECK (strategy IN ('task', 'job', 'full-day')),
  state text NOT NULL DEFAULT 'planned' CHECK (state IN ('planned', 'measuring', 'done', 'struck')),
  from_date date NOT NULL,
  to_date date NOT NULL,
  -- With it the draw of whom to measure can be repeated.
  draw_seed text NOT NULL,
  observers text[] NOT NULL DEFAULT '{}',
  -- Article 4(6): impulse, vibration, ototoxic substances, warning signals; 'yes', 'no' or absent, with a note each.
  risk_factors jsonb NOT NULL DEFAULT '{}',
  closing_note text CHECK (length(closing_note) <= 2000),
  revision int NOT NULL DEFAULT 1,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  CHECK (to_date >= from_date),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, job_id) REFERENCES jobs (organization_id, id)
);
CREATE INDEX surveys_list ON surveys (organization_id, site_id, from_date DESC, id);
CREATE INDEX surveys_job ON surveys (job_id, from_date DESC);
CALL protect_tenant('surveys');

-- What is to be sampled: each task of the group, or the job as a whole (task_id null).
CREATE TABLE survey_targets (
  organization_id uuid NOT NULL,
  survey_id uuid NOT NULL,
  position int NOT NULL,
  task_id uuid,
  samples_count int NOT NULL CHECK (samples_count BETWEEN 1 AND 200),
  sample_min double precision NOT NULL CHECK (sample_min > 0 AND sample_min <= 1440),
  PRIMARY KEY (survey_id, position),
  FOREIGN KEY (organization_id, survey_id) REFERENCES surveys (organization_id, id),
  FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id)
);
CALL protect_tenant('survey_targets');

CREATE TABLE survey_people (
  organization_id uuid NOT NULL,
  survey_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  part text NOT NULL CHECK (part IN ('drawn', 'reserve', 'named')),
  position int NOT NULL,
  PRIMARY KEY (survey_id, worker_id),
  FOREIGN KEY (organization_id, survey_id) REFERENCES surveys (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id)
);
CALL protect_tenant('survey_people');

CREATE TABLE instrument_reservations (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  survey_id uuid NOT NULL,
  instrument_id uuid NOT NULL,
  valid daterange NOT NULL CHECK (NOT isempty(valid) AND NOT lower_inf(valid) AND NOT upper_inf(valid)),
  FOREIGN KEY (organization_id, survey_id) REFERENCES surveys (organization_id, id),
  FOREIGN KEY (organization_id, instrument_id) REFERENCES instruments (organization_id, id),
  CONSTRAINT instrument_reservations_overlap EXCLUDE USING gist (instrument_id WITH =, valid WITH &&)
);
CREATE INDEX instrument_reservations_survey ON instrument_reservations (survey_id);
CALL protect_tenant('instrument_reservations');

CREATE TABLE instrument_calibrations (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  instrument_id uuid NOT NULL,
  done_on date NOT NULL,
  has_passed boolean NOT NULL,
  -- Error found before adjustment, dB.
  found_error_db double precision CHECK (found_error_db BETWEEN -20 AND 20),
  due_on date CHECK (due_on > done_on),
  certificate_file_id uuid,
  note text NOT NULL DEFAULT '' CHECK (length(note) <= 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  CHECK (has_passed OR due_on IS NULL),
  FOREIGN KEY (organization_id, instrument_id) REFERENCES instruments (organization_id, id),
  FOREIGN KEY (organization_id, certificate_file_id) REFERENCES files (organization_id, id)
);
CREATE INDEX instrument_calibrations_of ON instrument_calibrations (instrument_id, done_on DESC, created_at DESC);
CALL protect_tenant('instrument_calibrations');
CALL make_append_only('instrument_calibrations');

-- A run is out until its instrument is back: its first revision then has no duration and no reading. A sample by hand is
-- a run on a task, at a place, of a worker or of neither.
ALTER TABLE runs ADD COLUMN survey_id uuid, ADD COLUMN task_id uuid,
  ADD COLUMN place text CHECK (length(place) BETWEEN 1 AND 200),
  ADD COLUMN is_out boolean NOT NULL DEFAULT false,
  -- Both instants of a run that named them: one instrument is in one place at a time.
  ADD COLUMN span tstzrange,
  DROP CONSTRAINT runs_check,
  ADD CONSTRAINT runs_of_something CHECK (num_nonnulls(worker_id, area_id, task_id) > 0),
  ADD FOREIGN KEY (organization_id, survey_id) REFERENCES surveys (organization_id, id),
  ADD FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id),
  ADD CONSTRAINT runs_overlap EXCLUDE USING gist (instrument_id WITH =, span WITH &&)
    WHERE (span IS NOT NULL AND NOT is_void) DEFERRABLE INITIALLY DEFERRED;
CREATE INDEX runs_survey ON runs (survey_id);
CREATE INDEX runs_task ON runs (task_id, date DESC);
CREATE UNIQUE INDEX runs_one_out ON runs (instrument_id) WHERE is_out AND NOT is_void;
ALTER TABLE run_revisions ALTER COLUMN duration_min DROP NOT NULL,
  -- What the officer was told of and kept all the same, as codes.
  ADD COLUMN doubts text[] NOT NULL DEFAULT '{}',
  ADD COLUMN is_return boolean NOT NULL DEFAULT false,
  DROP CONSTRAINT run_revisions_check1,
  ADD CONSTRAINT run_revisions_reason CHECK (number = 1 OR is_return OR reason IS NOT NULL);
ALTER TABLE readings ADD COLUMN octave_bands_db double precision[] CHECK (cardinality(octave_bands_db) = 8),
  ADD COLUMN source text NOT NULL DEFAULT 'instrument' CHECK (source IN ('instrument', 'history', 'recording')),
  DROP CONSTRAINT readings_check1,
  ADD CONSTRAINT readings_not_empty
    CHECK (num_nonnulls(dose_pct, average_db, lceq_db, las_max_db, peak_db, octave_bands_db) > 0);

CREATE TABLE run_files (
  organization_id uuid NOT NULL,
  run_id uuid NOT NULL,
  file_id uuid NOT NULL,
  added_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (run_id, file_id),
  FOREIGN KEY (organization_id, run_id) REFERENCES runs (organization_id, id),
  FOREIGN KEY (organization_id, file_id) REFERENCES files (organization_id, id)
);
CALL protect_tenant('run_files');

-- Where a level comes from: the survey, its strategy, and each sample's own run.
ALTER TABLE task_levels ADD COLUMN survey_id uuid,
  ADD COLUMN strategy text NOT NULL DEFAULT 'task' CHECK (strategy IN ('task', 'job', 'full-day')),
  ADD COLUMN kept_reasons text[] NOT NULL DEFAULT '{}',
  ADD FOREIGN KEY (organization_id, survey_id) REFERENCES surveys (organization_id, id);
CREATE TABLE task_level_samples (
  organization_id uuid NOT NULL,
  task_level_id uuid NOT NULL,
  position int NOT NULL,
  run_id uuid NOT NULL,
  run_revision_id uuid NOT NULL,
  -- The stretch of the run's time history, where the sample is a part of it.
  from_s double precision,
  to_s double precision CHECK (to_s > from_s),
  level_db double precision NOT NULL,
  PRIMARY KEY (task_level_id, position),
  FOREIGN KEY (organization_id, task_level_id) REFERENCES task_levels (organization_id, id),
  FOREIGN KEY (organization_id, run_id, run_revision_id) REFERENCES run_revisions (organization_id, run_id, id)
);
CREATE INDEX task_level_samples_run ON task_level_samples (run_id);
CALL protect_tenant('task_level_samples');
CALL make_append_only('task_level_samples');

-- How the columns of an instrument's export are to be read; remembered for the next file.
CREATE TABLE history_mappings (
  organization_id uuid NOT NULL,
  instrument_id uuid PRIMARY KEY,
  mapping jsonb NOT NULL,
  author_id uuid,
  updated_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (organization_id, instrument_id) REFERENCES instruments (organization_id, id)
);
CALL protect_tenant('history_mappings');

-- A file on its way in. The work process reads it; its progress, its report and what becomes of it stand here.
CREATE TABLE history_imports (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  instrument_id uuid NOT NULL,
  file_id uuid NOT NULL,
  run_id uuid,
  state text NOT NULL CHECK (state IN ('uploaded', 'reading', 'ready', 'refused', 'storing', 'stored', 'cancelled', 'failed')),
  progress_pct double precision NOT NULL DEFAULT 0 CHECK (progress_pct BETWEEN 0 AND 100),
  -- Beginning of the file and what was recognised in it.
  head jsonb,
  mapping jsonb,
  report jsonb,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  updated_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, instrument_id) REFERENCES instruments (organization_id, id),
  FOREIGN KEY (organization_id, file_id) REFERENCES files (organization_id, id),
  FOREIGN KEY (organization_id, run_id) REFERENCES runs (organization_id, id)
);
CREATE INDEX history_imports_list ON history_imports (organization_id, created_at DESC, id);
CALL protect_tenant('history_imports');

CREATE TABLE time_histories (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  run_id uuid NOT NULL,
  instrument_id uuid NOT NULL,
  file_id uuid NOT NULL,
  starts_at timestamptz NOT NULL,
  interval_ms int NOT NULL CHECK (interval_ms BETWEEN 125 AND 60000),
  values_count int NOT NULL CHECK (values_count > 0),
  channels text[] NOT NULL CHECK (cardinality(channels) > 0),
  span tstzrange NOT NULL,
  is_void boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  current_revision_id uuid NOT NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, run_id) REFERENCES runs (organization_id, id),
  FOREIGN KEY (organization_id, instrument_id) REFERENCES instruments (organization_id, id),
  FOREIGN KEY (organization_id, file_id) REFERENCES files (organization_id, id),
  CONSTRAINT time_histories_overlap EXCLUDE USING gist (instrument_id WITH =, span WITH &&) WHERE (NOT is_void)
);
CREATE UNIQUE INDEX time_histories_run ON time_histories (run_id) WHERE NOT is_void;
-- The same file is imported once.
CREATE UNIQUE INDEX time_histories_file ON time_histories (organization_id, file_id) WHERE NOT is_void;
CALL protect_tenant('time_histories');

-- Brackets drawn under the history and stretches left out of it.
CREATE TABLE time_history_revisions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  history_id uuid NOT NULL,
  number int NOT NULL,
  stretches jsonb NOT NULL,
  reason text CHECK (length(reason) <= 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (history_id, number),
  UNIQUE (organization_id, history_id, id),
  FOREIGN KEY (organization_id, history_id) REFERENCES time_histories (organization_id, id) DEFERRABLE INITIALLY DEFERRED
);
ALTER TABLE time_histories ADD CONSTRAINT time_histories_current_revision FOREIGN KEY (organization_id, id, current_revision_id)
  REFERENCES time_history_revisions (organization_id, history_id, id) DEFERRABLE INITIALLY DEFERRED;
CALL protect_tenant('time_history_revisions');
CALL make_append_only('time_history_revisions');

-- Levels of one channel, hundredths of a decibel, packed (server/histories/level-codec.ts).
CREATE TABLE time_history_chunks (
  organization_id uuid NOT NULL,
  history_id uuid NOT NULL,
  channel text NOT NULL,
  position int NOT NULL,
  values_count int NOT NULL,
  packed bytea NOT NULL,
  PRIMARY KEY (history_id, channel, position),
  FOREIGN KEY (organization_id, history_id) REFERENCES time_histories (organization_id, id)
);
-- Packed already: a second compression would only cost time.
ALTER TABLE time_history_chunks ALTER COLUMN packed SET STORAGE EXTERNAL;
CALL protect_tenant('time_history_chunks');
CALL make_append_only('time_history_chunks');

-- A sound recording: its levels and spectra are kept, the audio only for a reason and until a date.
CREATE TABLE recordings (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  task_id uuid NOT NULL,
  run_id uuid,
  file_name text NOT NULL CHECK (length(file_name) BETWEEN 1 AND 255),
  sha256 bytea NOT NULL,
  size_bytes bigint NOT NULL CHECK (size_bytes >= 0),
  state text NOT NULL CHECK (state IN ('uploaded', 'analysing', 'analysed', 'failed', 'cancelled')),
  progress_pct double precision NOT NULL DEFAULT 0 CHECK (progress_pct BETWEEN 0 AND 100),
  -- Sensitivity, or the level of a calibration tone; null: levels relative to full scale only.
  calibration jsonb,
  analysis jsonb,
  failure jsonb,
  -- Where the audio stands until it has been analysed, and afterwards if it is kept.
  audio_path text,
  keep_reason text CHECK (length(keep_reason) BETWEEN 3 AND 2000),
  delete_on date,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  updated_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK ((keep_reason IS NULL) = (delete_on IS NULL)),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id),
  FOREIGN KEY (organization_id, run_id) REFERENCES runs (organization_id, id)
);
CREATE INDEX recordings_task ON recordings (task_id, created_at DESC);
CALL protect_tenant('recordings');
`),
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE time_histories DROP CONSTRAINT time_histories_current_revision;
DROP TABLE recordings, time_history_chunks, time_history_revisions, time_histories, history_imports, history_mappings, task_level_samples, run_files;
ALTER TABLE task_levels DROP COLUMN survey_id, DROP COLUMN strategy, DROP COLUMN kept_reasons;
ALTER TABLE readings DISABLE TRIGGER append_only;
DELETE FROM readings WHERE num_nonnulls(dose_pct, average_db, lceq_db, las_max_db, peak_db) = 0;
ALTER TABLE readings ENABLE TRIGGER append_only;
ALTER TABLE readings DROP CONSTRAINT readings_not_empty, DROP COLUMN octave_bands_db, DROP COLUMN source,
  ADD CONSTRAINT readings_check1 CHECK (num_nonnulls(dose_pct, average_db, lceq_db, las_max_db, peak_db) > 0);
-- What is out, or belongs to a task alone, has no place in the older model.
ALTER TABLE run_revisions DISABLE TRIGGER append_only;
ALTER TABLE readings DISABLE TRIGGER append_only;
DELETE FROM readings WHERE run_id IN (SELECT id FROM runs WHERE is_out OR num_nonnulls(worker_id, area_id) <> 1);
SET CONSTRAINTS ALL DEFERRED;
DELETE FROM run_revisions WHERE duration_min IS NULL OR run_id IN (SELECT id FROM runs WHERE is_out OR num_nonnulls(worker_id, area_id) <> 1);
DELETE FROM runs WHERE is_out OR num_nonnulls(worker_id, area_id) <> 1;
UPDATE run_revisions SET reason = 'back' WHERE number > 1 AND reason IS NULL;
SET CONSTRAINTS ALL IMMEDIATE;
ALTER TABLE run_revisions ENABLE TRIGGER append_only;
ALTER TABLE readings ENABLE TRIGGER append_only;
ALTER TABLE run_revisions DROP CONSTRAINT run_revisions_reason, DROP COLUMN doubts, DROP COLUMN is_return,
  ALTER COLUMN duration_min SET NOT NULL,
  ADD CONSTRAINT run_revisions_check1 CHECK (number = 1 OR reason IS NOT NULL);
DROP INDEX runs_one_out;
ALTER TABLE runs DROP CONSTRAINT runs_overlap, DROP CONSTRAINT runs_of_something, DROP COLUMN survey_id, DROP COLUMN task_id,
  DROP COLUMN place, DROP COLUMN is_out, DROP COLUMN span,
  ADD CONSTRAINT runs_check CHECK (num_nonnulls(worker_id, area_id) = 1);
DROP TABLE instrument_calibrations, instrument_reservations, survey_people, survey_targets, surveys, workplace_changes;
ALTER TABLE sites DROP COLUMN remeasure_after_months;
`),
};
