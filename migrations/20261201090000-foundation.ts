import type { Migration } from "../server/lib/migrator";

export const foundation: Migration = {
  name: "20261201090000-foundation",
  up: ({ context: db }) =>
    db.query(`
CREATE EXTENSION IF NOT EXISTS btree_gist;
CREATE EXTENSION IF NOT EXISTS pg_trgm;

CREATE FUNCTION current_organization() RETURNS uuid LANGUAGE sql STABLE AS
  $$ SELECT nullif(current_setting('app.organization', true), '')::uuid $$;

CREATE FUNCTION refuse_change() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  RAISE EXCEPTION '% on % is refused: records are append-only', TG_OP, TG_TABLE_NAME USING ERRCODE = 'restrict_violation';
END $$;

-- One tenant's rows only, for every role that may touch the table, its owner included.
CREATE PROCEDURE protect_tenant(target regclass) LANGUAGE plpgsql AS $$
BEGIN
  EXECUTE format('ALTER TABLE %s ENABLE ROW LEVEL SECURITY', target);
  EXECUTE format('ALTER TABLE %s FORCE ROW LEVEL SECURITY', target);
  EXECUTE format('CREATE POLICY own_organization ON %s USING (organization_id = current_organization())', target);
END $$;

CREATE PROCEDURE make_append_only(target regclass) LANGUAGE plpgsql AS $$
BEGIN
  EXECUTE format('CREATE TRIGGER append_only BEFORE UPDATE OR DELETE ON %s FOR EACH ROW EXECUTE FUNCTION refuse_change()', target);
  EXECUTE format('CREATE TRIGGER append_only_all BEFORE TRUNCATE ON %s FOR EACH STATEMENT EXECUTE FUNCTION refuse_change()', target);
END $$;

CREATE TABLE organizations (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 200),
  created_at timestamptz NOT NULL DEFAULT now()
);
ALTER TABLE organizations ENABLE ROW LEVEL SECURITY;
ALTER TABLE organizations FORCE ROW LEVEL SECURITY;
CREATE POLICY own_organization ON organizations USING (id = current_organization());
-- Recurring jobs and set-up have to learn which organizations there are, and nothing else of them.
CREATE POLICY scheduler ON organizations FOR SELECT USING (current_setting('app.scope', true) = 'scheduler');

CREATE TABLE sites (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL REFERENCES organizations,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 200),
  time_zone text NOT NULL,
  language text NOT NULL DEFAULT 'en',
  notice_delay_min int NOT NULL DEFAULT 15 CHECK (notice_delay_min BETWEEN 0 AND 1440),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  UNIQUE (organization_id, name)
);
CALL protect_tenant('sites');

-- What verdicts at a site rest on, from a date. A later row with the same date supersedes the earlier one.
CREATE TABLE site_settings (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  number int NOT NULL,
  effective_from date NOT NULL,
  governing_rule_set text NOT NULL,
  comparison_rule_sets text[] NOT NULL DEFAULT '{}',
  wear_from_db double precision NOT NULL DEFAULT 85 CHECK (wear_from_db BETWEEN 60 AND 120),
  credits_active_part boolean NOT NULL DEFAULT false,
  uses_uncertainty boolean NOT NULL DEFAULT false,
  reason text,
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (site_id, number),
  UNIQUE (organization_id, site_id, id),
  CHECK (NOT governing_rule_set = ANY (comparison_rule_sets)),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CALL protect_tenant('site_settings');
CALL make_append_only('site_settings');

CREATE TABLE areas (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 200),
  zone text NOT NULL DEFAULT 'none' CHECK (zone IN ('none', 'single', 'double')),
  is_archived boolean NOT NULL DEFAULT false,
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  UNIQUE (organization_id, site_id, name),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CALL protect_tenant('areas');

CREATE TABLE users (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL REFERENCES organizations,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 200),
  email text CHECK (length(email) BETWEEN 3 AND 320),
  issuer text,
  subject text,
  -- Granted by subject before the first sign-in, where the provider gives no verified e-mail.
  expected_subject text,
  worker_id uuid,
  language text NOT NULL DEFAULT 'en',
  -- Sessions begun under an older epoch are over.
  session_epoch int NOT NULL DEFAULT 1,
  revoked_at timestamptz,
  last_sign_in_at timestamptz,
  revision int NOT NULL DEFAULT 1,
  created_at timestamptz NOT NULL DEFAULT now(),
  UNIQUE (organization_id, id),
  UNIQUE (issuer, subject),
  CHECK ((issuer IS NULL) = (subject IS NULL)),
  CHECK (email IS NOT NULL OR expected_subject IS NOT NULL OR subject IS NOT NULL OR worker_id IS NOT NULL)
);
CREATE UNIQUE INDEX users_email ON users (lower(email)) WHERE revoked_at IS NULL;
CREATE UNIQUE INDEX users_expected_subject ON users (expected_subject) WHERE revoked_at IS NULL;
CREATE UNIQUE INDEX users_worker ON users (worker_id) WHERE revoked_at IS NULL;
CALL protect_tenant('users');
-- At sign-in the organization is not known yet: the row that the provider's own statement names, and no other.
CREATE POLICY signing_in ON users FOR SELECT USING (
  (issuer = nullif(current_setting('app.sign_in_issuer', true), '') AND subject = nullif(current_setting('app.sign_in_subject', true), ''))
  OR lower(email) = nullif(lower(current_setting('app.sign_in_email', true)), '')
  OR expected_subject = nullif(current_setting('app.sign_in_subject', true), '')
  OR id = nullif(current_setting('app.sign_in_user', true), '')::uuid
);

CREATE TABLE role_grants (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  user_id uuid NOT NULL,
  role text NOT NULL CHECK (role IN ('officer', 'supervisor', 'worker', 'auditor', 'administrator')),
  -- Null: every site of the organization.
  site_id uuid,
  granted_by uuid,
  granted_at timestamptz NOT NULL DEFAULT now(),
  revoked_at timestamptz,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, user_id) REFERENCES users (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id)
);
CREATE UNIQUE INDEX role_grants_once ON role_grants (user_id, role, coalesce(site_id, '00000000-0000-0000-0000-000000000000')) WHERE revoked_at IS NULL;
CALL protect_tenant('role_grants');

-- The organization can't lose its last administrator, whoever asks and however many ask at once.
CREATE FUNCTION keep_an_administrator() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF TG_TABLE_NAME = 'users' AND NOT EXISTS (
    SELECT 1 FROM role_grants g WHERE g.user_id = NEW.id AND g.role = 'administrator' AND g.revoked_at IS NULL
  ) THEN
    RETURN NULL;
  END IF;
  PERFORM 1 FROM organizations WHERE id = OLD.organization_id FOR UPDATE;
  IF NOT EXISTS (
    SELECT 1 FROM role_grants g JOIN users u ON u.id = g.user_id
    WHERE g.organization_id = OLD.organization_id AND g.role = 'administrator' AND g.revoked_at IS NULL AND u.revoked_at IS NULL
  ) THEN
    RAISE EXCEPTION 'the last administrator stays' USING ERRCODE = 'check_violation', CONSTRAINT = 'last_administrator';
  END IF;
  RETURN NULL;
END $$;
CREATE CONSTRAINT TRIGGER keep_an_administrator AFTER UPDATE OR DELETE ON role_grants
  DEFERRABLE INITIALLY DEFERRED FOR EACH ROW WHEN (OLD.role = 'administrator' AND OLD.revoked_at IS NULL) EXECUTE FUNCTION keep_an_administrator();
CREATE CONSTRAINT TRIGGER keep_an_administrator AFTER UPDATE OF revoked_at ON users
  DEFERRABLE INITIALLY DEFERRED FOR EACH ROW WHEN (OLD.revoked_at IS NULL AND NEW.revoked_at IS NOT NULL) EXECUTE FUNCTION keep_an_administrator();

CREATE TABLE sessions (
  sid varchar PRIMARY KEY,
  sess json NOT NULL,
  expire timestamp(6) NOT NULL
);
CREATE INDEX sessions_expire ON sessions (expire);

CREATE TABLE rate_limits (
  key text PRIMARY KEY,
  hits int NOT NULL,
  resets_at timestamptz NOT NULL
);

CREATE TABLE idempotency_keys (
  organization_id uuid NOT NULL REFERENCES organizations,
  user_id uuid NOT NULL,
  route text NOT NULL,
  key text NOT NULL CHECK (length(key) BETWEEN 8 AND 200),
  request_hash text NOT NULL,
  status int,
  reply jsonb,
  created_at timestamptz NOT NULL DEFAULT now(),
  PRIMARY KEY (organization_id, user_id, route, key)
);
CALL protect_tenant('idempotency_keys');
CREATE INDEX idempotency_keys_age ON idempotency_keys (created_at);

-- The trail. Personal values live apart, so that erasing a person breaks no digest.
CREATE TABLE audit_events (
  id bigint GENERATED ALWAYS AS IDENTITY PRIMARY KEY,
  organization_id uuid NOT NULL REFERENCES organizations,
  at timestamptz NOT NULL DEFAULT clock_timestamp(),
  actor_id uuid,
  actor_role text,
  request_id text,
  action text NOT NULL,
  subject_kind text NOT NULL,
  subject_id uuid,
  values_digest bytea NOT NULL,
  transaction_id xid8 NOT NULL DEFAULT pg_current_xact_id()
);
CREATE INDEX audit_events_subject ON audit_events (organization_id, subject_kind, subject_id);
CREATE INDEX audit_events_time ON audit_events (organization_id, id);
CALL protect_tenant('audit_events');
CALL make_append_only('audit_events');

CREATE TABLE audit_values (
  event_id bigint PRIMARY KEY REFERENCES audit_events,
  organization_id uuid NOT NULL,
  salt bytea NOT NULL,
  recorded jsonb NOT NULL
);
CALL protect_tenant('audit_values');

CREATE TABLE audit_seals (
  organization_id uuid NOT NULL REFERENCES organizations,
  number bigint NOT NULL,
  event_id bigint NOT NULL UNIQUE REFERENCES audit_events,
  hash bytea NOT NULL,
  sealed_at timestamptz NOT NULL DEFAULT clock_timestamp(),
  PRIMARY KEY (organization_id, number)
);
CALL protect_tenant('audit_seals');
CALL make_append_only('audit_seals');
`),
  down: ({ context: db }) =>
    db.query(`
DROP TABLE audit_seals, audit_values, audit_events, idempotency_keys, rate_limits, sessions, role_grants, users, areas, site_settings, sites, organizations;
DROP FUNCTION keep_an_administrator, refuse_change, current_organization;
DROP PROCEDURE protect_tenant, make_append_only;
`),
};
