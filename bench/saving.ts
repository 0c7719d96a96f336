import { randomUUID } from "node:crypto";
import type pg from "pg";
import { recomputeStaleDays } from "../server/jobs/recompute-stale-days";
import { connect, sequelize } from "../server/lib/db";
import { RESULT_COLUMNS } from "../shared/day/result-facts";
import { line, measureBeside, title } from "./lib/measure";
import { fetchJson, openDatabase, organizations, signIn } from "./lib/scale";

const ROWS = 40;
const resultColumns = Object.keys(RESULT_COLUMNS).join(", ");

interface Crew {
  crewId: string;
  siteId: string;
  members: { workerId: string; tasks: { taskId: string; durationMin: number }[] }[];
}

/** A crew of forty from one site's workers. */
async function layOutCrew(db: pg.Client, organizationId: string): Promise<Crew> {
  const { rows } = await db.query<{
    siteId: string;
    workerId: string;
    tasks: Crew["members"][number]["tasks"];
  }>(
    `SELECT w.site_id AS "siteId", w.id AS "workerId", (SELECT json_agg(json_build_object('taskId', j.task_id, 'durationMin', j.duration_min, 'wornPct', 95) ORDER BY j.position)
       FROM job_tasks j WHERE j.job_id = w.job_id) AS tasks
     FROM workers w WHERE w.organization_id = $1 AND w.site_id = (SELECT id FROM sites WHERE organization_id = $1 ORDER BY name LIMIT 1) ORDER BY w.employee_number LIMIT ${ROWS}`,
    [organizationId],
  );
  const siteId = rows[0]!.siteId;
  const crewId = randomUUID();
  await db.query(
    "INSERT INTO crews (id, organization_id, site_id, name, usual_start, usual_length_min) VALUES ($1, $2, $3, 'Forty', '06:00', 480)",
    [crewId, organizationId, siteId],
  );
  for (const { workerId } of rows) {
    await db.query(
      "INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid) VALUES ($1, $2, $3, '[2000-01-01,)')",
      [organizationId, crewId, workerId],
    );
  }
  return { crewId, siteId, members: rows };
}

/** Dates before those of the scale data, under rule sets that were in force by then; one for each saving. */
const dateOf = (index: number) => new Date(Date.UTC(2015, 0, 1 + index)).toISOString().slice(0, 10);

/** The rows that any way of saving the day has to write, set by set. */
async function writeBare(
  app: pg.Client,
  organizationId: string,
  { siteId, crewId, members }: Crew,
  date: string,
  resultId: string,
): Promise<void> {
  await app.query("BEGIN");
  await app.query("SELECT set_config('app.organization', $1, true)", [organizationId]);
  const records = members.map(({ workerId, tasks }) => ({
    workerId,
    tasks,
    shiftId: randomUUID(),
    revisionId: randomUUID(),
    resultId: randomUUID(),
  }));
  const json = JSON.stringify(records);
  const columns = `AS x("workerId" uuid, "shiftId" uuid, "revisionId" uuid, "resultId" uuid, tasks jsonb)`;
  await app.query(
    `INSERT INTO shift_revisions (id, organization_id, shift_id, number, local_start, length_min)
    SELECT "revisionId", $1, "shiftId", 1, '06:00', 480 FROM jsonb_to_recordset($2::jsonb) ${columns}`,
    [organizationId, json],
  );
  await app.query(
    `INSERT INTO shifts (id, organization_id, site_id, worker_id, crew_id, date, local_start, time_zone, length_min, starts_at, ends_at, current_revision_id)
    SELECT "shiftId", $1, $3, "workerId", $4, $5::date, '06:00', 'UTC', 480, $5::date + time '06:00', $5::date + time '14:00', "revisionId" FROM jsonb_to_recordset($2::jsonb) ${columns}`,
    [organizationId, json, siteId, crewId, date],
  );
  await app.query(
    `INSERT INTO shift_tasks (organization_id, shift_id, shift_revision_id, position, task_id, duration_min, worn_pct)
    SELECT $1, "shiftId", "revisionId", t.place, (t.task->>'taskId')::uuid, (t.task->>'durationMin')::float8, 95
    FROM jsonb_to_recordset($2::jsonb) ${columns}, jsonb_array_elements(tasks) WITH ORDINALITY AS t(task, place)`,
    [organizationId, json],
  );
  await app.query(
    `INSERT INTO day_results (id, organization_id, site_id, worker_id, date, origin, inputs_hash, refs, ${resultColumns})
    SELECT "resultId", $1, $3, "workerId", $4::date, 'computed', sha256("resultId"::text::bytea), r.refs, ${resultColumns} FROM jsonb_to_recordset($2::jsonb) ${columns}, day_results r WHERE r.id = $5`,
    [organizationId, json, siteId, date, resultId],
  );
  await app.query(
    `INSERT INTO days (organization_id, worker_id, date, site_id, crew_id, current_result_id, is_stale)
    SELECT $1, "workerId", $4::date, $3, $5, "resultId", FALSE FROM jsonb_to_recordset($2::jsonb) ${columns}`,
    [organizationId, json, siteId, date, crewId],
  );
  await app.query("COMMIT");
}

