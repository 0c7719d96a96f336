import type { Migration } from "../server/lib/migrator";

/** Every tenant's table gets its policy anew, with this condition. */
const protectWith = (condition: string) => `
DO $$
DECLARE target regclass;
BEGIN
  FOR target IN SELECT polrelid::regclass FROM pg_policy WHERE polname = 'own_organization' AND polrelid <> 'organizations'::regclass LOOP
    EXECUTE format('ALTER POLICY own_organization ON %s USING (${condition})', target);
  END LOOP;
END $$;
CREATE OR REPLACE PROCEDURE protect_tenant(target regclass) LANGUAGE plpgsql AS $$
BEGIN
  EXECUTE format('ALTER TABLE %s ENABLE ROW LEVEL SECURITY', target);
  EXECUTE format('ALTER TABLE %s FORCE ROW LEVEL SECURITY', target);
  EXECUTE format('CREATE POLICY own_organization ON %s USING (${condition})', target);
END $$;`;

export const indexes: Migration = {
  name: "20261201090400-indexes",
  up: ({ context: db }) =>
    db.query(`
-- In a subquery the setting is read once a statement; bare, it was read and cast for every row.
${protectWith("organization_id = (SELECT current_organization())")}

-- Few shifts are ever corrected, so that "was it?" reads next to nothing.
CREATE INDEX shifts_corrected ON shifts (worker_id, date) WHERE revision > 1;
`),
  down: ({ context: db }) =>
    db.query(`
DROP INDEX shifts_corrected;
${protectWith("organization_id = current_organization()")}
`),
};
