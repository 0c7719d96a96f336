import { fork } from "node:child_process";
import { createHash, randomBytes, randomUUID } from "node:crypto";
import { once } from "node:events";
import { join } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import type pg from "pg";
import { sealTrail } from "../server/lib/audit";
import { connect, inTransaction, sequelize } from "../server/lib/db";
import { checkRows, checkSeals } from "../server/queries/trail-check";
import { spreadOf, title } from "./lib/measure";
import { openDatabase, organizations } from "./lib/scale";

/** Shifts of one saving, and how long each side writes. */
const ROWS = 10;
const SECONDS = 4;
/** How long it is written while the sealer is watched. */
const LAG_SECONDS = 10;
const tables = ["shift_revisions", "shifts", "shift_tasks"];

interface Place {
  organizationId: string;
  siteId: string;
  workerIds: string[];
  taskId: string;
}

let saved = 0;

/** A saving of ten shifts as the application's role writes it; with its events or without. Answers the events' ids. */
async function save(app: pg.Client, place: Place, hasEvents: boolean): Promise<string[]> {
  const { organizationId, siteId, taskId } = place;
  const date = new Date(Date.UTC(1950, 0, 1 + saved++)).toISOString().slice(0, 10);
  const json = JSON.stringify(
    place.workerIds.map((workerId) => ({
      workerId,
      shiftId: randomUUID(),
      revisionId: randomUUID(),
      salt: randomBytes(16).toString("hex"),
    })),
  );
  const from = `FROM jsonb_to_recordset($2::jsonb) AS x("workerId" uuid, "shiftId" uuid, "revisionId" uuid, salt text)`;
  await app.query("BEGIN");
  await app.query("SELECT set_config('app.organization', $1, true)", [organizationId]);
  await app.query(
    `INSERT INTO shift_revisions (id, organization_id, shift_id, number, local_start, length_min) SELECT "revisionId", $1, "shiftId", 1, '06:00', 480 ${from}`,
    [organizationId, json],
  );
  await app.query(
    `INSERT INTO shifts (id, organization_id, site_id, worker_id, date, local_start, time_zone, length_min, starts_at, ends_at, current_revision_id)
     SELECT "shiftId", $1, $3, "workerId", $4::date, '06:00', 'UTC', 480, $4::date + time '06:00', $4::date + time '14:00', "revisionId" ${from}`,
    [organizationId, json, siteId, date],
  );
  await app.query(
    `INSERT INTO shift_tasks (organization_id, shift_id, shift_revision_id, position, task_id, duration_min, worn_pct)
     SELECT $1, "shiftId", "revisionId", p, $3, 120, 95 ${from}, generate_series(1, 4) p`,
    [organizationId, json, taskId],
  );
  let events: string[] = [];
  if (hasEvents) {
    const records = JSON.parse(json).map(({ shiftId, salt }: { shiftId: string; salt: string }) => {
      const recorded = { date, localStart: "06:00", lengthMin: 480, tasks: 4 };
      const digest = createHash("sha256")
        .update(Buffer.from(salt, "hex"))
        .update(JSON.stringify(recorded));
      return { shiftId, salt, recorded, digest: digest.digest("hex") };
    });
    const { rows: written } = await app.query<{ id: string }>(
      `WITH given AS (SELECT * FROM jsonb_to_recordset($2::jsonb) AS x("shiftId" uuid, salt text, recorded jsonb, digest text)),
         event AS (INSERT INTO audit_events (organization_id, action, subject_kind, subject_id, values_digest)
           SELECT $1, 'save-shift', 'shift', "shiftId", decode(digest, 'hex') FROM given RETURNING id, values_digest)
       INSERT INTO audit_values (event_id, organization_id, salt, recorded)
       SELECT e.id, $1, decode(g.salt, 'hex'), g.recorded FROM event e JOIN given g ON decode(g.digest, 'hex') = e.values_digest
       RETURNING event_id AS id`,
      [organizationId, JSON.stringify(records)],
    );
    events = written.map(({ id }) => id);
  }
  await app.query("COMMIT");
  return events;
}

/** Savings per second of so many writers at once. */
async function rate(writers: pg.Client[], place: Place, hasEvents: boolean): Promise<number> {
  const ends = performance.now() + SECONDS * 1000;
  let count = 0;
  await Promise.all(
    writers.map(async (app) => {
      while (performance.now() < ends) {
        await save(app, place, hasEvents);
        count += 1;
      }
    }),
  );
  return count / SECONDS;
}

/**
 * While eight writers write and the sealer runs beside them: how long after its commit an event has its seal. A seal says when
 * it was set, which its own transaction follows within a round trip.
 */