async function benchSaving(db: pg.Client, app: pg.Client, organizationId: string): Promise<void> {
  const crew = await layOutCrew(db, organizationId);
  const { rows } = await db.query<{ id: string }>(
    "SELECT current_result_id AS id FROM days WHERE organization_id = $1 LIMIT 1",
    [organizationId],
  );
  const headers = await signIn(db, organizationId, "officer");
  let next = 0;
  const [ours, bound] = await measureBeside(
    12,
    async () => {
      const body = {
        date: dateOf(next++),
        rows: crew.members.map(({ workerId, tasks }) => ({
          kind: "worked",
          workerId,
          localStart: "06:00",
          lengthMin: 480,
          unaccounted: { how: "like-the-rest" },
          tasks,
        })),
      };
      const answer = (await fetchJson(`/crews/${crew.crewId}/day`, headers, body)) as {
        saved: unknown[];
        refused: unknown[];
      };
      if (answer.saved.length !== crew.members.length)
        throw new Error(JSON.stringify(answer.refused));
    },
    () => writeBare(app, organizationId, crew, dateOf(next++), rows[0]!.id),
  );
  title(`Saving a day of ${crew.members.length} rows: stored, computed, findings, notices, trail`);
  line("POST /crews/:id/day", ours, bound, "inserting shifts, tasks, results and days alone");
}

/** Another level of a task: every result that rests on it is another one and has to be written. */
async function changeLevel(db: pg.Client, taskId: string): Promise<void> {
  await db.query(
    `INSERT INTO task_levels (organization_id, task_id, number, effective_from, metric, level_db, lc_minus_la_db, grade, reason)
     SELECT organization_id, task_id, 2, '2000-01-01', metric, level_db + 0.1, lc_minus_la_db, grade, 'bench' FROM task_levels WHERE task_id = $1 AND number = 1`,
    [taskId],
  );
}

/** Other data of every protector, from long ago on. */
async function changeProtectors(db: pg.Client, organizationId: string): Promise<void> {
  await db.query(
    `INSERT INTO protector_model_revisions (organization_id, model_id, number, effective_from, data, reason)
     SELECT organization_id, model_id, number + 1, '2000-01-01',
       data || jsonb_build_object('snrDb', (data->>'snrDb')::float8 - 0.5, 'usRatingDb', (data->>'usRatingDb')::float8 - 0.5, 'mDb', (data->>'mDb')::float8 - 0.5), 'bench'
     FROM (SELECT DISTINCT ON (model_id) * FROM protector_model_revisions WHERE organization_id = $1 ORDER BY model_id, number DESC) last`,
    [organizationId],
  );
}

async function benchRecompute(
  db: pg.Client,
  organizationId: string,
  name: string,
  change: (taskId: string) => Promise<void>,
): Promise<void> {
  const { rows } = await db.query<{ crewId: string; taskId: string }>(
    `SELECT d.crew_id AS "crewId", (SELECT j.task_id FROM job_tasks j JOIN workers w ON w.job_id = j.job_id WHERE w.id = d.worker_id LIMIT 1) AS "taskId"
     FROM days d WHERE d.organization_id = $1 AND d.date > current_date - 300 LIMIT 1`,
    [organizationId],
  );
  const { crewId, taskId } = rows[0]!;
  await change(taskId);
  const marked = await db.query(
    "UPDATE days SET is_stale = TRUE WHERE crew_id = $1 AND date > current_date - 365",
    [crewId],
  );
  connect(process.env.DATABASE_URL!, { max: 2 });
  const began = performance.now();
  const done = await recomputeStaleDays(organizationId);
  const seconds = (performance.now() - began) / 1000;
  await sequelize().close();
  const copied = performance.now();
  await db.query("BEGIN");
  await db.query(
    `INSERT INTO day_results (organization_id, site_id, worker_id, date, origin, inputs_hash, refs, ${resultColumns})
     SELECT r.organization_id, r.site_id, r.worker_id, r.date, r.origin, sha256(r.inputs_hash), r.refs, ${Object.keys(
       RESULT_COLUMNS,
     )
       .map((name) => `r.${name}`)
       .join(", ")}
     FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.crew_id = $1 AND d.date > current_date - 365`,
    [crewId],
  );
  await db.query(
    "UPDATE days SET is_stale = FALSE WHERE crew_id = $1 AND date > current_date - 365",
    [crewId],
  );
  const boundSeconds = (performance.now() - copied) / 1000;
  await db.query("ROLLBACK");
  title(name);
  console.log(
    `  ${done} of ${marked.rowCount} days in ${seconds.toFixed(1)} s, ${Math.round(done / seconds)} days/s; writing as many results alone: ${boundSeconds.toFixed(1)} s; × ${(seconds / boundSeconds).toFixed(1)}`,
  );
}

const db = await openDatabase();
const app = await openDatabase(process.env.DATABASE_URL);
const recent = (await organizations(db)).at(-1)!;
await benchSaving(db, app, recent.id);
await benchRecompute(
  db,
  recent.id,
  "Computing a crew's year again, after another level",
  (taskId) => changeLevel(db, taskId),
);
await benchRecompute(
  db,
  recent.id,
  "Computing a crew's year again, after other data of its protectors",
  () => changeProtectors(db, recent.id),
);
await app.end();
await db.end();
