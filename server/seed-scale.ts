/**
 * npm run seed:scale -- --shifts=N [--days-a-worker=N]
 * Lays out an organization of its own with N shifts, their tasks, results and findings, by set-based SQL. The engine
 * computes each distinct day once; a day computed again by the application gives the very same result.
 */
import { randomUUID } from "node:crypto";
import { parseArgs } from "node:util";
import pg from "pg";
import { evaluateDay } from "../shared/acoustics/day";
import { METHOD_VERSION } from "../shared/acoustics/methods";
import type { DayInput, ProtectorData, TaskLevel, TimedTask } from "../shared/acoustics/types";
import { RESULT_COLUMNS, resultFacts } from "../shared/day/result-facts";
import { type Cause, findCauses } from "../shared/findings/causes";
import { ruleSetInForce } from "../shared/rule-sets";
import { configOrExit } from "./config";

/** Unless said otherwise: four years of working days. */
const DAYS_A_WORKER = 1000;
const CREW_OF = 12;
const SHIFTS_AT_ONCE = 50_000;
const SHIFT_MIN = 480;
const OLDEST = "2000-01-01";

const noise = [
  { name: "Test cell", levelDb: 101, lcMinusLaDb: 4 },
  { name: "Grinding", levelDb: 96, lcMinusLaDb: 1 },
  { name: "Plating", levelDb: 91, lcMinusLaDb: 2 },
  { name: "Assembly", levelDb: 86, lcMinusLaDb: 2 },
  { name: "Packing", levelDb: 82, lcMinusLaDb: 3 },
  { name: "Stores", levelDb: 72, lcMinusLaDb: 4 },
] as const;

/** Tasks of a job, as places in `noise`, and the minutes in each. */
const jobs: readonly (readonly [place: number, durationMin: number])[][] = [
  [
    [0, 180],
    [3, 240],
    [5, 60],
  ],
  [
    [1, 300],
    [4, 120],
    [5, 60],
  ],
  [
    [2, 360],
    [5, 120],
  ],
  [
    [3, 420],
    [5, 60],
  ],
  [
    [4, 420],
    [5, 60],
  ],
  [[5, 480]],
  [
    [1, 120],
    [2, 240],
    [5, 120],
  ],
  [
    [4, 240],
    [5, 240],
  ],
];
/** A job in which something reaches this level has protectors. */
const WEAR_FROM_DB = 85;

const sites = [
  {
    name: "North works",
    timeZone: "Europe/Berlin",
    governing: "eu-2003-10-ec",
    comparison: ["niosh-rel"],
    metric: { kind: "laeq" },
  },
  {
    name: "South works",
    timeZone: "America/Chicago",
    governing: "us-general-industry",
    comparison: ["niosh-rel"],
    metric: { kind: "steady" },
  },
] as const;

const muffData = {
  usRatingDb: 20,
  snrDb: 22,
  hDb: 25,
  mDb: 19,
  lDb: 13,
  slc80Db: 19,
  bands: null,
  active: null,
};

/** How far a day departs from the nominal one: minutes moved from the first task to the last, and wearing. */
const variants = [0, 15, 30].flatMap((movedMin) =>
  [100, 95].map((wornPct) => ({ movedMin, wornPct })),
);

interface Pattern {
  no: number;
  siteNo: number;
  jobNo: number;
  isBare: boolean;
  facts: ReturnType<typeof resultFacts>;
  tasks: { taskId: string; levelId: string; durationMin: number; wornPct: number | null }[];
  causes: Cause[];
}

interface LaidOut {
  siteId: string;
  settingsId: string;
  taskIds: string[];
  levelIds: string[];
  jobIds: string[];
}

const json = (value: unknown) => JSON.stringify(value);

