import pg from "pg";
import { afterAll, beforeAll, describe, expect, inject, test } from "vitest";
import { findFreePort, randomPort } from "../../scripts/lib/ports.mjs";
import { type RunningApp, startApp } from "../setup/app";
import { Visitor } from "../setup/visitor";

const officer = {
  sub: "officer",
  email: "officer@dinward.example",
  emailVerified: true,
  name: "S. Ferrand",
  roles: ["officer"],
  language: "en" as const,
};
let app: RunningApp;
let secondPort: number;
let owner: pg.Client;

async function ids<T extends string>(text: string, values: unknown[] = []): Promise<T> {
  return (await owner.query(text, values)).rows[0].id;
}

let organizationId: string;
let crewId: string;
let workerId: string;
let taskId: string;

beforeAll(async () => {
  app = await startApp({ label: "several", seed: "empty", people: [officer] });
  secondPort = await findFreePort(randomPort());
  await app.startWeb(secondPort);
  app.startWork();
  owner = new pg.Client({ connectionString: app.ownerUrl });
  await owner.connect();
  organizationId = await ids(
    "INSERT INTO organizations (name) VALUES ('Ostmere engine works') RETURNING id",
  );
  const siteId = await ids(
    "INSERT INTO sites (organization_id, name, time_zone) VALUES ($1, 'Ostmere', 'Europe/London') RETURNING id",
    [organizationId],
  );
  await ids(
    "INSERT INTO site_settings (organization_id, site_id, number, effective_from, governing_rule_set) VALUES ($1, $2, 1, '2020-01-01', 'uk-2005') RETURNING id",
    [organizationId, siteId],
  );
  taskId = await ids(
    "INSERT INTO tasks (organization_id, site_id, name) VALUES ($1, $2, 'Chipping') RETURNING id",
    [organizationId, siteId],
  );
  await ids(
    `INSERT INTO task_levels (organization_id, task_id, number, effective_from, metric, level_db, grade) VALUES ($1, $2, 1, '2020-01-01', '{"kind":"steady"}', 99, 'task-level') RETURNING id`,
    [organizationId, taskId],
  );
  crewId = await ids(
    "INSERT INTO crews (organization_id, site_id, name, usual_start, usual_length_min) VALUES ($1, $2, 'Fettling days', '06:00', 480) RETURNING id",
    [organizationId, siteId],
  );
  workerId = await ids(
    "INSERT INTO workers (organization_id, site_id, employee_number, name, hired_on) VALUES ($1, $2, '4417', 'D. Tavernor', '2020-01-01') RETURNING id",
    [organizationId, siteId],
  );
  await ids(
    "INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid) VALUES ($1, $2, $3, '[2020-01-01,)') RETURNING id",
    [organizationId, crewId, workerId],
  );
  const userId = await ids(
    "INSERT INTO users (organization_id, name, email) VALUES ($1, $2, $3) RETURNING id",
    [organizationId, officer.name, officer.email],
  );
  await ids(
    "INSERT INTO role_grants (organization_id, user_id, role) VALUES ($1, $2, 'officer') RETURNING id",
    [organizationId, userId],
  );
});
afterAll(async () => {
  await owner?.end();
  await app?.stop();
});

/** The work process looks every minute for what was left behind. */
async function until<T>(ask: () => Promise<T | undefined>, what: string): Promise<T> {
  for (let tries = 0; tries < 600; tries += 1) {
    const answer = await ask();
    if (answer !== undefined) return answer;
    await new Promise((resolve) => setTimeout(resolve, 200));
  }
  throw new Error(`waited in vain for ${what}`);
}

/** A notice whose time has come, without a job: what a process that died leaves behind. */
async function leaveNotice(messageId: string): Promise<string> {
  const noticeId = await ids(
    `INSERT INTO notices (organization_id, site_id, recipient_id, entry_id, audience, state, not_before, message_id)
     SELECT organization_id, site_id, recipient_id, gen_random_uuid(), 'officer', 'waiting', now() - interval '5 minutes', $1 FROM notices LIMIT 1 RETURNING id`,
    [messageId],
  );
  await owner.query(
    "INSERT INTO notice_items SELECT organization_id, $1, finding_id, worker_id, date, result_id FROM notice_items WHERE notice_id <> $1 LIMIT 1",
    [noticeId],
  );
  return noticeId;
}

