import type { Migration } from "../server/lib/migrator";

export const plans: Migration = {
  name: "20261202096000-plans",
  up: ({ context: db }) =>
    db.query(`
-- Changes that were tried and kept. What they would do was computed when they were kept, on the rules and levels of that
-- day; what is measured later is held against it and never overwrites it.
CREATE TABLE plans (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 200),
  scope_kind text NOT NULL CHECK (scope_kind IN ('worker', 'job', 'area')),
  scope_id uuid NOT NULL,
  base_date date NOT NULL,
  governing_rule_set text NOT NULL,
  governing_version int NOT NULL,
  method_version int NOT NULL,
  goal text NOT NULL,
  changes jsonb NOT NULL,
  outcome jsonb NOT NULL,
  author_id uuid,
  kept_at timestamptz NOT NULL DEFAULT now(),
  put_aside_reason text CHECK (length(put_aside_reason) BETWEEN 3 AND 2000),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CREATE INDEX plans_list ON plans (organization_id, kept_at DESC, id);
CALL protect_tenant('plans');
`),
  down: ({ context: db }) => db.query("DROP TABLE plans;"),
};
