import type { Migration } from "../server/lib/migrator";

/** Timetables that are searched for, the plans they become, and the steps of plans. */
export const timetables: Migration = {
  name: "20261202100100-timetables",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE plans
  ADD COLUMN kind text NOT NULL DEFAULT 'changes' CHECK (kind IN ('changes', 'timetable')),
  ADD COLUMN timetable jsonb,
  ADD CONSTRAINT plans_timetable CHECK ((kind = 'timetable') = (timetable IS NOT NULL)),
  DROP CONSTRAINT plans_scope_kind_check,
  ADD CONSTRAINT plans_scope_kind_check CHECK (scope_kind IN ('worker', 'job', 'area', 'crew'));

-- What was asked for and what it rested on stay as they were, whatever becomes of levels, protectors and people.
CREATE TABLE timetables (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  scope_kind text NOT NULL CHECK (scope_kind IN ('crew', 'job')),
  scope_id uuid NOT NULL,
  base_date date NOT NULL,
  governing_rule_set text NOT NULL,
  governing_version int NOT NULL,
  method_version int NOT NULL,
  request jsonb NOT NULL,
  basis jsonb NOT NULL,
  -- Everybody's day with it, for the engine, once there is one: people, tasks and protectors as they were.
  subject jsonb NOT NULL,
  state text NOT NULL CHECK (state IN ('working', 'answered', 'cancelled', 'failed')),
  progress_pct double precision NOT NULL DEFAULT 0,
  tries int NOT NULL DEFAULT 0,
  answer jsonb,
  plan_id uuid,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  updated_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK ((state = 'answered') = (answer IS NOT NULL)),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, plan_id) REFERENCES plans (organization_id, id)
);
CALL protect_tenant('timetables');

CREATE TABLE plan_steps (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  plan_id uuid NOT NULL,
  what text NOT NULL CHECK (length(what) BETWEEN 3 AND 2000),
  owner_id uuid,
  due_on date NOT NULL,
  state text NOT NULL DEFAULT 'open' CHECK (state IN ('open', 'done', 'cannot')),
  marked_on date,
  reason text CHECK (length(reason) BETWEEN 3 AND 2000),
  -- The measure of a finding that this step is.
  measure_id uuid,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  CHECK ((state = 'open') = (marked_on IS NULL)),
  CHECK (state <> 'cannot' OR reason IS NOT NULL),
  FOREIGN KEY (organization_id, plan_id) REFERENCES plans (organization_id, id),
  FOREIGN KEY (organization_id, owner_id) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, measure_id) REFERENCES finding_measures (organization_id, id)
);
CREATE INDEX plan_steps_plan ON plan_steps (plan_id, due_on);
CREATE INDEX plan_steps_due ON plan_steps (organization_id, due_on) WHERE state = 'open';
CALL protect_tenant('plan_steps');
`),
  down: ({ context: db }) =>
    db.query(`
DROP TABLE plan_steps, timetables;
-- A plan of a kind that was not known before can't stay.
DELETE FROM plans WHERE kind = 'timetable' OR scope_kind = 'crew';
ALTER TABLE plans DROP CONSTRAINT plans_timetable, DROP COLUMN timetable, DROP COLUMN kind,
  DROP CONSTRAINT plans_scope_kind_check,
  ADD CONSTRAINT plans_scope_kind_check CHECK (scope_kind IN ('worker', 'job', 'area'));
`),
};