/** Every distinct day there is, through the engine. */
function evaluatePatterns(
  laidOut: readonly LaidOut[],
  muff: ProtectorData,
  date: string,
): Pattern[] {
  const patterns: Pattern[] = [];
  sites.forEach((site, siteNo) => {
    const governing = ruleSetInForce(site.governing, date)!;
    const comparison = site.comparison.map((key) => ruleSetInForce(key, date)!);
    const { taskIds, levelIds } = laidOut[siteNo]!;
    jobs.forEach((job, jobNo) => {
      for (const isBare of [false, true]) {
        for (const { movedMin, wornPct } of variants) {
          const tasks = job.map(([place, durationMin], index): TimedTask => {
            const moved =
              job.length === 1
                ? 0
                : index === 0
                  ? -movedMin
                  : index === job.length - 1
                    ? movedMin
                    : 0;
            const { levelDb, lcMinusLaDb } = noise[place]!;
            const level: TaskLevel = {
              revisionId: levelIds[place]!,
              metric: site.metric,
              levelDb,
              lcMinusLaDb,
              octaveBandsDb: null,
              lasMaxDb: null,
              peak: null,
              samplesDb: [],
              instrument: null,
              grade: "task-level",
            };
            const hasProtector = !isBare && needsProtector(jobNo);
            return {
              id: `${place}`,
              taskId: taskIds[place]!,
              name: noise[place]!.name,
              durationMin: durationMin + moved,
              level,
              zone: "none",
              protection: hasProtector
                ? {
                    assignmentId: "a",
                    inner: muff,
                    outer: null,
                    combinationBands: null,
                    ownFitDb: null,
                    activeCheckPassed: false,
                  }
                : null,
              wornPct: hasProtector ? wornPct : null,
              wornIsShiftWide: false,
            };
          });
          const input: DayInput = {
            workerId: "w",
            date,
            mustWear: false,
            personalTargetDb: null,
            site: { wearFromDb: WEAR_FROM_DB, creditsActivePart: false, usesUncertainty: false },
            shifts: [
              {
                id: "s",
                revisionId: "r",
                lengthMin: SHIFT_MIN,
                tasks,
                unaccounted: { how: "like-the-rest" },
                readings: [],
              },
            ],
          };
          const evaluation = evaluateDay(input, governing, comparison);
          patterns.push({
            no: patterns.length,
            siteNo,
            jobNo,
            isBare,
            facts: resultFacts(input, evaluation, governing),
            tasks: tasks.map(({ taskId, level, durationMin, wornPct: worn }) => ({
              taskId,
              levelId: level!.revisionId!,
              durationMin,
              wornPct: worn,
            })),
            causes: findCauses(input, evaluation, governing),
          });
        }
      }
    });
  });
  return patterns;
}

const needsProtector = (jobNo: number) =>
  jobs[jobNo]!.some(([place]) => noise[place]!.levelDb >= WEAR_FROM_DB);

async function layOutSites(db: pg.Client, organizationId: string): Promise<LaidOut[]> {
  const laidOut: LaidOut[] = [];
  for (const { name, timeZone, governing, comparison, metric } of sites) {
    const ids = (count: number) => Array.from({ length: count }, () => randomUUID());
    const one: LaidOut = {
      siteId: randomUUID(),
      settingsId: randomUUID(),
      taskIds: ids(noise.length),
      levelIds: ids(noise.length),
      jobIds: ids(jobs.length),
    };
    await db.query(
      "INSERT INTO sites (id, organization_id, name, time_zone) VALUES ($1, $2, $3, $4)",
      [one.siteId, organizationId, name, timeZone],
    );
    await db.query(
      "INSERT INTO site_settings (id, organization_id, site_id, number, effective_from, governing_rule_set, comparison_rule_sets, wear_from_db) VALUES ($1, $2, $3, 1, $4, $5, $6, $7)",
      [one.settingsId, organizationId, one.siteId, OLDEST, governing, comparison, WEAR_FROM_DB],
    );
    for (const [place, { name: taskName, levelDb, lcMinusLaDb }] of noise.entries()) {
      await db.query(
        "INSERT INTO tasks (id, organization_id, site_id, name) VALUES ($1, $2, $3, $4)",
        [one.taskIds[place], organizationId, one.siteId, taskName],
      );
      await db.query(
        "INSERT INTO task_levels (id, organization_id, task_id, number, effective_from, metric, level_db, lc_minus_la_db, grade) VALUES ($1, $2, $3, 1, $4, $5, $6, $7, 'task-level')",
        [
          one.levelIds[place],
          organizationId,
          one.taskIds[place],
          OLDEST,
          metric,
          levelDb,
          lcMinusLaDb,
        ],
      );
    }
    for (const [jobNo, job] of jobs.entries()) {
      const jobName = `${jobNo + 1}: ${job.map(([place]) => noise[place]!.name).join(", ")}`;
      await db.query(
        "INSERT INTO jobs (id, organization_id, site_id, name) VALUES ($1, $2, $3, $4)",
        [one.jobIds[jobNo], organizationId, one.siteId, jobName],
      );
      await db.query(
        `INSERT INTO job_tasks (organization_id, job_id, task_id, position, duration_min)
         SELECT $1, $2, x."taskId", x.position, x."durationMin" FROM jsonb_to_recordset($3::jsonb) AS x("taskId" uuid, position int, "durationMin" float8)`,
        [
          organizationId,
          one.jobIds[jobNo],
          json(
            job.map(([place, durationMin], position) => ({
              taskId: one.taskIds[place],
              position,
              durationMin,
            })),
          ),
        ],
      );
    }
    laidOut.push(one);
  }
  return laidOut;
}

