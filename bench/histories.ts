import { randomUUID } from "node:crypto";
import { createReadStream } from "node:fs";
import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { Readable } from "node:stream";
import { pipeline } from "node:stream/promises";
import type pg from "pg";
import { from as copyFrom } from "pg-copy-streams";
import { loadActor } from "../server/auth/actor";
import { orderHistoryReading, orderHistoryStoring } from "../server/commands/order-history-reading";
import { startHistoryImport } from "../server/commands/start-history-import";
import { readHead } from "../server/histories/read-head";
import { readHistoryImport } from "../server/jobs/read-history";
import { connect, inTransaction, sequelize } from "../server/lib/db";
import { fileStore, openFileStore } from "../server/lib/file-store";
import { defineModels } from "../server/models";
import { HistoryImport } from "../server/models/survey";
import { title } from "./lib/measure";
import { baseUrl, openDatabase, organizations, signIn } from "./lib/scale";

const FILES = 200;
const VALUES = 28_800;
/** As the work process: two jobs at a time, on two cores. */
const AT_ONCE = 2;

/** A shift of one value a second, LAeq and LAS, the same in every run; each file on a day of its own. */
function shiftText(index: number): string {
  const start = Date.UTC(2015, 0, 1 + index, 6);
  const lines: string[] = [];
  for (let second = 0; second < VALUES; second++) {
    const at = new Date(start + second * 1000).toISOString();
    const swing = 8 * Math.sin(second / 7 + index) + 4 * Math.sin(second / 1.3);
    const level = (second % 1800 < 1300 ? 91 : 72) + swing;
    lines.push(
      `${at.slice(0, 10)} ${at.slice(11, 19)},${level.toFixed(1)},${(level + 0.3).toFixed(1)}`,
    );
  }
  return `${lines.join("\n")}\n`;
}

async function inTurn<T>(items: readonly T[], work: (item: T) => Promise<void>): Promise<void> {
  const left = [...items];
  const worker = async () => {
    for (let item = left.shift(); item !== undefined; item = left.shift()) await work(item);
  };
  await Promise.all(Array.from({ length: AT_ONCE }, worker));
}

interface Place {
  organizationId: string;
  siteId: string;
  instrumentId: string;
  workerIds: string[];
  userId: string;
}

async function layOut(db: pg.Client, organizationId: string): Promise<Place> {
  const { rows } = await db.query<{ id: string; siteId: string }>(
    `SELECT id, site_id AS "siteId" FROM workers WHERE organization_id = $1 AND site_id = (SELECT id FROM sites WHERE organization_id = $1 ORDER BY name LIMIT 1) ORDER BY employee_number LIMIT 40`,
    [organizationId],
  );
  const siteId = rows[0]!.siteId;
  const instrumentId = randomUUID();
  await db.query(
    "INSERT INTO instruments (id, organization_id, site_id, kind, class, serial_number, name) VALUES ($1, $2, $3, 'dosimeter', '2', 'bench', 'Bench')",
    [instrumentId, organizationId, siteId],
  );
  await signIn(db, organizationId, "officer");
  const users = await db.query<{ id: string }>(
    "SELECT u.id FROM users u JOIN role_grants g ON g.user_id = u.id WHERE u.organization_id = $1 AND g.role = 'officer' AND g.site_id IS NULL AND g.revoked_at IS NULL AND u.revoked_at IS NULL LIMIT 1",
    [organizationId],
  );
  return {
    organizationId,
    siteId,
    instrumentId,
    workerIds: rows.map(({ id }) => id),
    userId: users.rows[0]!.id,
  };
}

/** The files as they would have come in, waiting to be read: taking them in is the network's business. */
async function sendIn(db: pg.Client, place: Place, texts: readonly string[]): Promise<string[]> {
  const { organizationId, siteId, instrumentId, workerIds, userId } = place;
  const { rows } = await db.query<{ epoch: number }>(
    "SELECT session_epoch AS epoch FROM users WHERE id = $1",
    [userId],
  );
  const ids: string[] = [];
  for (const [index, text] of texts.entries()) {
    const staged = await fileStore().stage(Readable.from([`time,LAeq,LAS\n${text}`]), 1e9);
    const head = await readHead(staged.path, null);
    ids.push(
      await inTransaction({ organizationId }, async () =>
        startHistoryImport(await loadActor(userId, rows[0]!.epoch), staged, {
          instrument: { id: instrumentId, siteId },
          runId: null,
          workerId: workerIds[index % workerIds.length]!,
          fileName: `${index}.csv`,
          head,
        }),
      ),
    );
  }
  return ids;
}

/** Both orders of an officer and both jobs of the work process. */
async function importOne(
  { organizationId, userId }: Place,
  epoch: number,
  importId: string,
): Promise<void> {
  const scope = { organizationId };
  await inTransaction(scope, async () => {
    const found = (await HistoryImport.findByPk(importId))!;
    const order = { mapping: found.head!.proposed!, answers: [] };
    await orderHistoryReading(await loadActor(userId, epoch), found, order);
  });
  await readHistoryImport({ organizationId, importId });
  await inTransaction(scope, async () => {
    const found = (await HistoryImport.findByPk(importId))!;
    if (found.state !== "ready")
      throw new Error(`An import is ${found.state}: ${JSON.stringify(found.report?.issues)}`);
    await orderHistoryStoring(await loadActor(userId, epoch), found, {
      covers: "shift",
      keptReason: null,
    });
  });
  await readHistoryImport({ organizationId, importId });
}

