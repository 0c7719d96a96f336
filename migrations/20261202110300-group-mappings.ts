import type { Migration } from "../server/lib/migrator";

/** Roles that follow the groups which the sign-in service states of a person, apart from those granted by hand. */
export const groupMappings: Migration = {
  name: "20261202110300-group-mappings",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE group_mappings (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL REFERENCES organizations,
  group_name text NOT NULL CHECK (length(group_name) BETWEEN 1 AND 255),
  -- A worker's role wants a worker, whom no group names.
  role text NOT NULL CHECK (role IN ('officer', 'supervisor', 'auditor', 'administrator')),
  site_id uuid,
  author_id uuid NOT NULL,
  created_at timestamptz NOT NULL DEFAULT now(),
  ended_at timestamptz,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id)
);
CREATE UNIQUE INDEX group_mappings_once ON group_mappings (organization_id, group_name, role, coalesce(site_id, '00000000-0000-0000-0000-000000000000'))
  WHERE ended_at IS NULL;
CALL protect_tenant('group_mappings');
-- At sign-in the organization is not known yet: the mappings of the groups that the provider states, and no others.
CREATE POLICY signing_in ON group_mappings FOR SELECT USING (
  group_name IN (SELECT jsonb_array_elements_text(coalesce(nullif(current_setting('app.sign_in_groups', true), ''), '[]')::jsonb)));

ALTER TABLE role_grants ADD COLUMN mapping_id uuid,
  ADD FOREIGN KEY (organization_id, mapping_id) REFERENCES group_mappings (organization_id, id);
DROP INDEX role_grants_once;
CREATE UNIQUE INDEX role_grants_once ON role_grants (user_id, role, coalesce(site_id, '00000000-0000-0000-0000-000000000000'), coalesce(year, 0),
  coalesce(mapping_id, '00000000-0000-0000-0000-000000000000')) WHERE revoked_at IS NULL;
CREATE INDEX role_grants_mapping ON role_grants (mapping_id) WHERE revoked_at IS NULL;
`),
  down: ({ context: db }) =>
    db.query(`
UPDATE role_grants SET revoked_at = coalesce(revoked_at, now()) WHERE mapping_id IS NOT NULL AND role <> 'administrator';
-- An administrator by a group alone stays one: nobody else might be left.
UPDATE role_grants g SET revoked_at = now() WHERE mapping_id IS NOT NULL AND revoked_at IS NULL AND EXISTS (
  SELECT 1 FROM role_grants o WHERE o.user_id = g.user_id AND o.role = g.role AND o.site_id IS NOT DISTINCT FROM g.site_id AND o.revoked_at IS NULL
    AND (o.mapping_id IS NULL OR o.id < g.id));
SET CONSTRAINTS ALL IMMEDIATE;
DROP INDEX role_grants_mapping;
DROP INDEX role_grants_once;
ALTER TABLE role_grants DROP COLUMN mapping_id;
CREATE UNIQUE INDEX role_grants_once ON role_grants (user_id, role, coalesce(site_id, '00000000-0000-0000-0000-000000000000'), coalesce(year, 0))
  WHERE revoked_at IS NULL;
DROP TABLE group_mappings;
CALL watch_table('role_grants');
`),
};