async function layOutMuff(
  db: pg.Client,
  organizationId: string,
): Promise<ProtectorData & { revisionId: string }> {
  const [modelId, revisionId] = [randomUUID(), randomUUID()];
  const [name, kind] = ["Plain muff", "earmuff"] as const;
  await db.query(
    "INSERT INTO protector_models (id, organization_id, name, kind) VALUES ($1, $2, $3, $4)",
    [modelId, organizationId, name, kind],
  );
  await db.query(
    "INSERT INTO protector_model_revisions (id, organization_id, model_id, number, effective_from, data) VALUES ($1, $2, $3, 1, $4, $5)",
    [revisionId, organizationId, modelId, OLDEST, muffData],
  );
  return { modelId, revisionId, name, kind, ...muffData };
}

/** Workers by number: every other one at the other site, jobs in turn, one of twenty in noise without a protector. */
async function layOutWorkers(
  db: pg.Client,
  organizationId: string,
  laidOut: readonly LaidOut[],
  muffId: string,
  count: number,
): Promise<void> {
  const places = laidOut.flatMap(({ siteId, jobIds }, siteNo) =>
    jobIds.map((jobId, jobNo) => ({
      siteNo,
      siteId,
      jobNo,
      jobId,
      needsProtector: needsProtector(jobNo),
    })),
  );
  await db.query(
    `CREATE TEMP TABLE scale_workers ON COMMIT PRESERVE ROWS AS
     SELECT n AS no, gen_random_uuid() AS id, gen_random_uuid() AS assignment_id, p."siteNo" AS site_no, p."siteId" AS site_id, p."jobNo" AS job_no, p."jobId" AS job_id,
       n % 20 = 19 AS is_bare, p."needsProtector" AND n % 20 <> 19 AS has_protector, NULL::uuid AS crew_id
     FROM generate_series(0, $1 - 1) n
     JOIN jsonb_to_recordset($2::jsonb) AS p("siteNo" int, "siteId" uuid, "jobNo" int, "jobId" uuid, "needsProtector" boolean)
       ON p."siteNo" = n % 2 AND p."jobNo" = (n / 2) % ${jobs.length}`,
    [count, json(places)],
  );
  await db.query(
    "CREATE TEMP TABLE scale_crews AS SELECT g AS no, site_no, gen_random_uuid() AS id, site_id FROM (SELECT DISTINCT no / $1 / 2 AS g, site_no, site_id FROM scale_workers) x",
    [CREW_OF],
  );
  await db.query(
    "UPDATE scale_workers w SET crew_id = c.id FROM scale_crews c WHERE c.site_no = w.site_no AND c.no = w.no / $1 / 2",
    [CREW_OF],
  );
  await db.query(
    `INSERT INTO workers (id, organization_id, site_id, job_id, employee_number, name, hired_on)
     SELECT id, $1, site_id, job_id, lpad(no::text, 6, '0'), 'Worker ' || lpad(no::text, 6, '0'), $2 FROM scale_workers`,
    [organizationId, OLDEST],
  );
  await db.query(
    "INSERT INTO crews (id, organization_id, site_id, name, usual_start, usual_length_min) SELECT id, $1, site_id, 'Crew ' || lpad(no::text, 4, '0'), '06:00', $2 FROM scale_crews",
    [organizationId, SHIFT_MIN],
  );
  await db.query(
    "INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid) SELECT $1, crew_id, id, daterange($2::date, NULL) FROM scale_workers",
    [organizationId, OLDEST],
  );
  await db.query(
    "INSERT INTO assignments (id, organization_id, worker_id, inner_model_id, valid) SELECT assignment_id, $1, id, $2, daterange($3::date, NULL) FROM scale_workers WHERE has_protector",
    [organizationId, muffId, OLDEST],
  );
}

