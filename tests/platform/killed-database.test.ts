import { execFile } from "node:child_process";
import { randomUUID } from "node:crypto";
import { mkdirSync, mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { promisify } from "node:util";
import pg from "pg";
import { afterAll, beforeAll, describe, expect, test } from "vitest";
import { type Cluster, openCluster } from "../../scripts/lib/cluster.mjs";
import { applicationEnvironment } from "../../scripts/lib/environment.mjs";
import { findFreePort, randomPort } from "../../scripts/lib/ports.mjs";
import {
  buildCrew,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  signInAs,
} from "../factories";
import { buildApp } from "../setup/app";
import { projectFolder, type RunningProcess, startProcess, waitFor } from "../setup/processes";
import { noPorts } from "../setup/services";

const DATABASE = "dinward";
const ROWS = 8;
const folder = mkdtempSync(join(tmpdir(), "dinward-killed-"));
let cluster: Cluster;
let web: RunningProcess;
let url: string;

// Durable, as in production: what a killed server had confirmed has to be there afterwards.
const openOwnCluster = () =>
  openCluster({ folder: join(folder, "cluster"), durable: true, firstPort: randomPort() });

beforeAll(async () => {
  await buildApp();
  cluster = await openOwnCluster();
  await cluster.createDatabase(DATABASE);
  const dataDir = join(folder, "app");
  mkdirSync(dataDir);
  const port = await findFreePort(randomPort());
  url = `http://127.0.0.1:${port}`;
  const env = applicationEnvironment({
    mode: "development",
    cluster,
    database: DATABASE,
    ports: { ...noPorts, web: port },
    publicUrl: url,
    secrets: { client: "unused", session: "unused-".repeat(8), hook: "unused-".repeat(8) },
    dataDir,
  });
  // The factories work on this database too.
  Object.assign(process.env, env);
  await promisify(execFile)(process.execPath, ["dist/server/migrate.js"], {
    cwd: projectFolder,
    env,
  });
  web = startProcess("web", ["dist/server/web.js"], { ...env, LOG_LEVEL: "silent" });
  await waitFor(`${url}/readyz`, web);
});

afterAll(async () => {
  await web?.stop();
  await cluster?.destroy();
  rmSync(folder, { recursive: true, force: true });
});

/** The rows of a crew's day as an officer's browser sends them, and how to send them under one key. */
async function layOutSave() {
  const site = await buildSite();
  const task = await buildTask({ site });
  const workers = await Promise.all(Array.from({ length: ROWS }, () => buildWorker({ site })));
  const crew = await buildCrew({ site, members: workers });
  const officer = await buildUser({ organizationId: site.organizationId, roles: ["officer"] });
  const { headers } = await signInAs(officer);
  const key = randomUUID();
  const body = JSON.stringify({
    date: daysFromToday(-1),
    rows: workers.map(({ id }) => ({
      kind: "worked",
      workerId: id,
      localStart: "06:00",
      lengthMin: 480,
      tasks: [{ taskId: task.id, durationMin: 420 }],
    })),
  });
  const save = () =>
    fetch(`${url}/api/crews/${crew.id}/day`, {
      method: "POST",
      headers: { ...headers, "content-type": "application/json", "idempotency-key": key },
      body,
    });
  return { organizationId: site.organizationId, save };
}

/** Lets nobody write into a table, and says when somebody waits to. */
async function holdTable(table: string) {
  const holder = new pg.Client({ connectionString: cluster.url("super", DATABASE) });
  holder.on("error", () => undefined);
  await holder.connect();
  await holder.query("BEGIN");
  await holder.query(`LOCK TABLE ${table} IN SHARE MODE`);
  return async function whenSomebodyWaits() {
    for (let tries = 0; tries < 300; tries += 1) {
      const waiting = await cluster.sql(
        `SELECT 1 FROM pg_locks l WHERE NOT l.granted AND l.relation = '${table}'::regclass`,
        { database: DATABASE },
      );
      if (waiting.length > 0) return;
      await sleep(50);
    }
    throw new Error(`nobody came to write into ${table}`);
  };
}

function isAlive(pid: number): boolean {
  try {
    return process.kill(pid, 0);
  } catch {
    return false;
  }
}

/** Ends the server and all its processes as a power cut would. */
async function killServer(): Promise<void> {
  const pidFile = join(cluster.home, "pg", "postmaster.pid");
  const postmaster = Number(readFileSync(pidFile, "utf8").split("\n")[0]);
  const pids = [postmaster, ...(await cluster.sql("SELECT pid FROM pg_stat_activity")).map(Number)];
  for (const pid of pids) if (isAlive(pid)) process.kill(pid, "SIGKILL");
  for (let tries = 0; pids.some(isAlive) && tries < 200; tries += 1) await sleep(50);
}

/** Rows that a save leaves behind, by table. */
async function countRows(organizationId: string): Promise<Record<string, number>> {
  const tables = [
    "shifts",
    "shift_revisions",
    "shift_tasks",
    "days",
    "day_results",
    "finding_evidence",
    "notices",
    "audit_events",
    "idempotency_keys",
  ];
  const lines = await cluster.sql(
    tables
      .map(
        (table) =>
          `SELECT '${table}', count(*) FROM ${table} WHERE organization_id = '${organizationId}';`,
      )
      .join("\n"),
    { database: DATABASE },
  );
  return Object.fromEntries(
    lines.map((line) => [line.split("|")[0] ?? "", Number(line.split("|")[1])]),
  );
}

/** As a browser does it: the same change under the same key until the server is there again. */
async function saveAgain(save: () => Promise<Response>): Promise<Response> {
  for (let tries = 0; tries < 100; tries += 1) {
    const answer = await save();
    if (answer.status !== 503) return answer;
    await sleep(100);
  }
  throw new Error("the application did not find its database again");
}

describe("the database server is killed", () => {
  test.each(["shift_tasks", "day_results"])(
    "while a day's save waits for %s: nothing is half-written, and the same key stores it once",
    async (table) => {
      const { organizationId, save } = await layOutSave();
      const before = await countRows(organizationId);
      const whenSomebodyWaits = await holdTable(table);
      const cut = save();
      await whenSomebodyWaits();
      await killServer();

      const refused = await cut;
      expect(refused.status).toBe(503);
      expect(refused.headers.get("content-type")).toContain("application/problem+json");
      expect(await refused.json()).toMatchObject({ status: 503, code: "database-down" });
      const whileDown = await save();
      expect(whileDown.status).toBe(503);
      expect(await whileDown.json()).toMatchObject({ code: "database-down" });
      expect(web.hasEnded()).toBe(false);

      cluster = await openOwnCluster();
      expect(await countRows(organizationId)).toEqual(before);

      const stored = await saveAgain(save);
      expect(stored.status).toBe(201);
      const reply = await stored.json();
      expect(reply.saved).toHaveLength(ROWS);
      const after = await countRows(organizationId);
      expect(after).toMatchObject({
        shifts: ROWS,
        shift_revisions: ROWS,
        shift_tasks: ROWS,
        days: ROWS,
        day_results: ROWS,
        idempotency_keys: 1,
      });
      const again = await save();
      expect(again.status).toBe(201);
      expect(await again.json()).toEqual(reply);
      expect(await countRows(organizationId)).toEqual(after);
    },
  );

  test("after a save whose answer got lost: the save is there, and the same key only answers again", async () => {
    const { organizationId, save } = await layOutSave();
    const stored = await saveAgain(save);
    expect(stored.status).toBe(201);
    const reply = await stored.json();
    const before = await countRows(organizationId);
    await killServer();
    cluster = await openOwnCluster();
    expect(await countRows(organizationId)).toEqual(before);
    const again = await saveAgain(save);
    expect(again.status).toBe(201);
    expect(await again.json()).toEqual(reply);
    expect(await countRows(organizationId)).toEqual(before);
  });
});
