import type { Migration } from "../server/lib/migrator";

export const peopleAndWork: Migration = {
  name: "20261201090100-people-and-work",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE tasks (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  area_id uuid,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  is_archived boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  UNIQUE (organization_id, site_id, name),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, area_id) REFERENCES areas (organization_id, id)
);
CALL protect_tenant('tasks');

-- A task's noise from a date on. A correction is the next number with the same date.
CREATE TABLE task_levels (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  task_id uuid NOT NULL,
  number int NOT NULL,
  effective_from date NOT NULL,
  metric jsonb NOT NULL,
  level_db double precision NOT NULL CHECK (level_db BETWEEN 20 AND 160),
  lc_minus_la_db double precision CHECK (lc_minus_la_db BETWEEN -10 AND 40),
  octave_bands_db double precision[] CHECK (cardinality(octave_bands_db) = 8),
  las_max_db double precision CHECK (las_max_db BETWEEN 20 AND 180),
  peak_db double precision CHECK (peak_db BETWEEN 40 AND 200),
  peak_weighting text CHECK (peak_weighting IN ('A', 'C', 'Z')),
  samples_db double precision[] NOT NULL DEFAULT '{}',
  instrument_class text CHECK (instrument_class IN ('class-1-meter', 'class-2-meter', 'dosimeter')),
  grade text NOT NULL CHECK (grade IN ('measured-worker', 'measured-group', 'task-level', 'estimate')),
  source_note text NOT NULL DEFAULT '' CHECK (length(source_note) <= 2000),
  reason text,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (task_id, number),
  UNIQUE (organization_id, id),
  CHECK ((peak_db IS NULL) = (peak_weighting IS NULL)),
  CHECK (number = 1 OR reason IS NOT NULL),
  FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id)
);
CREATE INDEX task_levels_in_force ON task_levels (task_id, effective_from DESC, number DESC);
CALL protect_tenant('task_levels');
CALL make_append_only('task_levels');

CREATE TABLE jobs (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  is_archived boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  UNIQUE (organization_id, site_id, name),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CALL protect_tenant('jobs');

-- The nominal day.
CREATE TABLE job_tasks (
  organization_id uuid NOT NULL,
  job_id uuid NOT NULL,
  task_id uuid NOT NULL,
  position int NOT NULL,
  duration_min double precision NOT NULL CHECK (duration_min > 0 AND duration_min <= 1440),
  PRIMARY KEY (job_id, position),
  UNIQUE (job_id, task_id),
  FOREIGN KEY (organization_id, job_id) REFERENCES jobs (organization_id, id),
  FOREIGN KEY (organization_id, task_id) REFERENCES tasks (organization_id, id)
);
CALL protect_tenant('job_tasks');

CREATE TABLE workers (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  job_id uuid,
  employee_number text NOT NULL CHECK (length(employee_number) BETWEEN 1 AND 40),
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 200),
  employer text NOT NULL DEFAULT 'own' CHECK (employer IN ('own', 'agency', 'contractor')),
  employer_name text CHECK (length(employer_name) <= 200),
  language text NOT NULL DEFAULT 'en',
  hired_on date NOT NULL,
  left_on date CHECK (left_on >= hired_on),
  must_wear boolean NOT NULL DEFAULT false,
  personal_target_db double precision CHECK (personal_target_db BETWEEN 60 AND 100),
  revision int NOT NULL DEFAULT 1,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  CONSTRAINT workers_employee_number UNIQUE (organization_id, employee_number),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, job_id) REFERENCES jobs (organization_id, id)
);
CREATE INDEX workers_list ON workers (organization_id, name, id);
CREATE INDEX workers_search ON workers USING gin ((lower(name) || ' ' || lower(employee_number)) gin_trgm_ops);
CALL protect_tenant('workers');

-- Why a worker has a personal requirement: officers only, and apart from everything that is exported.
CREATE TABLE worker_requirement_reasons (
  worker_id uuid PRIMARY KEY,
  organization_id uuid NOT NULL,
  reason text NOT NULL CHECK (length(reason) <= 2000),
  author_id uuid,
  recorded_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id)
);
CALL protect_tenant('worker_requirement_reasons');

ALTER TABLE users ADD FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id);

-- A printed code that binds a sign-in to an employee number, once. Only its hash is kept.
CREATE TABLE sign_in_codes (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  code_hash text NOT NULL UNIQUE,
  expires_at timestamptz NOT NULL,
  used_at timestamptz,
  issued_by uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id)
);
CALL protect_tenant('sign_in_codes');
CREATE POLICY signing_in ON sign_in_codes FOR SELECT USING (code_hash = nullif(current_setting('app.sign_in_code', true), ''));

CREATE TABLE crews (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 120),
  usual_start time NOT NULL,
  usual_length_min int NOT NULL CHECK (usual_length_min BETWEEN 1 AND 1440),
  is_archived boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  UNIQUE (organization_id, site_id, name),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CALL protect_tenant('crews');

CREATE TABLE crew_memberships (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  crew_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  valid daterange NOT NULL CHECK (NOT isempty(valid) AND NOT lower_inf(valid)),
  is_loan boolean NOT NULL DEFAULT false,
  FOREIGN KEY (organization_id, crew_id) REFERENCES crews (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id),
  CONSTRAINT crew_memberships_overlap EXCLUDE USING gist (crew_id WITH =, worker_id WITH =, valid WITH &&)
);
CREATE INDEX crew_memberships_worker ON crew_memberships USING gist (worker_id, valid);
CALL protect_tenant('crew_memberships');

CREATE TABLE crew_supervisors (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  crew_id uuid NOT NULL,
  user_id uuid NOT NULL,
  valid daterange NOT NULL CHECK (NOT isempty(valid) AND NOT lower_inf(valid)),
  FOREIGN KEY (organization_id, crew_id) REFERENCES crews (organization_id, id),
  FOREIGN KEY (organization_id, user_id) REFERENCES users (organization_id, id),
  CONSTRAINT crew_supervisors_overlap EXCLUDE USING gist (crew_id WITH =, user_id WITH =, valid WITH &&)
);
CREATE INDEX crew_supervisors_user ON crew_supervisors USING gist (user_id, valid);
CALL protect_tenant('crew_supervisors');
`),
  down: ({ context: db }) =>
    db.query(`
ALTER TABLE users DROP CONSTRAINT users_organization_id_worker_id_fkey;
DROP TABLE crew_supervisors, crew_memberships, crews, sign_in_codes, worker_requirement_reasons, workers, job_tasks, jobs, task_levels, tasks;
`),
};
