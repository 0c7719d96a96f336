import type { Migration } from "../server/lib/migrator";

/** Protectors that were chosen before a change at the workplace, and that somebody has looked at since: they are still right. */
export const protectorsLookedAt: Migration = {
  name: "20261201161000-protectors-looked-at",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE protectors_looked_at (
  organization_id uuid NOT NULL,
  change_id uuid NOT NULL,
  assignment_id uuid NOT NULL,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (change_id, assignment_id),
  FOREIGN KEY (organization_id, change_id) REFERENCES workplace_changes (organization_id, id),
  FOREIGN KEY (organization_id, assignment_id) REFERENCES assignments (organization_id, id)
);
CALL protect_tenant('protectors_looked_at');
CALL make_append_only('protectors_looked_at');
`),
  down: ({ context: db }) => db.query("DROP TABLE protectors_looked_at;"),
};