/** One who can sign in for each role; whoever measures opens their sessions. */
async function layOutUsers(db: pg.Client, organizationId: string): Promise<void> {
  for (const role of ["officer", "supervisor", "worker", "auditor", "administrator"]) {
    const userId = randomUUID();
    await db.query(
      `INSERT INTO users (id, organization_id, name, email, worker_id)
       VALUES ($1, $2, $3, $4, CASE WHEN $3 = 'worker' THEN (SELECT id FROM scale_workers WHERE no = 0) END)`,
      [userId, organizationId, role, `${role}.${organizationId}@dinward.example`],
    );
    await db.query("INSERT INTO role_grants (organization_id, user_id, role) VALUES ($1, $2, $3)", [
      organizationId,
      userId,
      role,
    ]);
    if (role === "supervisor") {
      await db.query(
        "INSERT INTO crew_supervisors (organization_id, crew_id, user_id, valid) SELECT $1, crew_id, $2, daterange($3::date, NULL) FROM scale_workers WHERE no = 0",
        [organizationId, userId, OLDEST],
      );
    }
  }
}

async function keepPatterns(
  db: pg.Client,
  patterns: readonly Pattern[],
  laidOut: readonly LaidOut[],
  muffRevisionId: string,
  date: string,
): Promise<void> {
  const members = Object.entries(RESULT_COLUMNS);
  const comparison = (siteNo: number) =>
    sites[siteNo]!.comparison.map((key) => [key, ruleSetInForce(key, date)!.version]);
  // As the application writes what it digests: members in order, no spaces.
  const head = ({ siteNo, facts }: Pattern) =>
    `{"comparison":${json(comparison(siteNo))},"governing":${json([facts.ruleSetKey, facts.ruleSetVersion])},"mustWear":false,"settingsId":"${laidOut[siteNo]!.settingsId}","shifts":[{"revisionId":"`;
  await db.query(
    `CREATE TEMP TABLE scale_patterns AS SELECT p.*, ${members.map(([column, [member]]) => `f."${member}" AS ${column}`).join(", ")}
     FROM jsonb_to_recordset($1::jsonb) AS p(no int, "siteNo" int, "jobNo" int, "isBare" boolean, variant int, head text, facts jsonb),
       jsonb_to_record(p.facts) AS f(${members.map(([, [member, type]]) => `"${member}" ${type}`).join(", ")})`,
    [
      json(
        patterns.map((pattern) => ({
          ...pattern,
          variant: pattern.no % variants.length,
          head: head(pattern),
          tasks: undefined,
          causes: undefined,
        })),
      ),
    ],
  );
  await db.query(
    `CREATE TEMP TABLE scale_pattern_tasks AS SELECT * FROM jsonb_to_recordset($1::jsonb)
       AS x(pattern int, position int, "taskId" uuid, "levelId" uuid, "durationMin" float8, "wornPct" float8)`,
    [
      json(
        patterns.flatMap(({ no, tasks }) =>
          tasks.map((task, position) => ({ pattern: no, position, ...task })),
        ),
      ),
    ],
  );
  await db.query(
    `CREATE TEMP TABLE scale_causes AS SELECT * FROM jsonb_to_recordset($1::jsonb)
       AS x(pattern int, kind text, concerns text, criterion text, "useKey" text, facts jsonb)`,
    [
      json(
        patterns.flatMap(({ no, causes }) => causes.map((cause) => ({ pattern: no, ...cause }))),
      ),
    ],
  );
  await db.query("CREATE TEMP TABLE scale_muff AS SELECT $1::uuid AS revision_id", [
    muffRevisionId,
  ]);
  await db.query(
    "CREATE TEMP TABLE scale_findings (id uuid, worker_id uuid, job_id uuid, kind text, criterion text, use_key text, UNIQUE NULLS NOT DISTINCT (worker_id, job_id, kind, criterion, use_key))",
  );
  await db.query(
    "ANALYZE scale_patterns; ANALYZE scale_pattern_tasks; ANALYZE scale_causes; ANALYZE scale_workers",
  );
}

