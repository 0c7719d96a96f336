import type { Migration } from "../server/lib/migrator";

/** Training held at a site, and who was there. */
export const training: Migration = {
  name: "20261202092100-training",
  up: ({ context: db }) =>
    db.query(`
CREATE TABLE training_sessions (
  id uuid PRIMARY KEY DEFAULT gen_random_uuid(),
  organization_id uuid NOT NULL,
  site_id uuid NOT NULL,
  held_on date NOT NULL,
  title text NOT NULL CHECK (length(title) BETWEEN 1 AND 200),
  duration_min double precision NOT NULL CHECK (duration_min > 0 AND duration_min <= 1440),
  -- What was shown or handed out.
  file_id uuid,
  struck_reason text CHECK (length(struck_reason) BETWEEN 3 AND 2000),
  author_id uuid,
  created_at timestamptz NOT NULL DEFAULT now(),
  revision int NOT NULL DEFAULT 1,
  UNIQUE (organization_id, id),
  FOREIGN KEY (organization_id, site_id) REFERENCES sites (organization_id, id),
  FOREIGN KEY (organization_id, file_id) REFERENCES files (organization_id, id),
  FOREIGN KEY (organization_id, author_id) REFERENCES users (organization_id, id)
);
CREATE INDEX training_sessions_list ON training_sessions (organization_id, site_id, held_on DESC, id);
CREATE INDEX training_sessions_file ON training_sessions (file_id);
CALL protect_tenant('training_sessions');

CREATE TABLE training_attendances (
  organization_id uuid NOT NULL,
  session_id uuid NOT NULL,
  worker_id uuid NOT NULL,
  PRIMARY KEY (session_id, worker_id),
  FOREIGN KEY (organization_id, session_id) REFERENCES training_sessions (organization_id, id),
  FOREIGN KEY (organization_id, worker_id) REFERENCES workers (organization_id, id)
);
CREATE INDEX training_attendances_worker ON training_attendances (worker_id);
CALL protect_tenant('training_attendances');
`),
  down: ({ context: db }) => db.query("DROP TABLE training_attendances, training_sessions;"),
};
