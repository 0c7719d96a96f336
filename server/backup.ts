import { mkdtemp, readdir, rm } from "node:fs/promises";
import path from "node:path";
import pg from "pg";
import { configOrExit } from "./config";
import { writeArchive } from "./lib/archive";
import { runPostgresTool } from "./lib/postgres-tools";

const config = configOrExit("owner");
const file = process.argv[2];

async function readFacts() {
  const client = new pg.Client(config.OWNER_DATABASE_URL);
  await client.connect();
  try {
    const migrations = await client.query<{ name: string }>(
      "SELECT name FROM schema_migrations ORDER BY name",
    );
    const extensions = await client.query<{ extname: string }>(
      "SELECT extname FROM pg_extension WHERE extname <> 'plpgsql' ORDER BY extname",
    );
    return {
      migrations: migrations.rows.map(({ name }) => name),
      extensions: extensions.rows.map(({ extname }) => extname),
    };
  } finally {
    await client.end();
  }
}

async function listDataFiles(): Promise<string[]> {
  const found = await readdir(config.DATA_DIR, { recursive: true, withFileTypes: true });
  return (
    found
      .filter((entry) => entry.isFile())
      .map((entry) => path.relative(config.DATA_DIR, path.join(entry.parentPath, entry.name)))
      // A file on its way in belongs to nobody yet.
      .filter((relative) => !relative.startsWith(".restore-") && !relative.startsWith("staging"))
      .sort()
  );
}

/**
 * The database first, then the files: a file is stored before the row that names it, so every file
 * that the dump names is there, and a file more does no harm.
 */
async function backUp(target: string): Promise<string> {
  if (path.resolve(target).startsWith(path.resolve(config.DATA_DIR) + path.sep)) {
    throw new Error("it can't lie in DATA_DIR, which it contains");
  }
  const folder = await mkdtemp(`${path.resolve(target)}.`);
  try {
    const dump = path.join(folder, "database.dump");
    const facts = { madeAt: new Date().toISOString(), ...(await readFacts()) };
    await runPostgresTool("pg_dump", config.OWNER_DATABASE_URL, [
      "--format=custom",
      "--no-owner",
      "--no-privileges",
      `--file=${dump}`,
    ]);
    const files = (await listDataFiles()).map((relative) => ({
      path: `files/${relative.split(path.sep).join("/")}`,
      file: path.join(config.DATA_DIR, relative),
    }));
    const { entries } = await writeArchive(
      path.resolve(target),
      [{ path: "database.dump", file: dump }, ...files],
      facts,
    );
    return `The backup is in ${target}: the database and ${entries.length - 1} files.`;
  } finally {
    await rm(folder, { recursive: true, force: true });
  }
}

try {
  if (!file) throw new Error("say where it goes: npm run backup FILE");
  console.log(await backUp(file));
} catch (error) {
  console.error(`No backup was made: ${error instanceof Error ? error.message : error}`);
  process.exitCode = 1;
}
