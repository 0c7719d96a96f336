import { closeSync, openSync, readSync, statSync } from "node:fs";
import { setTimeout as sleep } from "node:timers/promises";
import type pg from "pg";
import { line, measureBeside, type Spread, title } from "./lib/measure";
import { fetchJson, inOrganization, openDatabase, organizations, signIn } from "./lib/scale";

type Statements = [text: string, values: unknown[]][];

interface Screen {
  name: string;
  role: string;
  path: string;
  /** What any implementation has to read for it. */
  bare: Statements;
}

const FIGURES = `r.id, r.date, r.origin, r.outside_db, r.outside_bound, r.at_ear_db, r.at_ear_active_db, r.at_ear_as_worked_db, r.uncertainty_db, r.while_worn_db,
  r.verdict_outside, r.verdict_at_ear, r.word, r.deciding_task_id, r.has_protector, r.reason, r.governing_rule_set, r.governing_version, r.criteria->'governing'`;
const actor = (): Statements[number] => [
  "SELECT u.*, (SELECT json_agg(g) FROM role_grants g WHERE g.user_id = u.id) FROM users u WHERE u.revoked_at IS NULL LIMIT 1",
  [],
];

async function screensOf(db: pg.Client, organizationId: string): Promise<Screen[]> {
  const { rows } = await db.query<{ workerId: string; crewId: string; siteId: string }>(
    `SELECT w.id AS "workerId", m.crew_id AS "crewId", w.site_id AS "siteId" FROM workers w JOIN crew_memberships m ON m.worker_id = w.id
     WHERE w.organization_id = $1 ORDER BY w.employee_number LIMIT 1`,
    [organizationId],
  );
  const { workerId, crewId, siteId } = rows[0]!;
  const members =
    "(SELECT worker_id FROM crew_memberships WHERE crew_id = $1 AND valid @> current_date)";
  const findings: Statements[number] = [
    `SELECT f.*, w.name, ${FIGURES} FROM findings f LEFT JOIN workers w ON w.id = f.worker_id LEFT JOIN day_results r ON r.id = f.last_result_id
     WHERE f.state <> 'closed' AND f.site_id = $1 ORDER BY f.due_on, f.id LIMIT 100`,
    [siteId],
  ];
  return [
    {
      name: "Crew sheet",
      role: "supervisor",
      path: `/crews/${crewId}/sheet`,
      bare: [
        actor(),
        [
          `SELECT w.*, (SELECT json_agg(j ORDER BY j.position) FROM job_tasks j WHERE j.job_id = w.job_id) FROM workers w WHERE w.id IN ${members}`,
          [crewId],
        ],
        [
          "SELECT k.*, (SELECT to_jsonb(l) FROM task_levels l WHERE l.task_id = k.id AND l.effective_from <= current_date ORDER BY l.effective_from DESC, l.number DESC LIMIT 1) FROM tasks k WHERE k.site_id = $1",
          [siteId],
        ],
        [
          `SELECT a.*, p.data FROM assignments a JOIN protector_model_revisions p ON p.model_id = a.inner_model_id WHERE a.valid @> current_date AND a.worker_id IN ${members}`,
          [crewId],
        ],
        [
          `SELECT DISTINCT ON (s.worker_id, t.task_id) s.worker_id, t.task_id, t.worn_pct FROM shifts s JOIN shift_tasks t ON t.shift_revision_id = s.current_revision_id
          WHERE s.worker_id IN ${members} AND s.date >= current_date - 92 AND t.worn_pct IS NOT NULL ORDER BY s.worker_id, t.task_id, s.date DESC`,
          [crewId],
        ],
        [
          `SELECT f.* FROM findings f WHERE f.state <> 'closed' AND f.worker_id IN ${members}`,
          [crewId],
        ],
        [
          `SELECT ${FIGURES} FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.date = (SELECT max(date) FROM days WHERE crew_id = $1 AND date < current_date) AND d.worker_id IN ${members}`,
          [crewId],
        ],
      ],
    },
    {
      name: "Worker's history (60 days)",
      role: "worker",
      path: `/workers/${workerId}/days`,
      bare: [
        actor(),
        [
          `SELECT ${FIGURES} FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.worker_id = $1 ORDER BY d.date DESC LIMIT 61`,
          [workerId],
        ],
      ],
    },
    {
      name: "Waiting for you",
      role: "officer",
      path: `/waiting?siteId=${siteId}`,
      bare: [
        actor(),
        findings,
        [
          `SELECT c.*, (SELECT count(*) FROM crew_memberships m WHERE m.crew_id = c.id AND m.valid @> current_date),
            (SELECT count(*) FROM shifts f WHERE f.crew_id = c.id AND f.date = current_date) FROM crews c WHERE c.site_id = $1`,
          [siteId],
        ],
        [
          "SELECT * FROM notices WHERE site_id = $1 AND state IN ('waiting', 'held', 'failed', 'possibly-sent')",
          [siteId],
        ],
      ],
    },
    {
      name: "Findings (50)",
      role: "officer",
      path: `/findings?siteId=${siteId}`,
      bare: [actor(), [findings[0].replace("LIMIT 100", "LIMIT 51"), findings[1]]],
    },
    {
      name: "Workers (50)",
      role: "officer",
      path: "/workers",
      bare: [
        actor(),
        [
          `SELECT w.*, (SELECT count(*) FROM findings f WHERE f.worker_id = w.id AND f.state <> 'closed'), r.* FROM (SELECT * FROM workers ORDER BY name, id LIMIT 51) w
         LEFT JOIN LATERAL (SELECT ${FIGURES} FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.worker_id = w.id ORDER BY d.date DESC LIMIT 1) r ON TRUE`,
          [],
        ],
      ],
    },
    {
      name: "What is missing in a year",
      role: "auditor",
      path: `/exports/gaps?siteId=${siteId}&year=${new Date().getUTCFullYear()}`,
      bare: [
        actor(),
        [
          `SELECT extract(month FROM d.date), count(*), count(*) FILTER (WHERE r.verdict_at_ear = 'over'), count(*) FILTER (WHERE r.verdict_outside = 'over'),
           percentile_cont(0.5) WITHIN GROUP (ORDER BY r.at_ear_db), percentile_cont(0.5) WITHIN GROUP (ORDER BY r.outside_db)
         FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.site_id = $1 AND d.date >= date_trunc('year', current_date) GROUP BY 1`,
          [siteId],
        ],
      ],
    },
  ];
}

