import { runMigrations } from "graphile-worker";
import type { Sequelize } from "sequelize";
import { type MigrationParams, Umzug, type UmzugStorage } from "umzug";
import { migrations } from "../../migrations";

/** A migration runs inside one transaction and uses only this. */
export interface MigrationContext {
  query(text: string): Promise<unknown>;
}

export interface Migration {
  name: string;
  up(params: MigrationParams<MigrationContext>): Promise<unknown>;
  down(params: MigrationParams<MigrationContext>): Promise<unknown>;
}

const appendOnly = [
  "site_settings",
  "task_levels",
  "protector_model_revisions",
  "shift_revisions",
  "shift_tasks",
  "run_revisions",
  "readings",
  "day_results",
  "finding_steps",
  "audit_events",
  "audit_seals",
  "trail_entries",
  "trail_shapes",
];

/** Two processes that start at once migrate one after the other. */
const lockKey = 7_321_904;

function umzug(db: Sequelize) {
  const storage: UmzugStorage<MigrationContext> = {
    async logMigration({ name }) {
      await db.query("INSERT INTO schema_migrations (name) VALUES ($1)", { bind: [name] });
    },
    async unlogMigration({ name }) {
      await db.query("DELETE FROM schema_migrations WHERE name = $1", { bind: [name] });
    },
    async executed() {
      const [found] = await db.query("SELECT name FROM schema_migrations ORDER BY name");
      return (found as { name: string }[]).map(({ name }) => name);
    },
  };
  return new Umzug<MigrationContext>({
    migrations: migrations.map((migration) => ({
      name: migration.name,
      up: (params) => migration.up(params),
      down: (params) => migration.down(params),
    })),
    context: { query: (text) => db.transaction((transaction) => db.query(text, { transaction })) },
    storage,
    logger: undefined,
  });
}

async function underLock<T>(db: Sequelize, work: () => Promise<T>): Promise<T> {
  const connection = await db.connectionManager.getConnection({ type: "write" });
  const client = connection as unknown as { query(text: string): Promise<unknown> };
  try {
    await client.query(`SELECT pg_advisory_lock(${lockKey})`);
    return await work();
  } finally {
    await client.query(`SELECT pg_advisory_unlock(${lockKey})`);
    db.connectionManager.releaseConnection(connection);
  }
}

/**
 * Brings the schema up, then the queue's own schema, then gives the application's role what it may do: it owns nothing
 * and can't change a record that is append-only.
 */
export async function migrateUp(
  db: Sequelize,
  ownerUrl: string,
  applicationRole: string,
): Promise<string[]> {
  return underLock(db, async () => {
    await db.query(
      "CREATE TABLE IF NOT EXISTS schema_migrations (name text PRIMARY KEY, run_at timestamptz NOT NULL DEFAULT now())",
    );
    const done = await umzug(db).up();
    await db.query("CALL watch_rows()");
    await runMigrations({ connectionString: ownerUrl });
    await grantApplication(db, applicationRole);
    return done.map(({ name }) => name);
  });
}

export async function migrateDown(db: Sequelize, to: 0 | string = 0): Promise<string[]> {
  return underLock(db, async () => (await umzug(db).down({ to })).map(({ name }) => name));
}

export async function pendingMigrations(db: Sequelize): Promise<string[]> {
  const [found] = await db.query("SELECT name FROM schema_migrations");
  const executed = new Set((found as { name: string }[]).map(({ name }) => name));
  return migrations.map(({ name }) => name).filter((name) => !executed.has(name));
}

async function grantApplication(db: Sequelize, role: string): Promise<void> {
  if (!/^[a-z_][a-z0-9_]*$/.test(role))
    throw new Error("the application's database role has an unusual name");
  await db.query(`
    GRANT USAGE ON SCHEMA public, graphile_worker TO ${role};
    GRANT SELECT, INSERT, UPDATE, DELETE ON ALL TABLES IN SCHEMA public TO ${role};
    REVOKE UPDATE, DELETE ON ${appendOnly.join(", ")} FROM ${role};
    REVOKE INSERT, UPDATE, DELETE ON schema_migrations, trail_shapes, watched_tables FROM ${role};
    GRANT USAGE ON ALL SEQUENCES IN SCHEMA public, graphile_worker TO ${role};
    GRANT SELECT, INSERT, UPDATE, DELETE ON ALL TABLES IN SCHEMA graphile_worker TO ${role};
    GRANT EXECUTE ON ALL FUNCTIONS IN SCHEMA graphile_worker TO ${role};
    DO $$ DECLARE t record; BEGIN
      FOR t IN SELECT c.oid::regclass AS name FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace
               WHERE n.nspname = 'graphile_worker' AND c.relkind = 'r' AND c.relrowsecurity LOOP
        EXECUTE format('DROP POLICY IF EXISTS application ON %s', t.name);
        EXECUTE format('CREATE POLICY application ON %s TO ${role} USING (true) WITH CHECK (true)', t.name);
      END LOOP;
    END $$;`);
}
