import type { Migration } from "../server/lib/migrator";

export const evidence: Migration = {
  name: "20261201090200-evidence",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE protector_models (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL REFERENCES organizations,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  kind text NOT NULL,
  is_archived boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  UNIQUE (organization_id, name)
);
CALL protect_tenant('protector_models');

-- A model's data from a date on. A correction is the next number; it may reach back.
CREATE TABLE protector_model_revisions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  model_id uuid NOT NULL,
  number int NOT NULL,
  effective_from date NOT NULL,
  data jsonb NOT NULL,
  reason text,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (model_id, number),
  UNIQUE (organization_id, id),
  CHECK (number = 1 OR reason IS NOT NULL),
  FOREIGN KEY (organization_id, model_id) REFERENCES protector_models (organization_id, id)
);
CREATE INDEX protector_model_revisions_in_force ON protector_model_revisions (model_id, effective_from DESC, number DESC);
CALL protect_tenant('protector_model_revisions');
CALL make_append_only('protector_model_revisions');

CREATE TABLE assignments (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  task_id uuid,
  area_id uuid,
  inner_model_id uuid NOT NULL,
  outer_model_id uuid,
  valid daterange NOT NULL CHECK (NOT isempty(valid) AND NOT lower_inf(valid)),
  assigned_by uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK (task_id IS NULL OR area_id IS NULL),
  CHECK (inner_model_id <> outer_model_id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id),
  FOREIGN KEY (organization_id, area_id) REFERENCES areas (organization_id, id),
  FOREIGN KEY (organization_id, inner_model_id) REFERENCES protector_models (organization_id, id),
  FOREIGN KEY (organization_id, outer_model_id) REFERENCES protector_models (organization_id, id),
  CONSTRAINT assignments_overlap EXCLUDE USING gist (
    worker_id WITH =, (coalesce(task_id, area_id, '00000000-0000-0000-0000-000000000000'::uuid)) WITH =, valid WITH &&)
);
CREATE INDEX assignments_worker ON assignments USING gist (worker_id, valid);
CREATE INDEX assignments_inner ON assignments (inner_model_id);
CREATE INDEX assignments_outer ON assignments (outer_model_id);
CALL protect_tenant('assignments');

CREATE TABLE instruments (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  kind text NOT NULL CHECK (kind IN ('dosimeter', 'sound-level-meter', 'calibrator')),
  class text NOT NULL CHECK (class IN ('1', '2')),
  serial_number text NOT NULL CHECK (length(serial_number) BETWEEN 1 AND 60),
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  calibration_due_on date,
  -- Settings rows offered when a reading is entered.
  presets jsonb NOT NULL DEFAULT '[]',
  is_archived boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  UNIQUE (organization_id, serial_number),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CALL protect_tenant('instruments');

CREATE TABLE shifts (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  crew_id uuid,
  -- Local date on which it starts, in the zone it was worked in.
  date date NOT NULL,
  local_start time NOT NULL,
  time_zone text NOT NULL,
  length_min int NOT NULL CHECK (length_min BETWEEN 1 AND 1440),
  starts_at timestamptz NOT NULL,
  ends_at timestamptz NOT NULL,
  is_void boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  current_revision_id uuid NOT NULL,
  UNIQUE (organization_id, id),
  CHECK (ends_at = starts_at + make_interval(mins => length_min)),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, crew_id) REFERENCES crews (organization_id, id),
  CONSTRAINT shifts_overlap EXCLUDE USING gist (worker_id WITH =, tstzrange(starts_at, ends_at) WITH &&)
    WHERE (NOT is_void) DEFERRABLE INITIALLY DEFERRED
);
CREATE INDEX shifts_worker_day ON shifts (worker_id, date);
CREATE INDEX shifts_crew_day ON shifts (crew_id, date);
CALL protect_tenant('shifts');

CREATE TABLE shift_revisions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  shift_id uuid NOT NULL,
  number int NOT NULL,
  local_start time NOT NULL,
  length_min int NOT NULL CHECK (length_min BETWEEN 1 AND 1440),
  unaccounted_how text NOT NULL DEFAULT 'unknown' CHECK (unaccounted_how IN ('unknown', 'like-the-rest', 'quiet')),
  unaccounted_level_db double precision CHECK (unaccounted_level_db BETWEEN 20 AND 160),
  is_void boolean NOT NULL DEFAULT false,
  note text CHECK (length(note) <= 10000),
  reason text CHECK (length(reason) <= 2000),
  entry_id uuid,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (shift_id, number),
  UNIQUE (organization_id, shift_id, id),
  CHECK (number = 1 OR reason IS NOT NULL),
  CHECK ((unaccounted_how = 'quiet') = (unaccounted_level_db IS NOT NULL)),
  FOREIGN KEY (organization_id, shift_id) REFERENCES shifts (organization_id, id) DEFERRABLE INITIALLY DEFERRED
);
ALTER TABLE shifts ADD CONSTRAINT shifts_current_revision FOREIGN KEY (organization_id, id, current_revision_id)
  REFERENCES shift_revisions (organization_id, shift_id, id) DEFERRABLE INITIALLY DEFERRED;
CALL protect_tenant('shift_revisions');
CALL make_append_only('shift_revisions');

CREATE TABLE shift_tasks (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  shift_id uuid NOT NULL,
  shift_revision_id uuid NOT NULL,
  position int NOT NULL,
  task_id uuid NOT NULL,
  duration_min double precision NOT NULL CHECK (duration_min > 0 AND duration_min <= 1440),
  worn_pct double precision CHECK (worn_pct BETWEEN 0 AND 100),
  worn_is_shift_wide boolean NOT NULL DEFAULT false,
  UNIQUE (shift_revision_id, position),
  FOREIGN KEY (organization_id, shift_id, shift_revision_id) REFERENCES shift_revisions (organization_id, shift_id, id),
  FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id)
);
CREATE INDEX shift_tasks_task ON shift_tasks (task_id);
CALL protect_tenant('shift_tasks');
CALL make_append_only('shift_tasks');

