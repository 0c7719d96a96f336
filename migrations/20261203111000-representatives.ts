import type { Migration } from "../server/lib/migrator";

const ROLES = "'officer', 'supervisor', 'worker', 'auditor', 'administrator'";
const MAPPED = "'officer', 'supervisor', 'auditor', 'administrator'";
const MORE = ", 'representative'";

const checks = (roles: string, mapped: string) => `
ALTER TABLE role_grants DROP CONSTRAINT role_grants_role_check, ADD CONSTRAINT role_grants_role_check CHECK (role IN (${roles}));
ALTER TABLE group_mappings DROP CONSTRAINT group_mappings_role_check, ADD CONSTRAINT group_mappings_role_check CHECK (role IN (${mapped}));
`;

/** A workers' representative: the figures of a site without names. */
export const representatives: Migration = {
  name: "20261203111000-representatives",
  up: ({ context: db }) => db.query(checks(ROLES + MORE, MAPPED + MORE)),
  down: ({ context: db }) =>
    db.query(`
-- Over, and under a name that the older check knows: they open nothing.
UPDATE role_grants SET role = 'auditor', revoked_at = coalesce(revoked_at, now()) WHERE role = 'representative';
UPDATE group_mappings SET role = 'auditor', ended_at = coalesce(ended_at, now()) WHERE role = 'representative';
SET CONSTRAINTS ALL IMMEDIATE;
${checks(ROLES, MAPPED)}`),
};
