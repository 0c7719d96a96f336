import type { Migration } from "../server/lib/migrator";

/** What was agreed with an agency or a contractor about its people at a site. The latest number counts. */
export const employerDuties: Migration = {
  name: "20261203110000-employer-duties",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE employer_duties (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  kind text NOT NULL CHECK (kind IN ('agency', 'contractor')),
  -- As the workers' records name it.
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 200),
  number int NOT NULL CHECK (number > 0),
  measure text NOT NULL CHECK (measure IN ('host', 'employer')),
  protect text NOT NULL CHECK (protect IN ('host', 'employer')),
  train text NOT NULL CHECK (train IN ('host', 'employer')),
  keep text NOT NULL CHECK (keep IN ('host', 'employer')),
  tell text NOT NULL CHECK (tell IN ('host', 'employer')),
  -- Where it was agreed: a contract, a letter.
  basis text NOT NULL CHECK (length(basis) BETWEEN 3 AND 2000),
  agreed_by uuid NOT NULL,
  agreed_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  UNIQUE (site_id, kind, name, number),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, agreed_by) REFERENCES users (organization_id, id)
);
CALL protect_tenant('employer_duties');
CALL make_append_only('employer_duties');
`),
  down: ({ context: db }) => db.query("DROP TABLE employer_duties;"),
};