/** Shifts of some workers, with everything that hangs on them; returns the rows written. */
async function layOutShifts(
  db: pg.Client,
  organizationId: string,
  from: number,
  to: number,
  shiftsLeft: number,
): Promise<{ shifts: number; rows: number }> {
  let rows = 0;
  const write = async (text: string) => {
    rows += (await db.query(text)).rowCount ?? 0;
  };
  await db.query(`DROP TABLE IF EXISTS scale_shifts; DROP TABLE IF EXISTS scale_tasks`);
  await db.query(
    `CREATE TEMP TABLE scale_shifts AS
     SELECT gen_random_uuid() AS id, gen_random_uuid() AS revision_id, gen_random_uuid() AS result_id, w.id AS worker_id, w.no AS worker_no, w.site_id, w.job_id, w.crew_id,
       w.assignment_id, w.has_protector, d.date, s.time_zone, (d.date + time '06:00') AT TIME ZONE s.time_zone AS starts_at, p.no AS pattern, p.head
     FROM scale_workers w JOIN sites s ON s.id = w.site_id JOIN scale_dates d ON TRUE
     JOIN scale_patterns p ON p."siteNo" = w.site_no AND p."jobNo" = w.job_no AND p."isBare" = w.is_bare AND p.variant = (w.no + d.no) % ${variants.length}
     WHERE w.no >= ${from} AND w.no < ${to} ORDER BY w.no, d.date DESC LIMIT ${shiftsLeft}`,
  );
  await db.query(
    `CREATE TEMP TABLE scale_tasks AS SELECT gen_random_uuid() AS id, s.id AS shift_id, s.revision_id, t.position, t."taskId" AS task_id, t."levelId" AS level_id,
       t."durationMin" AS duration_min, t."wornPct" AS worn_pct, s.assignment_id, s.has_protector
     FROM scale_shifts s JOIN scale_pattern_tasks t ON t.pattern = s.pattern`,
  );
  await db.query("ANALYZE scale_shifts; ANALYZE scale_tasks");
  await db.query("BEGIN");
  await write(
    `INSERT INTO shift_revisions (id, organization_id, shift_id, number, local_start, length_min, unaccounted_how)
     SELECT revision_id, '${organizationId}', id, 1, '06:00', ${SHIFT_MIN}, 'like-the-rest' FROM scale_shifts`,
  );
  await write(
    `INSERT INTO shifts (id, organization_id, site_id, worker_id, crew_id, date, local_start, time_zone, length_min, starts_at, ends_at, current_revision_id)
     SELECT id, '${organizationId}', site_id, worker_id, crew_id, date, '06:00', time_zone, ${SHIFT_MIN}, starts_at, starts_at + interval '${SHIFT_MIN} min', revision_id FROM scale_shifts`,
  );
  await write(
    `INSERT INTO shift_tasks (id, organization_id, shift_id, shift_revision_id, position, task_id, duration_min, worn_pct)
     SELECT id, '${organizationId}', shift_id, revision_id, position, task_id, duration_min, worn_pct FROM scale_tasks`,
  );
  const columns = Object.keys(RESULT_COLUMNS);
  await write(
    `WITH refs AS (
       SELECT s.*, s.head || s.revision_id || '","runRevisionIds":[],"tasks":[' || t.tasks || ']}],"targetDb":null}' AS refs
       FROM scale_shifts s JOIN (
         SELECT shift_id, string_agg('{"id":"' || id || '","levelId":"' || level_id || '","use":' || CASE WHEN has_protector
           THEN '{"id":"' || assignment_id || '","inner":"' || m.revision_id || '","outer":null}' ELSE 'null' END || ',"zone":"none"}', ',' ORDER BY position) AS tasks
         FROM scale_tasks, scale_muff m GROUP BY shift_id) t ON t.shift_id = s.id)
     INSERT INTO day_results (id, organization_id, site_id, worker_id, date, origin, inputs_hash, refs, ${columns.join(", ")})
     SELECT r.result_id, '${organizationId}', r.site_id, r.worker_id, r.date, 'computed',
       sha256(convert_to('{"methodVersion":${METHOD_VERSION},"refs":' || r.refs || '}', 'UTF8')), r.refs::jsonb, ${columns.map((column) => `p.${column}`).join(", ")}
     FROM refs r JOIN scale_patterns p ON p.no = r.pattern`,
  );
  await write(
    `INSERT INTO days (organization_id, worker_id, date, site_id, crew_id, current_result_id, is_stale)
     SELECT '${organizationId}', worker_id, date, site_id, crew_id, result_id, FALSE FROM scale_shifts`,
  );
  await layOutFindings(organizationId, write);
  await db.query("COMMIT");
  const { rows: counted } = await db.query<{ count: number }>(
    "SELECT count(*)::int AS count FROM scale_shifts",
  );
  return { shifts: counted[0]!.count, rows };
}

