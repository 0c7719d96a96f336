import type { Sequelize } from "sequelize";

/** Transactions of the filling say with this setting when what they write was recorded. */
export const RECORDED_AT = "app.recorded_at";

interface Stamp {
  table: string;
  column: string;
  clock: string;
}

/**
 * While the demo's history is laid out, the database stamps records with the time that the transaction names: they are
 * append-only, and could not be dated afterwards. Needs the tables' owner; puts everything back, whatever happens.
 */
export async function withDatedRecords<T>(owner: Sequelize, work: () => Promise<T>): Promise<T> {
  const [found] = await owner.query(
    `SELECT table_name AS "table", column_name AS "column", column_default AS clock FROM information_schema.columns
     WHERE table_schema = 'public' AND table_name <> 'schema_migrations' AND column_default IN ('now()', 'clock_timestamp()')`,
  );
  const stamps = found as Stamp[];
  const setDefaults = (clockOf: (stamp: Stamp) => string) =>
    owner.query(
      stamps
        .map(
          (stamp) =>
            `ALTER TABLE "${stamp.table}" ALTER COLUMN "${stamp.column}" SET DEFAULT ${clockOf(stamp)}`,
        )
        .join("; "),
    );
  const recordedAt = `coalesce(nullif(current_setting('${RECORDED_AT}', true), '')::timestamptz, clock_timestamp())`;
  await setDefaults(() => recordedAt);
  try {
    return await work();
  } finally {
    await setDefaults(({ clock }) => clock);
  }
}