async function sealersLag(): Promise<void> {
  const sealer = fork(join(import.meta.dirname, "lib/sealer.ts"), [organizationId], {
    execArgv: ["--import", "tsx"],
  });
  await once(sealer, "message");
  const writers = await Promise.all(
    Array.from({ length: 8 }, () => openDatabase(process.env.DATABASE_URL)),
  );
  const records = async () =>
    (
      await db.query<{ count: number; lastEvent: string }>(
        `SELECT (SELECT count(*) FROM audit_events WHERE organization_id = $1)::int + (SELECT count(*) FROM trail_entries WHERE organization_id = $1)::int AS count,
           (SELECT max(id) FROM audit_events)::text AS "lastEvent"`,
        [organizationId],
      )
    ).rows[0]!;
  const before = await records();
  const committedAt = new Map<string, number>();
  const ends = performance.now() + LAG_SECONDS * 1000;
  await Promise.all(
    writers.map(async (app) => {
      while (performance.now() < ends) {
        const events = await save(app, place, true);
        for (const id of events) committedAt.set(id, Date.now());
      }
    }),
  );
  await Promise.all(writers.map((writer) => writer.end()));
  const written = (await records()).count - before.count;
  let seals: { id: string; at: number }[] = [];
  for (const until = Date.now() + 60_000; Date.now() < until; await sleep(500)) {
    const found = await db.query<{ id: string; at: number }>(
      `SELECT event_id AS id, (extract(epoch FROM sealed_at) * 1000)::float8 AS at FROM audit_seals
       WHERE organization_id = $1 AND event_id > $2`,
      [organizationId, before.lastEvent],
    );
    seals = found.rows.filter(({ id }) => committedAt.has(id));
    if (seals.length === committedAt.size) break;
  }
  sealer.kill("SIGTERM");
  await once(sealer, "exit");
  if (seals.length < committedAt.size) throw new Error("events stay without their seals");
  const lags = seals.map(({ id, at }) => Math.max(0, at - committedAt.get(id)!));
  const { p50, p95 } = spreadOf(lags);
  console.log(
    `  from commit to seal while 8 writers write ${Math.round(written / LAG_SECONDS).toLocaleString("en")} records a second: p50 ${p50.toFixed(0)} ms, p95 ${p95.toFixed(0)} ms, longest ${Math.max(...lags).toFixed(0)} ms  (it rests 1000 ms between two looks)`,
  );
}

const db = await openDatabase();
const { id: organizationId } = (await organizations(db)).at(-1)!;
const found = await db.query<{ siteId: string; id: string }>(
  `SELECT id, site_id AS "siteId" FROM workers WHERE organization_id = $1 AND site_id = (SELECT id FROM sites WHERE organization_id = $1 ORDER BY name LIMIT 1) LIMIT ${ROWS}`,
  [organizationId],
);
const task = await db.query<{ id: string }>(
  "SELECT id FROM tasks WHERE organization_id = $1 LIMIT 1",
  [organizationId],
);
const place: Place = {
  organizationId,
  siteId: found.rows[0]!.siteId,
  workerIds: found.rows.map(({ id }) => id),
  taskId: task.rows[0]!.id,
};
const setTriggers = async (word: "ENABLE" | "DISABLE") => {
  for (const table of tables) await db.query(`ALTER TABLE ${table} ${word} TRIGGER trail_insert`);
};

title(`Savings of ${ROWS} shifts with their events and entries on rows`);
for (const count of [1, 8, 32]) {
  const writers = await Promise.all(
    Array.from({ length: count }, () => openDatabase(process.env.DATABASE_URL)),
  );
  await rate(writers.slice(0, 1), place, true);
  const withTrail = await rate(writers, place, true);
  await setTriggers("DISABLE");
  const without = await rate(writers, place, false);
  await setTriggers("ENABLE");
  await Promise.all(writers.map((writer) => writer.end()));
  console.log(
    `  ${count} ${count === 1 ? "writer" : "writers"}: ${withTrail.toFixed(0)}/s; the same inserts without a trail ${without.toFixed(0)}/s; × ${(withTrail / without).toFixed(2)}  (goal 0.67)`,
  );
}

connect(process.env.DATABASE_URL!, { max: 2 });
const seconds = async (work: () => Promise<number>) => {
  const began = performance.now();
  const count = await work();
  return { count, perSecond: Math.round(count / ((performance.now() - began) / 1000)) };
};
const say = (name: string, { count, perSecond }: { count: number; perSecond: number }) =>
  console.log(
    `  ${name}: ${count.toLocaleString("en")} at ${perSecond.toLocaleString("en")} a second`,
  );
title("The sealer and the check");
say(
  "sealed what the above left",
  await seconds(async () => {
    let [all, last] = [0, 0];
    do {
      last = await inTransaction({ organizationId }, () => sealTrail(organizationId));
      all += last;
    } while (last === 5000);
    return all;
  }),
);
await sealersLag();
say(
  "seals checked",
  await seconds(async () => {
    let all = 0;
    for (let after: number | null = 0; after !== null; ) {
      const from: number = after;
      const part = await inTransaction({ organizationId, readOnly: true }, () =>
        checkSeals(organizationId, from),
      );
      all += part.checked;
      after = part.next;
    }
    return all;
  }),
);
say(
  "rows of results checked",
  await seconds(async () => {
    const { rows } = await inTransaction({ organizationId, readOnly: true }, () =>
      checkRows(organizationId, "day_results"),
    );
    return rows;
  }),
);
await sequelize().close();
await db.end();