-- Task minutes stay within the shift, whoever writes.
CREATE FUNCTION shift_tasks_fit() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF EXISTS (
    SELECT 1 FROM (SELECT DISTINCT shift_revision_id FROM added) a
    JOIN shift_revisions r ON r.id = a.shift_revision_id
    JOIN shift_tasks t ON t.shift_revision_id = r.id
    GROUP BY r.id, r.length_min HAVING sum(t.duration_min) > r.length_min + 1e-6
  ) THEN
    RAISE EXCEPTION 'the tasks are longer than the shift' USING ERRCODE = 'check_violation', CONSTRAINT = 'shift_tasks_fit';
  END IF;
  RETURN NULL;
END $$;
CREATE TRIGGER shift_tasks_fit AFTER INSERT ON shift_tasks REFERENCING NEW TABLE AS added FOR EACH STATEMENT EXECUTE FUNCTION shift_tasks_fit();

CREATE TABLE absences (
  organization_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  date date NOT NULL,
  crew_id uuid,
  recorded_by uuid,
  recorded_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (worker_id, date),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, crew_id) REFERENCES crews (organization_id, id)
);
CALL protect_tenant('absences');

CREATE TABLE runs (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  instrument_id uuid NOT NULL,
  worker_id uuid,
  area_id uuid,
  shift_id uuid,
  date date NOT NULL,
  is_void boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  current_revision_id uuid NOT NULL,
  UNIQUE (organization_id, id),
  CHECK (num_nonnulls(worker_id, area_id) = 1),
  CHECK (shift_id IS NULL OR worker_id IS NOT NULL),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, instrument_id) REFERENCES instruments (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  FOREIGN KEY (organization_id, area_id) REFERENCES areas (organization_id, id),
  FOREIGN KEY (organization_id, shift_id) REFERENCES shifts (organization_id, id)
);
CREATE INDEX runs_worker_day ON runs (worker_id, date);
CREATE INDEX runs_instrument ON runs (instrument_id, date);
CREATE INDEX runs_list ON runs (organization_id, date DESC, id);
CALL protect_tenant('runs');

CREATE TABLE run_revisions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  run_id uuid NOT NULL,
  number int NOT NULL,
  out_at timestamptz,
  back_at timestamptz CHECK (back_at > out_at),
  duration_min double precision NOT NULL CHECK (duration_min > 0 AND duration_min <= 1440),
  check_before_db double precision CHECK (check_before_db BETWEEN 70 AND 130),
  check_after_db double precision CHECK (check_after_db BETWEEN 70 AND 130),
  covers text NOT NULL CHECK (covers IN ('shift', 'projected', 'part')),
  kept_reason text CHECK (length(kept_reason) <= 2000),
  unusual text CHECK (length(unusual) <= 10000),
  is_void boolean NOT NULL DEFAULT false,
  reason text CHECK (length(reason) <= 2000),
  entry_id uuid,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (run_id, number),
  UNIQUE (organization_id, run_id, id),
  CHECK (number = 1 OR reason IS NOT NULL),
  FOREIGN KEY (organization_id, run_id) REFERENCES runs (organization_id, id) DEFERRABLE INITIALLY DEFERRED
);
ALTER TABLE runs ADD CONSTRAINT runs_current_revision FOREIGN KEY (organization_id, id, current_revision_id)
  REFERENCES run_revisions (organization_id, run_id, id) DEFERRABLE INITIALLY DEFERRED;
CALL protect_tenant('run_revisions');
CALL make_append_only('run_revisions');

CREATE TABLE readings (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  run_id uuid NOT NULL,
  run_revision_id uuid NOT NULL,
  position int NOT NULL,
  criterion_level_db double precision NOT NULL CHECK (criterion_level_db BETWEEN 70 AND 100),
  exchange_rate_db double precision NOT NULL CHECK (exchange_rate_db IN (3, 4, 5)),
  threshold_db double precision CHECK (threshold_db BETWEEN 60 AND 100),
  weighting text NOT NULL CHECK (weighting IN ('A', 'C', 'Z')),
  response text NOT NULL CHECK (response IN ('slow', 'fast', 'none')),
  dose_pct double precision CHECK (dose_pct BETWEEN 0 AND 1000000),
  average_db double precision CHECK (average_db BETWEEN 20 AND 160),
  lceq_db double precision CHECK (lceq_db BETWEEN 20 AND 180),
  las_max_db double precision CHECK (las_max_db BETWEEN 20 AND 180),
  peak_db double precision CHECK (peak_db BETWEEN 40 AND 200),
  peak_weighting text CHECK (peak_weighting IN ('A', 'C', 'Z')),
  UNIQUE (run_revision_id, position),
  CHECK ((peak_db IS NULL) = (peak_weighting IS NULL)),
  CHECK (num_nonnulls(dose_pct, average_db, lceq_db, las_max_db, peak_db) > 0),
  FOREIGN KEY (organization_id, run_id, run_revision_id) REFERENCES run_revisions (organization_id, run_id, id)
);
CALL protect_tenant('readings');
CALL make_append_only('readings');
`),
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE shifts DROP CONSTRAINT shifts_current_revision;
ALTER TABLE runs DROP CONSTRAINT runs_current_revision;
DROP TABLE readings, run_revisions, runs, absences, shift_tasks, shift_revisions, shifts, instruments, assignments, protector_model_revisions, protector_models;
DROP FUNCTION shift_tasks_fit;
`),
};
