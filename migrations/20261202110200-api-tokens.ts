import type { Migration } from "../server/lib/migrator";

/** Tokens with which other systems act as a person, within a scope and until a day; only a hash of each is kept. */
export const apiTokens: Migration = {
  name: "20261202110200-api-tokens",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE api_tokens (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  user_id uuid NOT NULL,
  name text NOT NULL CHECK (length(name) BETWEEN 1 AND 100),
  scopes text[] NOT NULL CHECK (cardinality(scopes) > 0 AND scopes <@ ARRAY['read-programme', 'read-results', 'enter-readings']),
  secret_hash bytea NOT NULL UNIQUE,
  created_at timestamptz NOT NULL DEFAULT now(),
  expires_at timestamptz NOT NULL CHECK (expires_at > created_at),
  -- Give or take some minutes: not every use writes a row.
  last_used_at timestamptz,
  revoked_at timestamptz,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, user_id) REFERENCES users (organization_id, id)
);
CREATE INDEX api_tokens_user ON api_tokens (user_id, created_at DESC);
CALL protect_tenant('api_tokens');
`),
  down: ({ context: db }) => db.query("DROP TABLE api_tokens;"),
};
