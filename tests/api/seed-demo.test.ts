import { execFile } from "node:child_process";
import { mkdtempSync, readFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { promisify } from "node:util";
import pg from "pg";
import { afterAll, beforeAll, expect, test } from "vitest";
import { FINDING_KINDS } from "../../shared/schemas/finding";
import { copyDatabase, dropDatabase } from "../setup/copy-database";

const labels = ["demo_once", "demo_again"];
const folders = labels.map((label) => mkdtempSync(join(tmpdir(), `dinward-${label}-`)));
let databases: Awaited<ReturnType<typeof copyDatabase>>[];

/** Two months of the demo in a database of its own. */
async function fill(index: number): Promise<void> {
  const { appUrl, ownerUrl } = databases[index]!;
  const env = {
    ...process.env,
    DATABASE_URL: appUrl,
    OWNER_DATABASE_URL: ownerUrl,
    DATA_DIR: folders[index]!,
  };
  await promisify(execFile)(
    process.execPath,
    ["--import", "tsx", "server/seed-demo.ts", "--months=2"],
    { env },
  );
}

/** Row by row in one text each; ids differ from filling to filling. */
async function ask(index: number, text: string): Promise<string[]> {
  const client = new pg.Client(databases[index]!.ownerUrl);
  await client.connect();
  try {
    await client
      .query("SELECT set_config('app.organization', (SELECT id::text FROM organizations), false)")
      .catch(() => undefined);
    return (await client.query({ text, rowMode: "array" })).rows.map((row: unknown[]) =>
      row.join(" | "),
    );
  } finally {
    await client.end();
  }
}

beforeAll(async () => {
  databases = [await copyDatabase(labels[0]!), await copyDatabase(labels[1]!)];
  await fill(0);
  await fill(1);
}, 240_000);

afterAll(async () => {
  for (const { name } of databases) await dropDatabase(name);
});

test("each kind of finding occurs", async () => {
  expect(await ask(0, "SELECT DISTINCT kind FROM findings ORDER BY kind")).toEqual(
    [...FINDING_KINDS].sort(),
  );
});

test("each state of a finding occurs", async () => {
  const states = await ask(0, "SELECT DISTINCT state FROM findings ORDER BY state");
  expect(states).toEqual(["came-back", "closed", "done", "in-hand", "new"]);
});

test("filled twice on one day it shows the same numbers", async () => {
  const questions = [
    `SELECT w.employee_number, d.date::text, r.outside_db, r.at_ear_db, r.uncertainty_db, r.verdict_outside, r.verdict_at_ear, r.word
     FROM days d JOIN workers w ON w.id = d.worker_id JOIN day_results r ON r.id = d.current_result_id ORDER BY 1, 2`,
    `SELECT f.kind, f.state, f.criterion, coalesce(w.employee_number, j.name, i.name), f.first_date::text, f.last_date::text, f.days_count
     FROM findings f LEFT JOIN workers w ON w.id = f.worker_id LEFT JOIN jobs j ON j.id = f.job_id LEFT JOIN instruments i ON i.id = f.instrument_id
     ORDER BY 1, 2, 3, 4, 5`,
    "SELECT u.name, n.audience, n.state, count(*) FROM notices n JOIN users u ON u.id = n.recipient_id GROUP BY 1, 2, 3 ORDER BY 1, 2, 3",
    `SELECT w.employee_number, l.due_on::text, l.written_at::date::text, l.language, l.notice_id IS NULL, a.way, a.signed_on::text FROM result_letters l
     JOIN workers w ON w.id = l.worker_id LEFT JOIN notice_acknowledgements a ON a.letter_id = l.id ORDER BY 1, 2, 3`,
    "SELECT u.name, t.name, t.scopes::text, t.expires_at::date::text, t.revoked_at IS NULL FROM api_tokens t JOIN users u ON u.id = t.user_id ORDER BY 1, 2",
    `SELECT h.starts_at, i.serial_number, h.values_count, c.channel, c.position, md5(c.packed)
     FROM time_histories h JOIN instruments i ON i.id = h.instrument_id JOIN time_history_chunks c ON c.history_id = h.id ORDER BY 1, 2, 4, 5`,
  ];
  for (const question of questions) {
    const once = await ask(0, question);
    expect(once.length).toBeGreaterThan(0);
    expect(await ask(1, question)).toEqual(once);
  }
});

test("no day is left to be computed, and records are stamped by the clock again", async () => {
  expect(await ask(0, "SELECT 1 FROM days WHERE is_stale")).toEqual([]);
  expect(
    await ask(
      0,
      "SELECT table_name FROM information_schema.columns WHERE table_schema = 'public' AND column_default LIKE '%recorded_at%'",
    ),
  ).toEqual([]);
});

test("of today one crew is entered, and rows of it wait", async () => {
  const saved = await ask(
    0,
    "SELECT c.name, count(*) FROM shifts s JOIN crews c ON c.id = s.crew_id WHERE s.date >= (SELECT max(date) FROM shifts) GROUP BY c.name",
  );
  expect(saved).toEqual(["Test cell days | 8"]);
});

test("the local sign-in knows somebody for each role, and the code of the worker without e-mail", () => {
  const people: { roles: string[]; emailVerified: boolean; note: string }[] = JSON.parse(
    readFileSync(join(folders[0]!, "demo-people.json"), "utf8"),
  );
  const roles = new Set(people.flatMap((person) => person.roles));
  expect([...roles].sort()).toEqual([
    "administrator",
    "auditor",
    "employer",
    "officer",
    "representative",
    "supervisor",
    "visitor",
    "worker",
  ]);
  expect(people.some(({ emailVerified }) => !emailVerified)).toBe(true);
  expect(
    people.filter(({ note }) => /printed code [A-Z2-9]{4}-[A-Z2-9]{4}-[A-Z2-9]{4}$/.test(note)),
  ).toHaveLength(1);
});

test("two guests read for a while: of an agency, and a visitor", async () => {
  expect(
    await ask(
      0,
      `SELECT u.name, g.role, coalesce(g.employer_name, 'a year'), s.name, g.ends_at > now() FROM role_grants g JOIN users u ON u.id = g.user_id
         JOIN sites s ON s.id = g.site_id WHERE g.ends_at IS NOT NULL ORDER BY 1`,
    ),
  ).toEqual([
    "J. Threlkeld-Amos | auditor | a year | Ostmere works | true",
    "R. Quennell | employer | Tideway Staffing | Ostmere works | true",
  ]);
});

test("a site's records wait for somebody else to approve that they are handed over", async () => {
  expect(await ask(0, "SELECT state, approved_by IS NULL FROM record_transfers")).toEqual([
    "proposed | true",
  ]);
});

test("records are looked at, reported and erased at the end of their term", async () => {
  expect(
    await ask(
      0,
      "SELECT d.seed, g.records, g.questions FROM record_draws d JOIN record_draw_signatures g ON g.draw_id = d.id",
    ),
  ).toEqual(["gatepost 41 | 6 | 1"]);
  expect(
    await ask(
      0,
      "SELECT s.name, y.number FROM year_reports y JOIN sites s ON s.id = y.site_id ORDER BY 1",
    ),
  ).toEqual(["Kettle Bend works | 1", "Ostmere works | 1"]);
  expect(
    await ask(
      0,
      "SELECT e.state, p.state, w.name ~ '^Former worker ', e.proposed_by <> e.approved_by FROM erasures e JOIN erasure_people p ON p.erasure_id = e.id JOIN workers w ON w.id = p.worker_id",
    ),
  ).toEqual(["done | erased | true | true"]);
});

test("people have tokens, feeds, mails they do without, refusals and a paper at a finding", async () => {
  expect(
    await ask(
      0,
      `SELECT (SELECT count(*) FROM api_tokens WHERE revoked_at IS NULL AND expires_at > now()), (SELECT count(*) FROM api_tokens WHERE expires_at < now()),
         (SELECT count(*) FROM calendar_feeds), (SELECT count(*) FROM mail_choices), (SELECT count(*) FROM protector_refusals), (SELECT count(*) FROM finding_files)`,
    ),
  ).toEqual(["1 | 1 | 2 | 1 | 2 | 1"]);
});

test("every task has a spectrum and LC − LA, and most levels rest on a survey with its samples", async () => {
  const inForce = `SELECT DISTINCT ON (t.id) t.name, l.* FROM tasks t JOIN task_levels l ON l.task_id = t.id ORDER BY t.id, l.effective_from DESC, l.number DESC`;
  expect(
    await ask(
      0,
      `SELECT t.name FROM tasks t LEFT JOIN (${inForce}) l ON l.task_id = t.id WHERE l.octave_bands_db IS NULL OR l.lc_minus_la_db IS NULL`,
    ),
  ).toEqual([]);
  expect(
    await ask(0, `SELECT l.name FROM (${inForce}) l WHERE l.survey_id IS NULL ORDER BY 1`),
  ).toEqual(["Core making", "Forklift", "Picking"]);
  // Each sample is a run of its own, and the level is near the middle of them.
  expect(
    await ask(
      0,
      `SELECT l.name FROM (${inForce}) l WHERE l.survey_id IS NOT NULL AND ((SELECT count(DISTINCT run_id) FROM task_level_samples s WHERE s.task_level_id = l.id) <> 3
         OR abs((SELECT avg(s.level_db) FROM task_level_samples s WHERE s.task_level_id = l.id) - l.level_db) > 0.2)`,
    ),
  ).toEqual([]);
});

test("a recording at each site was analysed, and gives a task its spectrum", async () => {
  expect(
    await ask(0, "SELECT state, analysis->>'durationS', file_id IS NULL FROM recordings"),
  ).toEqual(["analysed | 20 | true", "analysed | 20 | true"]);
  // The noise was made of the task's own bands: the analysis finds them again, and only the reason is new.
  const found = await ask(
    0,
    `SELECT t.name, max(abs(n.band - o.band)) < 0.3 FROM task_levels l JOIN tasks t ON t.id = l.task_id
       JOIN task_levels b ON b.task_id = l.task_id AND b.number = l.number - 1,
       unnest(l.octave_bands_db) WITH ORDINALITY AS n(band, place), unnest(b.octave_bands_db) WITH ORDINALITY AS o(band, place)
     WHERE l.recording_id IS NOT NULL AND n.place = o.place GROUP BY 1 ORDER BY 1`,
  );
  expect(found).toEqual(["Compressor rounds | true", "Linishing | true"]);
});

test("every task that is measured at all lies under a time history", async () => {
  expect(
    await ask(
      0,
      `SELECT t.name FROM tasks t WHERE NOT EXISTS (SELECT 1 FROM time_histories h JOIN time_history_revisions v ON v.id = h.current_revision_id,
         jsonb_array_elements(v.stretches) x WHERE x->>'taskId' = t.id::text) ORDER BY 1`,
    ),
    // Nobody has measured these yet.
  ).toEqual(["Core making", "Forklift", "Picking"]);
});

test("surveys by each strategy, one planned with a draw and instruments, one half taken", async () => {
  expect(await ask(0, "SELECT DISTINCT strategy, state FROM surveys ORDER BY 1, 2")).toEqual([
    "full-day | done",
    "full-day | planned",
    "job | done",
    "task | done",
    "task | measuring",
    "task | planned",
  ]);
  expect(
    await ask(
      0,
      `SELECT (SELECT string_agg(DISTINCT p.part, ', ' ORDER BY p.part) FROM survey_people p WHERE p.survey_id = y.id), (SELECT count(*) FROM instrument_reservations v WHERE v.survey_id = y.id)
       FROM surveys y WHERE y.state = 'planned' AND y.strategy = 'task'`,
    ),
  ).toEqual(["drawn, reserve | 2"]);
  const answers = `SELECT y.name FROM surveys y, jsonb_each(y.risk_factors) f WHERE f.value->>'answer' IS NULL`;
  expect(await ask(0, answers)).toEqual([]);
  // By hand, or bracketed under a history: five of the nine that are wanted.
  expect(
    await ask(
      0,
      `SELECT (SELECT sum(samples_count) FROM survey_targets t WHERE t.survey_id = y.id),
         (SELECT count(*) FROM runs r WHERE r.survey_id = y.id AND r.task_id IS NOT NULL)
         + (SELECT count(*) FROM runs r JOIN time_histories h ON h.run_id = r.id JOIN time_history_revisions v ON v.id = h.current_revision_id,
              jsonb_array_elements(v.stretches) x WHERE r.survey_id = y.id AND r.task_id IS NULL AND x->>'kind' = 'task')
       FROM surveys y WHERE y.state = 'measuring'`,
    ),
  ).toEqual(["9 | 5"]);
});

test("thirteen shifts were logged, one with a stretch left out, one with LAeq alone, and a sample at 1/8 s", async () => {
  const [shifts] = await ask(
    0,
    "SELECT count(*) FROM time_histories WHERE interval_ms = 1000 AND values_count >= 28800",
  );
  expect(Number(shifts)).toBe(13);
  expect(await ask(0, "SELECT values_count FROM time_histories WHERE interval_ms = 125")).toEqual([
    "14400",
  ]);
  expect(await ask(0, "SELECT count(*) FROM time_histories WHERE channels = '{laeq}'")).toEqual([
    "1",
  ]);
  expect(
    await ask(
      0,
      `SELECT r.source, count(DISTINCT v.number) FROM time_histories h JOIN time_history_revisions q ON q.id = h.current_revision_id
       JOIN runs u ON u.id = h.run_id JOIN run_revisions v ON v.run_id = u.id JOIN readings r ON r.run_revision_id = u.current_revision_id
       WHERE q.stretches @> '[{"kind": "left-out"}]' GROUP BY 1`,
    ),
  ).toEqual(["history | 4"]);
});

test("one instrument is out, two are back, and one failed its calibration with runs since its last good check", async () => {
  expect(
    await ask(
      0,
      `SELECT i.serial_number, r.is_out FROM runs r JOIN instruments i ON i.id = r.instrument_id JOIN sites s ON s.id = r.site_id
       WHERE r.date = (now() AT TIME ZONE s.time_zone)::date ORDER BY 1`,
    ),
  ).toEqual(["OD 40117 | true", "OD 40118 | false", "OD 40121 | false"]);
  const [doubtful] = await ask(
    0,
    `SELECT count(*) FROM runs r JOIN instruments i ON i.id = r.instrument_id JOIN run_revisions v ON v.id = r.current_revision_id
     WHERE NOT (SELECT c.has_passed FROM instrument_calibrations c WHERE c.instrument_id = i.id ORDER BY c.done_on DESC LIMIT 1) AND v.check_after_db IS NULL`,
  );
  expect(Number(doubtful)).toBeGreaterThan(2);
  expect(
    await ask(
      0,
      "SELECT count(*) FROM run_revisions WHERE 'field-check-drift' = ANY (doubts) AND kept_reason IS NOT NULL",
    ),
  ).toEqual(["2"]);
});
