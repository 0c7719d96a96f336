import { createHash } from "node:crypto";
import { createReadStream, createWriteStream, existsSync } from "node:fs";
import { type FileHandle, mkdir, mkdtemp, open, rename, rm, writeFile } from "node:fs/promises";
import path from "node:path";
import { pipeline } from "node:stream/promises";
import pg from "pg";
import { Sequelize } from "sequelize";
import { migrations } from "../migrations";
import { configOrExit } from "./config";
import {
  type ArchiveEntry,
  DamagedArchiveError,
  type FoundEntry,
  type Manifest,
  readEntry,
  verifyArchive,
} from "./lib/archive";
import { migrateUp } from "./lib/migrator";
import { listDump, runPostgresTool } from "./lib/postgres-tools";

const config = configOrExit("owner");
const file = process.argv[2];

function refuseNewer(manifest: Manifest): void {
  const known = new Set(migrations.map(({ name }) => name));
  if (manifest.migrations.some((name) => !known.has(name))) {
    throw new Error("it was made by a newer version of Dinward: update first");
  }
}

async function onDatabase<T>(work: (client: pg.Client) => Promise<T>): Promise<T> {
  const client = new pg.Client(config.OWNER_DATABASE_URL);
  await client.connect();
  try {
    return await work(client);
  } finally {
    await client.end();
  }
}

async function refuseUsedDatabase(): Promise<void> {
  const { rows } = await onDatabase((client) =>
    client.query<{ name: string }>(
      `SELECT format('%I.%I', n.nspname, c.relname) AS name FROM pg_class c JOIN pg_namespace n ON n.oid = c.relnamespace
       WHERE c.relkind IN ('r', 'p') AND n.nspname NOT IN ('pg_catalog', 'information_schema') AND n.nspname !~ '^pg_' LIMIT 1`,
    ),
  );
  if (rows[0])
    throw new Error(`the database is not empty (${rows[0].name}): restore into a new one`);
}

async function hashFile(name: string): Promise<string> {
  const hash = createHash("sha256");
  for await (const chunk of createReadStream(name)) hash.update(chunk);
  return hash.digest("hex");
}

/** Where an entry of files/ belongs. */
const targetOf = (entry: { path: string }) =>
  path.join(config.DATA_DIR, ...entry.path.split("/").slice(1));

const isDataFile = (entry: { path: string }) => entry.path.startsWith("files/");

async function refuseOtherFiles(entries: readonly ArchiveEntry[]): Promise<void> {
  for (const entry of entries.filter(isDataFile)) {
    const target = targetOf(entry);
    if (existsSync(target) && (await hashFile(target)) !== entry.sha256) {
      throw new Error(`${target} is there already with another content`);
    }
  }
}

async function extract(handle: FileHandle, entry: FoundEntry, target: string): Promise<void> {
  await mkdir(path.dirname(target), { recursive: true });
  await pipeline(readEntry(handle, entry), createWriteStream(target, { mode: 0o600 }));
}

async function restoreDatabase(dump: string, folder: string, manifest: Manifest): Promise<void> {
  // Left out of the dump: extensions, whose comments only a superuser may set, and the queue's policies,
  // which name the old application role; migrateUp makes them for the one configured here.
  const isLeftOut = (line: string) =>
    / EXTENSION /.test(line) || / POLICY graphile_worker /.test(line);
  const contents = (await listDump(dump)).split("\n").filter((line) => !isLeftOut(line));
  const list = path.join(folder, "contents");
  await writeFile(list, contents.join("\n"));
  await onDatabase(async (client) => {
    for (const extension of manifest.extensions) {
      await client.query(`CREATE EXTENSION IF NOT EXISTS ${pg.escapeIdentifier(extension)}`);
    }
  });
  await runPostgresTool("pg_restore", config.OWNER_DATABASE_URL, [
    "--single-transaction",
    "--exit-on-error",
    "--no-owner",
    "--no-privileges",
    `--use-list=${list}`,
    dump,
  ]);
  const db = new Sequelize(config.OWNER_DATABASE_URL, { logging: false, pool: { max: 3 } });
  try {
    const role = decodeURIComponent(new URL(config.DATABASE_URL).username);
    await migrateUp(db, config.OWNER_DATABASE_URL, role);
  } finally {
    await db.close();
  }
}

/** Everything is checked and laid out before the first change; the database comes back whole or not at all. */
async function restore(source: string): Promise<string> {
  const handle = await open(source);
  await mkdir(config.DATA_DIR, { recursive: true });
  const folder = await mkdtemp(path.join(config.DATA_DIR, ".restore-"));
  try {
    const { manifest, entries } = await verifyArchive(handle);
    refuseNewer(manifest);
    await refuseUsedDatabase();
    await refuseOtherFiles(manifest.entries);
    for (const entry of entries) await extract(handle, entry, path.join(folder, entry.path));
    await restoreDatabase(path.join(folder, "database.dump"), folder, manifest);
    for (const entry of entries.filter(isDataFile)) {
      const target = targetOf(entry);
      await mkdir(path.dirname(target), { recursive: true });
      await rename(path.join(folder, entry.path), target);
    }
    return `Restored the backup of ${manifest.madeAt}: the database and ${entries.length - 1} files.`;
  } finally {
    await handle.close();
    await rm(folder, { recursive: true, force: true });
  }
}

try {
  if (!file) throw new Error("say which backup: npm run restore FILE");
  console.log(await restore(file));
} catch (error) {
  const reason = error instanceof Error ? error.message : String(error);
  const what = error instanceof DamagedArchiveError ? `${file} is damaged: ${reason}` : reason;
  console.error(`Nothing was restored: ${what}`);
  process.exitCode = 1;
}