const bigTables = [
  "days",
  "day_results",
  "shifts",
  "shift_revisions",
  "shift_tasks",
  "findings",
  "finding_evidence",
  "audit_events",
  "audit_values",
];

/** Calls each screen once more while the database writes down its plans, and shows those that read a big table in full. */
async function printFullReads(db: pg.Client, calls: (() => Promise<unknown>)[]): Promise<void> {
  const log = process.env.POSTGRES_LOG!;
  await db.query("ALTER DATABASE dinward_bench SET session_preload_libraries = 'auto_explain'");
  await db.query("ALTER DATABASE dinward_bench SET auto_explain.log_min_duration = 0");
  await db.query(
    "SELECT pg_terminate_backend(pid) FROM pg_stat_activity WHERE application_name = 'dinward web'",
  );
  await sleep(200);
  const from = statSync(log).size;
  for (const call of calls) await call().catch(call);
  await db.query("ALTER DATABASE dinward_bench RESET ALL");
  await db.query(
    "SELECT pg_terminate_backend(pid) FROM pg_stat_activity WHERE application_name = 'dinward web'",
  );
  const bytes = Buffer.alloc(statSync(log).size - from);
  const file = openSync(log, "r");
  readSync(file, bytes, 0, bytes.length, from);
  closeSync(file);
  const fullRead = new RegExp(`Seq Scan on (${bigTables.join("|")})\\b`);
  const plans = bytes
    .toString()
    .split(/^\d{4}-\d\d-\d\d .*?LOG: {2}duration: /m)
    .slice(1)
    .filter((plan) => fullRead.test(plan));
  // The same query for another id is shown once.
  const distinct = new Map(
    plans.map((plan) => [plan.split("\n")[1]?.replace(/'[^']*'/g, "?"), plan]),
  );
  title(`Queries of these screens that read a big table in full: ${distinct.size}`);
  for (const plan of distinct.values()) {
    const lines = plan.split("\n").map((text) => text.replace(/^\t/, ""));
    const nodes = lines.filter((text) => /cost=\d/.test(text));
    console.log([lines[1], ...nodes].map((text) => `  ${(text ?? "").slice(0, 160)}`).join("\n"));
  }
}

const db = await openDatabase();
const app = await openDatabase(process.env.DATABASE_URL);
await db.query("ANALYZE");
const calls: (() => Promise<unknown>)[] = [];
const byScreen = new Map<string, Spread[]>();
for (const { id, years } of await organizations(db)) {
  title(`Screens over HTTP, ${years.toFixed(1)} years of days`);
  const headers = new Map<string, Record<string, string>>();
  for (const { name, role, path, bare } of await screensOf(db, id)) {
    headers.set(role, headers.get(role) ?? (await signIn(db, id, role)));
    const call = () => fetchJson(path, headers.get(role)!);
    calls.push(call);
    const [ours, bound] = await measureBeside(40, call, () => inOrganization(app, id, bare));
    line(name, ours, bound, "bare SQL", `goal p95 ${(2 * bound.p95 + 5).toFixed(1)} ms`);
    byScreen.set(name, [...(byScreen.get(name) ?? []), ours]);
  }
}
title("Flat as years grow: p50 with the long history beside the short one");
for (const [name, [long, short]] of byScreen)
  if (long && short) console.log(`  ${name}: × ${(long.p50 / short.p50).toFixed(2)}`);
await printFullReads(db, calls);
await app.end();
await db.end();
