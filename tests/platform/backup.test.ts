import { execFile } from "node:child_process";
import { createHash } from "node:crypto";
import {
  mkdirSync,
  mkdtempSync,
  readdirSync,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { delimiter, join, relative } from "node:path";
import { promisify } from "node:util";
import { afterAll, beforeAll, expect, test } from "vitest";
import { type Cluster, openCluster } from "../../scripts/lib/cluster.mjs";
import { applicationEnvironment } from "../../scripts/lib/environment.mjs";
import { randomPort } from "../../scripts/lib/ports.mjs";
import { buildApp } from "../setup/app";
import { projectFolder } from "../setup/processes";
import { noPorts } from "../setup/services";

const folder = mkdtempSync(join(tmpdir(), "dinward-backup-"));
const archive = join(folder, "backup.tar");
const upload = Buffer.from("a page of a laboratory's report");
const uploadName = createHash("sha256").update(upload).digest("hex");
let from: Installation;
let to: Installation;

interface Installation {
  cluster: Cluster;
  dataDir: string;
  env: NodeJS.ProcessEnv;
}

async function install(name: string): Promise<Installation> {
  const cluster = await openCluster({
    folder: join(folder, name, "cluster"),
    durable: false,
    firstPort: randomPort(),
  });
  await cluster.createDatabase("dinward");
  const dataDir = join(folder, name, "app");
  mkdirSync(dataDir);
  const env = applicationEnvironment({
    mode: "development",
    cluster,
    database: "dinward",
    ports: noPorts,
    publicUrl: "http://127.0.0.1:1",
    secrets: { client: "unused", session: "unused-".repeat(8), hook: "unused-".repeat(8) },
    dataDir,
  });
  return {
    cluster,
    dataDir,
    env: { ...env, PATH: `${cluster.programsFolder}${delimiter}${env.PATH}` },
  };
}

async function runEntry({ env }: Installation, name: string, ...args: string[]) {
  const run = promisify(execFile)(process.execPath, [`dist/server/${name}.js`, ...args], {
    cwd: projectFolder,
    env,
  });
  return run.then(
    ({ stdout }) => ({ code: 0, text: stdout }),
    (error: { code: number; stderr: string }) => ({ code: error.code, text: error.stderr }),
  );
}

/** Every table with its rows in a fixed order, as one digest each: equal means nothing was lost. */
async function digestTables({ cluster }: Installation): Promise<string[]> {
  const tables = await cluster.sql(
    `SELECT format('%I.%I', schemaname, tablename) FROM pg_tables
     WHERE schemaname IN ('public', 'graphile_worker') ORDER BY 1`,
    { database: "dinward" },
  );
  const digests = tables.map(
    (table) =>
      `SELECT '${table}', count(*), md5(coalesce(string_agg(t::text, chr(10) ORDER BY t::text), '')) FROM ${table} t;`,
  );
  return cluster.sql(digests.join("\n"), { database: "dinward" });
}

/** Files by their path; a folder that is empty is none. */
const listFiles = (dataDir: string) =>
  readdirSync(dataDir, { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile())
    .map((entry) => relative(dataDir, join(entry.parentPath, entry.name)))
    .sort();

beforeAll(async () => {
  await buildApp();
  [from, to] = await Promise.all([install("from"), install("to")]);
  expect(await runEntry(from, "migrate")).toMatchObject({ code: 0 });
  // A short past has a row of each kind too.
  expect(await runEntry(from, "seed-demo", "--months=2")).toMatchObject({ code: 0 });
  mkdirSync(join(from.dataDir, "files", uploadName.slice(0, 2)), { recursive: true });
  writeFileSync(join(from.dataDir, "files", uploadName.slice(0, 2), uploadName), upload);
});

afterAll(async () => {
  await Promise.all([from?.cluster.destroy(), to?.cluster.destroy()]);
  rmSync(folder, { recursive: true, force: true });
});

test("a backup is one file that only its owner reads", async () => {
  expect(await runEntry(from, "backup", archive)).toMatchObject({ code: 0 });
  expect(statSync(archive).mode & 0o777).toBe(0o600);
  expect(readdirSync(folder).filter((name) => name.startsWith("backup.tar."))).toEqual([]);
});

test("a damaged backup is refused before anything is touched", async () => {
  const damaged = join(folder, "damaged.tar");
  const bytes = readFileSync(archive);
  bytes[5000] = (bytes[5000] ?? 0) ^ 1;
  writeFileSync(damaged, bytes);
  const { code, text } = await runEntry(to, "restore", damaged);
  expect(code).toBe(1);
  expect(text).toContain("Nothing was restored");
  expect(text).toContain("database.dump is not what was backed up");
  expect(await digestTables(to)).toEqual([]);
  expect(listFiles(to.dataDir)).toEqual([]);
});

test("a restore into a second cluster finds everything", async () => {
  expect(await runEntry(to, "restore", archive)).toMatchObject({ code: 0 });
  const digests = await digestTables(to);
  expect(digests.length).toBeGreaterThan(20);
  expect(digests).toEqual(await digestTables(from));
  expect(listFiles(to.dataDir)).toEqual(listFiles(from.dataDir));
  const restored = readFileSync(join(to.dataDir, "files", uploadName.slice(0, 2), uploadName));
  expect(restored).toEqual(upload);
});

test("the application's role may do there what it could before, and no more", async () => {
  const rights = `SELECT table_schema, table_name, privilege_type FROM information_schema.role_table_grants
    WHERE grantee = 'dinward_app' ORDER BY 1, 2, 3`;
  const policies =
    "SELECT schemaname, tablename, policyname, roles, qual, with_check FROM pg_policies ORDER BY 1, 2, 3";
  for (const question of [rights, policies]) {
    const answer = await to.cluster.sql(question, { database: "dinward" });
    expect(answer.length).toBeGreaterThan(0);
    expect(answer).toEqual(await from.cluster.sql(question, { database: "dinward" }));
  }
  await expect(
    to.cluster.sql("DELETE FROM audit_events", { database: "dinward", role: "app" }),
  ).rejects.toThrow("permission denied");
});

test("a database in use is not restored over", async () => {
  const { code, text } = await runEntry(to, "restore", archive);
  expect(code).toBe(1);
  expect(text).toContain("the database is not empty");
});
