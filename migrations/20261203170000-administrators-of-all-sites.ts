import type { Migration } from "../server/lib/migrator";

/** Who administers one site can't give back what reaches all of them: each reach keeps an administrator of its own. */
export const administratorsOfAllSites: Migration = {
  name: "20261203170000-administrators-of-all-sites",
  up: ({ context: db }) =>
    db.query(`
-- What an administrator loses, of one site or of all, somebody else has to be able to give: whoever asks and however many ask
-- at once.
CREATE OR REPLACE FUNCTION keep_an_administrator() RETURNS trigger LANGUAGE plpgsql AS $$
BEGIN
  IF TG_TABLE_NAME = 'users' AND NOT EXISTS (
    SELECT 1 FROM role_grants g WHERE g.user_id = NEW.id AND g.role = 'administrator' AND g.revoked_at IS NULL
  ) THEN
    RETURN NULL;
  END IF;
  PERFORM 1 FROM organizations WHERE id = OLD.organization_id FOR UPDATE;
  IF EXISTS (
    SELECT 1 FROM role_grants lost
    WHERE lost.organization_id = OLD.organization_id AND lost.role = 'administrator'
      AND CASE TG_TABLE_NAME WHEN 'users' THEN lost.user_id = OLD.id AND lost.revoked_at IS NULL ELSE lost.id = OLD.id END
      AND NOT EXISTS (
        SELECT 1 FROM role_grants g JOIN users u ON u.id = g.user_id
        WHERE g.organization_id = lost.organization_id AND g.role = 'administrator' AND u.revoked_at IS NULL
          AND g.revoked_at IS NULL AND (g.ends_at IS NULL OR g.ends_at > now()) AND (g.site_id IS NULL OR g.site_id = lost.site_id)
      )
  ) THEN
    RAISE EXCEPTION 'the last administrator stays' USING ERRCODE = 'check_violation', CONSTRAINT = 'last_administrator';
  END IF;
  RETURN NULL;
END $$;
`),
  down: ({ context: db }) =>
    db.query(`
CREATE OR REPLACE FUNCTION keep_an_administrator() RETURNS trigger LANGUAGE plpgsql AS $$
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
`),
};