describe("two web and two work processes on one database", () => {
  test("the main job goes on across them: signed in at one, saved at the other, told once", async () => {
    const visitor = new Visitor();
    await visitor.signIn(`${app.url}/api/auth/sign-in`, officer.sub);
    const second = `http://127.0.0.1:${secondPort}`;
    const who = await (await visitor.request(`${second}/api/session`)).json();
    expect(who.user.name).toBe(officer.name);

    const yesterday = new Date(Date.now() - 86_400_000).toISOString().slice(0, 10);
    const save = (base: string) =>
      visitor.request(`${base}/api/crews/${crewId}/day`, {
        method: "POST",
        headers: {
          "content-type": "application/json",
          "idempotency-key": "one-saving-only",
          "x-csrf-token": visitor.cookie("127.0.0.1", "dinward.csrf") ?? "",
        },
        body: JSON.stringify({
          date: yesterday,
          rows: [
            {
              kind: "worked",
              workerId,
              localStart: "06:00",
              lengthMin: 480,
              tasks: [{ taskId, durationMin: 480 }],
            },
          ],
        }),
      });
    // The same click reaches both processes.
    const [first, again] = await Promise.all([save(app.url), save(second)]);
    const body = await first.json();
    expect(await again.json()).toEqual(body);
    expect(body.saved[0].figures.outsideDb).toBeCloseTo(99, 9);
    expect(body.notices.people).toBe(1);

    const sent = await visitor.request(`${second}/api/entries/${body.entryId}/notices/actions`, {
      method: "POST",
      headers: {
        "content-type": "application/json",
        "idempotency-key": "send-it-now",
        "x-csrf-token": visitor.cookie("127.0.0.1", "dinward.csrf") ?? "",
      },
      body: JSON.stringify({ action: "send-now" }),
    });
    expect(sent.status).toBe(201);
    const mails = await until(async () => {
      const found = await app.mailbox.mails({ to: officer.email });
      return found.length > 0 ? found : undefined;
    }, "the mail");
    expect(mails).toHaveLength(1);
    expect(mails[0]?.text).toContain("D. Tavernor");
    const unsealed = async () => {
      const { rows } = await owner.query(
        "SELECT count(*)::int AS count FROM audit_events e LEFT JOIN audit_seals s ON s.event_id = e.id WHERE s.event_id IS NULL",
      );
      return rows[0].count === 0 ? true : undefined;
    };
    expect(await until(unsealed, "the seals")).toBe(true);
  });

  test("a killed worker process and a database that drops every connection: a request says so, nothing stays half or unsent", async () => {
    const visitor = new Visitor();
    await visitor.signIn(`${app.url}/api/auth/sign-in`, officer.sub);
    app.work.signal("SIGKILL");
    await app.work.ended;
    await leaveNotice("<left-behind@dinward>");
    await leaveNotice("<after-the-break@dinward>");
    const superuser = new pg.Client(inject("database").superUrl);
    await superuser.connect();
    await superuser.query(
      "SELECT pg_terminate_backend(pid) FROM pg_stat_activity WHERE usename = 'dinward_app' AND datname = $1",
      [new URL(app.ownerUrl).pathname.slice(1)],
    );
    await superuser.end();
    const answers = new Set<number>();
    await until(async () => {
      const { status } = await visitor.request(`${app.url}/api/findings`);
      answers.add(status);
      return status === 200 ? true : undefined;
    }, "the web process to find its database again");
    expect([...answers].every((status) => status === 200 || status === 503)).toBe(true);
    expect(app.web.hasEnded()).toBe(false);
    const left = ["<after-the-break@dinward>", "<left-behind@dinward>"];
    const arrived = async () =>
      (await app.mailbox.mails({ to: officer.email }))
        .map(({ messageId }) => messageId ?? "")
        .filter((id) => left.includes(id))
        .toSorted();
    await until(
      async () => ((await arrived()).length >= left.length ? true : undefined),
      "the mails left behind",
    );
    const sent = async () => {
      const { rows } = await owner.query(
        "SELECT count(*)::int AS count FROM notices WHERE message_id = ANY ($1) AND state = 'sent'",
        [left],
      );
      return rows[0].count === left.length ? true : undefined;
    };
    await until(sent, "both notices to be marked as sent");
    expect(await arrived()).toEqual(left);
  }, 180_000);

  test("SIGTERM lets requests end and releases jobs", async () => {
    app.web.signal("SIGTERM");
    expect(await app.web.ended).toBe(0);
    const answer = await fetch(`http://127.0.0.1:${secondPort}/readyz`);
    expect(answer.status).toBe(200);
  });
});