/** One open finding a cause, with every day that shows it. */
async function layOutFindings(
  organizationId: string,
  write: (text: string) => Promise<void>,
): Promise<void> {
  const seen = `SELECT s.*, c.kind, c.criterion, c."useKey" AS use_key, c.facts, CASE WHEN c.concerns = 'worker' THEN s.worker_id END AS of_worker,
      CASE WHEN c.concerns = 'job' THEN s.job_id END AS of_job FROM scale_shifts s JOIN scale_causes c ON c.pattern = s.pattern`;
  await write(
    `INSERT INTO scale_findings SELECT gen_random_uuid(), x.* FROM (SELECT DISTINCT of_worker, of_job, kind, criterion, use_key FROM (${seen}) q) x ON CONFLICT DO NOTHING`,
  );
  const cause =
    "f.kind = q.kind AND f.criterion = q.criterion AND f.use_key = q.use_key AND f.worker_id IS NOT DISTINCT FROM q.of_worker AND f.job_id IS NOT DISTINCT FROM q.of_job";
  await write(
    `INSERT INTO findings (id, organization_id, site_id, worker_id, job_id, kind, criterion, use_key, state, facts, first_date, last_date, last_result_id, days_count, due_on)
     SELECT f.id, '${organizationId}', min(q.site_id::text)::uuid, f.worker_id, f.job_id, f.kind, f.criterion, f.use_key, 'new', (array_agg(q.facts ORDER BY q.date DESC))[1], min(q.date),
       max(q.date), (array_agg(q.result_id ORDER BY q.date DESC))[1], count(DISTINCT (q.worker_id, q.date)), max(q.date) + 14
     FROM (${seen}) q JOIN scale_findings f ON ${cause} GROUP BY f.id, f.worker_id, f.job_id, f.kind, f.criterion, f.use_key
     ON CONFLICT (id) DO UPDATE SET days_count = findings.days_count + excluded.days_count`,
  );
  await write(
    `INSERT INTO finding_evidence (organization_id, finding_id, worker_id, date, result_id)
     SELECT DISTINCT ON (f.id, q.worker_id, q.date) '${organizationId}'::uuid, f.id, q.worker_id, q.date, q.result_id FROM (${seen}) q JOIN scale_findings f ON ${cause}`,
  );
}

