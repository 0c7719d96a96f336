import { randomUUID } from "node:crypto";
import request from "supertest";
import { describe, expect, test } from "vitest";
import {
  buildCrew,
  buildJob,
  buildShift,
  buildSite,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  nobody,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";

interface Sent {
  siteId: string;
  lines: readonly string[];
  isDryRun?: boolean;
  fields?: Record<string, string>;
  key?: string;
}

const HEADER = "employee_number,name,hired_on,left_on,job,crew,crew_from";

async function send(
  { headers }: Pick<Client, "headers">,
  { siteId, lines, isDryRun = false, fields = {}, key = randomUUID() }: Sent,
) {
  const sent = request(testApp())
    .post(`/api/roster-imports?siteId=${siteId}&dryRun=${isDryRun}`)
    .set(headers)
    .set("Idempotency-Key", key);
  for (const [name, value] of Object.entries(fields)) sent.field(name, value);
  return sent.attach("file", Buffer.from([HEADER, ...lines].join("\r\n")), "roster.csv");
}

const asRole = async ({ organizationId }: Site, role: "officer" | "auditor") =>
  signInAs(await buildUser({ organizationId, roles: [role] }));

async function buildWorks() {
  const site = await buildSite();
  const job = await buildJob({ site, name: "Fettler" });
  const [stays, moves, leaves, other] = [
    await buildWorker({ site, employeeNumber: "1041", name: "A. Old" }),
    await buildWorker({ site, employeeNumber: "1042", name: "B. Old" }),
    await buildWorker({ site, employeeNumber: "1043", name: "C. Old" }),
    await buildWorker({ site, employeeNumber: "1044", name: "D. Old" }),
  ];
  await buildCrew({ site, name: "Early", members: [stays, moves, leaves] });
  const late = await buildCrew({ site, name: "Late" });
  return { site, job, late, stays, moves, leaves, other, client: await asRole(site, "officer") };
}

const workersAt = (site: Site) =>
  select<{ employee_number: string; name: string; left_on: string | null; job_id: string | null }>(
    "SELECT employee_number, name, left_on::text AS left_on, job_id FROM workers WHERE site_id = $1 ORDER BY employee_number",
    [site.id],
  );
const membershipsOf = (workerId: string) =>
  select<{ name: string; valid: string }>(
    "SELECT c.name, m.valid::text AS valid FROM crew_memberships m JOIN crews c ON c.id = m.crew_id WHERE m.worker_id = $1 ORDER BY lower(m.valid)",
    [workerId],
  );

const today = daysFromToday(0);
const lines = [
  "1041,A. Old,,,,,",
  `1042,B. New,,,Fettler,Late,${today}`,
  `1043,C. Old,,${today},,,`,
  `1050,E. Fresh,${daysFromToday(-2)},,Fettler,Early,`,
];

describe("a roster", () => {
  test("a dry run says who joins, changes and leaves, and stores nothing; the import then does just that, once", async () => {
    const { site, job, moves, client } = await buildWorks();
    const dry = await send(client, { siteId: site.id, lines, isDryRun: true });
    expect(dry.status).toBe(201);
    expect(dry.body).toMatchObject({
      isDryRun: true,
      joiners: 1,
      changed: 1,
      leavers: 1,
      unchanged: 1,
      present: 4,
      asks: [],
      issuesCount: 0,
    });
    expect(dry.body.people).toEqual(
      expect.arrayContaining([
        expect.objectContaining({
          employeeNumber: "1042",
          what: "changes",
          changes: ["name", "job", "crew"],
        }),
        expect.objectContaining({ employeeNumber: "1043", what: "leaves", date: today }),
        expect.objectContaining({ employeeNumber: "1050", what: "joins", date: daysFromToday(-2) }),
      ]),
    );
    expect(await workersAt(site)).toHaveLength(4);

    const key = randomUUID();
    const stored = await send(client, { siteId: site.id, lines, key });
    expect(stored.status).toBe(201);
    const again = await send(client, { siteId: site.id, lines, key });
    expect(again.body).toEqual(stored.body);
    expect(await workersAt(site)).toMatchObject([
      { employee_number: "1041", left_on: null },
      { employee_number: "1042", name: "B. New", job_id: job.id },
      { employee_number: "1043", left_on: today },
      { employee_number: "1044", left_on: null },
      { employee_number: "1050", name: "E. Fresh", job_id: job.id },
    ]);
    expect(await membershipsOf(moves.id)).toEqual([
      { name: "Early", valid: `[2020-01-01,${today})` },
      { name: "Late", valid: `[${today},)` },
    ]);
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1",
      [site.organizationId],
    );
    expect(new Set(events.map(({ action }) => action))).toEqual(
      new Set([
        "create-worker",
        "change-worker",
        "add-crew-member",
        "end-crew-membership",
        "import-roster",
      ]),
    );
  });

  test("one bad line, and nothing is stored: each fault by line and column", async () => {
    const { site, leaves, client } = await buildWorks();
    const foreign = await buildSite({ organizationId: site.organizationId });
    const mover = await buildWorker({ site: foreign, employeeNumber: "9001" });
    await buildCrew({ site: foreign, name: "Foreign", members: [mover] });
    const officerHere = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"], siteId: site.id }),
    );
    // One of those who leave today stands on tomorrow's day.
    await buildShift(leaves, { date: daysFromToday(1) });
    const bad = [
      ...lines,
      "1060,No first day,,,,,",
      "1041,Twice,,,,,",
      "1061,No such job,2026-01-05,,Nobody’s,,",
      "1044,D. Old,,,,Late,",
      "1062,Gone before,2026-01-05,2025-01-05,,,",
      "9001,Of the other site,,,,,",
    ];
    const answer = await send(officerHere, { siteId: site.id, lines: bad });
    expect(answer.status).toBe(422);
    expect(answer.body.code).toBe("import-refused");
    const found = answer.body.report.issues.map(
      ({ line, field, code }: { line: number; field: string; code: string }) => [line, field, code],
    );
    expect(found).toEqual([
      [4, "left_on", "shift-after-leaving"],
      [6, "hired_on", "first-day-needed"],
      [7, "employee_number", "worker-twice"],
      [8, "job", "job-unknown"],
      [9, "crew_from", "crew-day-needed"],
      [10, "left_on", "left-before-hired"],
      [11, "employee_number", "worker-of-another-site"],
    ]);
    expect(await workersAt(site)).toHaveLength(4);
    const moved = await send(client, { siteId: site.id, lines: ["9001,Now here,,,,,"] });
    expect(moved.body.people).toMatchObject([{ what: "changes", changes: ["name", "site"] }]);
    expect(await workersAt(site)).toHaveLength(5);
    // The crew of the site before ends with the day before.
    const [{ valid } = { valid: "" }] = await membershipsOf(mover.id);
    expect(valid).toBe(`[2020-01-01,${today})`);
  });

  test("where more than half would leave it asks, with the count, and takes only that count for an answer", async () => {
    const { site, client } = await buildWorks();
    const order = { siteId: site.id, lines: [lines[0]!], fields: { missingLeftOn: today } };
    const dry = await send(client, { ...order, isDryRun: true });
    expect(dry.body).toMatchObject({ leavers: 3, present: 4, asks: ["half-leave"] });
    const unconfirmed = await send(client, order);
    expect(unconfirmed.status).toBe(409);
    expect(unconfirmed.body).toMatchObject({
      code: "roster-unconfirmed",
      params: { leavers: 3, present: 4 },
    });
    const wrong = await send(client, {
      ...order,
      fields: { ...order.fields, confirmedLeavers: "2" },
    });
    expect(wrong.status).toBe(409);
    expect((await workersAt(site)).filter(({ left_on }) => left_on !== null)).toEqual([]);
    const confirmed = await send(client, {
      ...order,
      fields: { ...order.fields, confirmedLeavers: "3" },
    });
    expect(confirmed.status).toBe(201);
    expect((await workersAt(site)).filter(({ left_on }) => left_on === today)).toHaveLength(3);
    const nothing = await send(client, order);
    expect(nothing.body.code).toBe("nothing-to-do");
  });

  test("who is missing and has worked since then stops it, in the dry run too; crews end with the last day", async () => {
    const { site, moves, leaves, client } = await buildWorks();
    await buildShift(moves, { date: daysFromToday(-1) });
    const order = { siteId: site.id, lines: [lines[0]!, lines[3]!] };
    const leaving = (missingLeftOn: string) => ({
      ...order,
      fields: { missingLeftOn, confirmedLeavers: "3" },
    });
    for (const isDryRun of [true, false]) {
      const early = await send(client, { ...leaving(daysFromToday(-2)), isDryRun });
      expect(early.status).toBe(422);
      expect(early.body.issues).toMatchObject([
        {
          path: ["missingLeftOn"],
          code: "missing-worked-after",
          params: { name: "B. Old", lastOn: daysFromToday(-1), others: 0 },
        },
      ]);
    }
    expect((await workersAt(site)).filter(({ left_on }) => left_on !== null)).toEqual([]);
    expect((await send(client, leaving(daysFromToday(-1)))).status).toBe(201);
    for (const { id } of [moves, leaves])
      expect(await membershipsOf(id)).toEqual([{ name: "Early", valid: `[2020-01-01,${today})` }]);
  });

  test("the last administrator among the leavers: it asks, and the sign-in stays", async () => {
    const { site, leaves, client } = await buildWorks();
    const administrator = await buildUser({
      organizationId: site.organizationId,
      roles: ["administrator", "worker"],
      workerId: leaves.id,
    });
    const order = { siteId: site.id, lines: [lines[2]!] };
    const dry = await send(client, { ...order, isDryRun: true });
    expect(dry.body.asks).toEqual(["last-administrator-leaves"]);
    expect((await send(client, order)).body.code).toBe("roster-unconfirmed");
    await send(client, { ...order, fields: { confirmedLeavers: "1" } });
    expect((await workersAt(site))[2]).toMatchObject({ left_on: today });
    expect((await (await signInAs(administrator)).get("/users")).status).toBe(200);
  });

  test("who may: 401, another organization's site 404, an auditor 403, no CSV 422", async () => {
    const { site, client } = await buildWorks();
    const sent = { siteId: site.id, lines };
    expect((await send(nobody, sent)).status).toBe(401);
    expect((await send(await asRole(await buildSite(), "officer"), sent)).status).toBe(404);
    expect((await send(await asRole(site, "auditor"), sent)).status).toBe(403);
    const bad = await send(client, { ...sent, fields: { missingLeftOn: "yesterday" } });
    expect(bad.status).toBe(422);
    expect(bad.body.issues).toMatchObject([{ path: ["missingLeftOn"] }]);
    const template = await client.get("/roster-imports/template.csv");
    expect(template.text).toContain("employee_number,name,hired_on,left_on");
  });
});
