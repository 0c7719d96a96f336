import type { Migration } from "../server/lib/migrator";

/** A role that ends by itself, and an auditor's that is about one year of one site: a visitor's grant. */
export const visitors: Migration = {
  name: "20261202110000-visitors",
  up: ({ context: db }) =>
    db.query(`
ALTER TABLE role_grants
  ADD COLUMN year int CHECK (year BETWEEN 1950 AND 2200),
  ADD COLUMN ends_at timestamptz,
  -- One year of nowhere would be one year of everything; and whoever must not go missing has no end.
  ADD CONSTRAINT role_grants_visitor CHECK (
    (year IS NULL OR (role = 'auditor' AND site_id IS NOT NULL AND ends_at IS NOT NULL))
    AND (ends_at IS NULL OR (role <> 'administrator' AND ends_at > granted_at)));
DROP INDEX role_grants_once;
CREATE UNIQUE INDEX role_grants_once ON role_grants (user_id, role, coalesce(site_id, '00000000-0000-0000-0000-000000000000'), coalesce(year, 0))
  WHERE revoked_at IS NULL;
CREATE INDEX role_grants_visitors ON role_grants (organization_id, ends_at DESC) WHERE year IS NOT NULL;
`),
  down: ({ context: db }) =>
    db.query(`
-- Without an end they would hold for ever, and of all years.
UPDATE role_grants SET revoked_at = coalesce(revoked_at, now()) WHERE year IS NOT NULL OR ends_at IS NOT NULL;
DROP INDEX role_grants_visitors;
DROP INDEX role_grants_once;
ALTER TABLE role_grants DROP CONSTRAINT role_grants_visitor, DROP COLUMN ends_at, DROP COLUMN year;
CREATE UNIQUE INDEX role_grants_once ON role_grants (user_id, role, coalesce(site_id, '00000000-0000-0000-0000-000000000000')) WHERE revoked_at IS NULL;
CALL watch_table('role_grants');
`),
};
