import type { Migration } from "../server/lib/migrator";

const ROLES = "'officer', 'supervisor', 'worker', 'auditor', 'administrator', 'representative'";
const role = (roles: string) =>
  `ALTER TABLE role_grants DROP CONSTRAINT role_grants_role_check, ADD CONSTRAINT role_grants_role_check CHECK (role IN (${roles}));`;
const NONE = "'00000000-0000-0000-0000-000000000000'";

/** For whom a worker works, by date; and a grant to somebody of that employer, at one site and for a time. */
export const employerGrants: Migration = {
  name: "20261203112000-employer-grants",
  up: ({ context: db }) =>
    db.query(`
-- Whoever changes employers leaves their earlier days with the earlier one. The latest row on or before a date counts.
CREATE TABLE worker_employers (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  number int NOT NULL CHECK (number > 0),
  employer text NOT NULL,
  employer_name text,
  -- By the site's clock; of the first row: for as long as is known.
  since date NOT NULL,
  UNIQUE (organization_id, id),
  UNIQUE (worker_id, number),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id)
);
CALL protect_tenant('worker_employers');
INSERT INTO worker_employers (organization_id, worker_id, number, employer, employer_name, since)
  SELECT organization_id, id, 1, employer, nullif(btrim(employer_name), ''), '-infinity' FROM workers;
CALL make_append_only('worker_employers');

CREATE FUNCTION keep_worker_employer() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  INSERT INTO worker_employers (organization_id, worker_id, number, employer, employer_name, since)
    SELECT NEW.organization_id, NEW.id, coalesce(max(e.number), 0) + 1, NEW.employer, nullif(btrim(NEW.employer_name), ''),
      CASE WHEN TG_OP = 'INSERT' THEN '-infinity'::date
        ELSE (SELECT (now() AT TIME ZONE s.time_zone)::date FROM sites s WHERE s.id = NEW.site_id) END
    FROM worker_employers e WHERE e.worker_id = NEW.id;
  RETURN NULL;
END $$;
CREATE TRIGGER employer_kept_first AFTER INSERT ON workers FOR EACH ROW EXECUTE FUNCTION keep_worker_employer();
CREATE TRIGGER employer_kept AFTER UPDATE ON workers FOR EACH ROW
  WHEN ((OLD.employer, nullif(btrim(OLD.employer_name), '')) IS DISTINCT FROM (NEW.employer, nullif(btrim(NEW.employer_name), '')))
  EXECUTE FUNCTION keep_worker_employer();

${role(`${ROLES}, 'employer'`)}
ALTER TABLE role_grants
  ADD COLUMN employer_kind text CHECK (employer_kind IN ('agency', 'contractor')),
  ADD COLUMN employer_name text CHECK (length(employer_name) BETWEEN 1 AND 200),
  ADD CONSTRAINT role_grants_employer CHECK (
    (role = 'employer') = (employer_kind IS NOT NULL) AND (employer_kind IS NULL) = (employer_name IS NULL)
    AND (role <> 'employer' OR (site_id IS NOT NULL AND ends_at IS NOT NULL)));
DROP INDEX role_grants_once;
CREATE UNIQUE INDEX role_grants_once ON role_grants (user_id, role, coalesce(site_id, ${NONE}), coalesce(year, 0), coalesce(mapping_id, ${NONE}), coalesce(employer_kind, ''), coalesce(employer_name, ''))
  WHERE revoked_at IS NULL;
CREATE INDEX role_grants_employers ON role_grants (site_id, ends_at DESC) WHERE role = 'employer';
`),
  down: ({ context: db }) =>
    db.query(`
DROP INDEX role_grants_employers;
DROP INDEX role_grants_once;
ALTER TABLE role_grants DROP CONSTRAINT role_grants_employer;
-- Over, and under a name that the older check knows: they open nothing.
UPDATE role_grants SET role = 'worker', revoked_at = coalesce(revoked_at, now()) WHERE role = 'employer';
SET CONSTRAINTS ALL IMMEDIATE;
ALTER TABLE role_grants DROP COLUMN employer_name, DROP COLUMN employer_kind;
CREATE UNIQUE INDEX role_grants_once ON role_grants (user_id, role, coalesce(site_id, ${NONE}), coalesce(year, 0), coalesce(mapping_id, ${NONE})) WHERE revoked_at IS NULL;
${role(ROLES)}
CALL watch_table('role_grants');
DROP TRIGGER employer_kept ON workers;
DROP TRIGGER employer_kept_first ON workers;
DROP FUNCTION keep_worker_employer;
DROP TABLE worker_employers;
`),
};