async function seedScale(db: pg.Client, shiftsWanted: number, daysAWorker: number): Promise<void> {
  const organizationId = randomUUID();
  const today = new Date().toISOString().slice(0, 10);
  const workers = Math.max(2 * CREW_OF, Math.ceil(shiftsWanted / daysAWorker));
  const began = performance.now();
  await db.query("BEGIN");
  await db.query("INSERT INTO organizations (id, name) VALUES ($1, $2)", [
    organizationId,
    `Scale data: ${shiftsWanted} shifts (${organizationId.slice(0, 8)})`,
  ]);
  const laidOut = await layOutSites(db, organizationId);
  const muff = await layOutMuff(db, organizationId);
  await layOutWorkers(db, organizationId, laidOut, muff.modelId, workers);
  await layOutUsers(db, organizationId);
  await db.query("COMMIT");
  await keepPatterns(db, evaluatePatterns(laidOut, muff, today), laidOut, muff.revisionId, today);
  await db.query(
    `CREATE TEMP TABLE scale_dates AS SELECT row_number() OVER (ORDER BY d DESC)::int AS no, d::date AS date
     FROM generate_series(current_date - 1, current_date - 1 - ($1 * 7 / 5 + 7)::int, interval '-1 day') d WHERE extract(isodow FROM d) <= 5 ORDER BY d DESC LIMIT $1`,
    [Math.ceil(shiftsWanted / workers)],
  );
  let [shifts, rows] = [0, 0];
  const step = Math.max(1, Math.floor((SHIFTS_AT_ONCE * workers) / shiftsWanted));
  for (let from = 0; from < workers && shifts < shiftsWanted; from += step) {
    const done = await layOutShifts(
      db,
      organizationId,
      from,
      Math.min(workers, from + step),
      shiftsWanted - shifts,
    );
    shifts += done.shifts;
    rows += done.rows;
    const seconds = (performance.now() - began) / 1000;
    console.log(
      `${shifts} of ${shiftsWanted} shifts, ${rows} rows, ${Math.round(rows / seconds)} rows/s`,
    );
  }
  // Where triggers were left out, the trail learns of the rows at once.
  await db.query(`DO $$ DECLARE w record; BEGIN
    IF current_setting('session_replication_role') = 'replica' THEN
      FOR w IN SELECT target, owner_column FROM watched_tables LOOP
        CALL state_rows(w.target, format('t.%I = %L', w.owner_column, '${organizationId}'));
      END LOOP;
    END IF;
  END $$`);
  await db.query("ANALYZE");
  console.log(
    `Scale data are laid out: organization ${organizationId}, ${workers} workers, ${((performance.now() - began) / 1000).toFixed(1)} s.`,
  );
}

const { values } = parseArgs({
  options: {
    shifts: { type: "string", default: "100000" },
    "days-a-worker": { type: "string", default: String(DAYS_A_WORKER) },
  },
});
const shiftsWanted = Number(values.shifts);
const daysAWorker = Number(values["days-a-worker"]);
if (!Number.isInteger(shiftsWanted) || shiftsWanted < 1 || shiftsWanted > 10_000_000) {
  console.error("--shifts is a whole number from 1 to 10000000");
  process.exit(1);
}
if (!Number.isInteger(daysAWorker) || daysAWorker < 1 || daysAWorker > 10_000) {
  console.error("--days-a-worker is a whole number from 1 to 10000");
  process.exit(1);
}
const db = new pg.Client({
  connectionString: configOrExit("owner").OWNER_DATABASE_URL,
  application_name: "dinward seed-scale",
});
await db.connect();
try {
  // Row by row, foreign keys cost most of the time, and what is laid out here keeps them by how it is made. Only a
  // superuser, as the demo's and the benchmark's own cluster has one, can leave them out.
  await db.query(
    "SELECT set_config('session_replication_role', 'replica', false) FROM pg_roles WHERE rolname = current_user AND rolsuper",
  );
  await db.query(
    "SELECT set_config('default_toast_compression', 'lz4', false) FROM pg_settings WHERE name = 'default_toast_compression' AND 'lz4' = ANY (enumvals)",
  );
  await seedScale(db, shiftsWanted, daysAWorker);
} finally {
  await db.end();
}