async function copyAll(clients: readonly pg.Client[], files: readonly string[]): Promise<number> {
  const began = performance.now();
  await Promise.all(
    clients.map(async (client, index) => {
      for (let at = index; at < files.length; at += clients.length)
        await pipeline(
          createReadStream(files[at]!),
          client.query(copyFrom("COPY bench_levels FROM STDIN (FORMAT csv)")),
        );
    }),
  );
  return (performance.now() - began) / 1000;
}

async function benchImport(db: pg.Client, place: Place): Promise<void> {
  const texts = Array.from({ length: FILES }, (_, index) => shiftText(index));
  const folder = await mkdtemp(join(tmpdir(), "dinward-bench-levels-"));
  const files = await Promise.all(
    texts.map(async (text, index) => {
      const file = join(folder, `${index}.csv`);
      await writeFile(file, text);
      return file;
    }),
  );
  const ids = await sendIn(db, place, texts);
  const { rows } = await db.query<{ epoch: number }>(
    "SELECT session_epoch AS epoch FROM users WHERE id = $1",
    [place.userId],
  );
  const began = performance.now();
  await inTurn(ids, (id) => importOne(place, rows[0]!.epoch, id));
  const seconds = (performance.now() - began) / 1000;
  const stored = await db.query<{ count: number; bytes: number }>(
    `SELECT count(DISTINCT h.id)::int AS count, sum(length(c.packed))::float8 AS bytes FROM time_histories h JOIN time_history_chunks c ON c.history_id = h.id WHERE h.instrument_id = $1`,
    [place.instrumentId],
  );
  await db.query("CREATE TABLE bench_levels (at timestamp, laeq_db real, las_db real)");
  await db.query("GRANT INSERT ON bench_levels TO PUBLIC");
  const clients = await Promise.all(Array.from({ length: AT_ONCE }, () => openDatabase()));
  const bound = await copyAll(clients, files);
  await Promise.all(clients.map((client) => client.end()));
  const size = await db.query<{ bytes: number }>(
    "SELECT pg_total_relation_size('bench_levels')::float8 AS bytes",
  );
  await db.query("DROP TABLE bench_levels");
  await rm(folder, { recursive: true });
  const count = FILES * VALUES;
  title(
    `Importing ${FILES} time histories of eight hours, one value a second, LAeq and LAS (goal: × 1 of COPY)`,
  );
  console.log(
    `  read, checked, then read again, computed and stored: ${seconds.toFixed(1)} s, ${Math.round(count / seconds).toLocaleString("en")} rows/s`,
  );
  console.log(
    `  COPY of the same rows into a plain table, two at a time: ${bound.toFixed(1)} s, ${Math.round(count / bound).toLocaleString("en")} rows/s; × ${(seconds / bound).toFixed(2)}`,
  );
  const { bytes, count: histories } = stored.rows[0]!;
  console.log(
    `  stored: ${histories} histories, ${(bytes / histories / 2 / 1000).toFixed(1)} kB a channel; the plain table has ${(size.rows[0]!.bytes / FILES / 1000).toFixed(0)} kB a history`,
  );
}

async function benchEnvelope(db: pg.Client, place: Place): Promise<void> {
  const headers = await signIn(db, place.organizationId, "officer");
  const { rows } = await db.query<{ id: string }>(
    "SELECT id FROM time_histories WHERE instrument_id = $1 ORDER BY starts_at LIMIT 60",
    [place.instrumentId],
  );
  const taken: number[] = [];
  let bytes = 0;
  for (const [index, { id }] of rows.entries()) {
    const began = performance.now();
    const answer = await fetch(`${baseUrl}/histories/${id}/envelope`, { headers });
    const text = await answer.text();
    if (!answer.ok) throw new Error(text);
    if (index >= 10) taken.push(performance.now() - began);
    bytes = text.length;
  }
  taken.sort((a, b) => a - b);
  title("What a chart of a whole shift draws: 28,800 values of two channels as 1,200 buckets");
  console.log(
    `  GET /histories/:id/envelope: p50 ${taken[Math.floor(taken.length / 2)]!.toFixed(1)} ms, p95 ${taken[Math.floor(taken.length * 0.95)]!.toFixed(1)} ms; ${(bytes / 1000).toFixed(1)} kB, not compressed`,
  );
}

const db = await openDatabase();
defineModels(connect(process.env.DATABASE_URL!, { max: 4 }));
openFileStore(process.env.DATA_DIR!);
const place = await layOut(db, (await organizations(db)).at(-1)!.id);
await benchImport(db, place);
await benchEnvelope(db, place);
await sequelize().close();
await db.end();
