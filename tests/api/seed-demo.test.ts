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
    "officer",
    "supervisor",
    "worker",
  ]);
  expect(people.some(({ emailVerified }) => !emailVerified)).toBe(true);
  expect(
    people.filter(({ note }) => /printed code [A-Z2-9]{4}-[A-Z2-9]{4}-[A-Z2-9]{4}$/.test(note)),
  ).toHaveLength(1);
});
