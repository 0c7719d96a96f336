import pg from "pg";

let pool: pg.Pool | undefined;

/** The owner's connection, which sees every organization: tests lay out their rows through it. */
export function owner(): pg.Pool {
  if (!pool) {
    pool = new pg.Pool({
      connectionString: process.env.OWNER_DATABASE_URL,
      max: 3,
      allowExitOnIdle: true,
    });
    pool.on("error", () => undefined);
  }
  return pool;
}

const toColumn = (name: string) => name.replace(/[A-Z]/g, (letter) => `_${letter.toLowerCase()}`);

/** Inserts one row; members are named as in the code. Gives its id, where the table has one. */
export async function insert(table: string, values: Record<string, unknown>): Promise<string> {
  const entries = Object.entries(values).filter(([, value]) => value !== undefined);
  const columns = entries.map(([name]) => toColumn(name)).join(", ");
  const places = entries.map((_, index) => `$${index + 1}`).join(", ");
  const found = await owner().query(
    `INSERT INTO ${table} (${columns}) VALUES (${places}) RETURNING *`,
    entries.map(([, value]) => value),
  );
  return String(found.rows[0].id ?? "");
}

/** Rows of a question that a test asks of the database itself. */
export async function select<Row extends object>(
  text: string,
  values: unknown[] = [],
): Promise<Row[]> {
  return (await owner().query(text, values)).rows as Row[];
}

let counted = 0;
/** A number no other row of this run has. */
export const next = (): number => {
  counted += 1;
  return counted;
};
