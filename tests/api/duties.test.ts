import request from "supertest";
import { describe, expect, test } from "vitest";
import {
  buildArea,
  buildCrew,
  buildDay,
  buildFinding,
  buildInstrument,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  nobody,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";
import { describeEndpoint } from "./five-cases";

describeEndpoint({
  route: "GET /duties",
  as: "auditor",
  not: "worker",
  event: null,
  namesNothing: true,
  bad: { path: "?kind=some" },
  call: async (site) => {
    await buildFinding({ site, dueOn: daysFromToday(-1) });
    return { method: "get", path: "/duties" };
  },
});

const as = async ({ organizationId }: Site, role: "officer" | "supervisor" | "auditor") =>
  signInAs(await buildUser({ organizationId, roles: [role] }));

for (const [route, event, status] of [
  ["POST /me/calendar", "make-calendar-feed", 201],
  ["POST /me/calendar/end", null, 200],
] as const)
  describeEndpoint({
    route,
    as: "auditor",
    not: "worker",
    event,
    status,
    namesNothing: true,
    bad: null,
    call: async () => ({ method: "post", path: route.split(" ")[1] ?? "", body: {} }),
  });
describeEndpoint({
  route: "GET /me/calendar",
  as: "supervisor",
  not: "administrator",
  event: null,
  namesNothing: true,
  bad: null,
  call: async () => ({ method: "get", path: "/me/calendar" }),
});

interface Item {
  kind: string;
  dueOn: string;
  isOverdue: boolean;
  worker: { id: string } | null;
  what: string | null;
  targetId: string;
}

describe("what is due", () => {
  test("of every kind, worst first, page by page and by days", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const worker = await buildWorker({ site });
    const finding = await buildFinding({ site, workerId: worker.id, dueOn: daysFromToday(-9) });
    await buildFinding({
      site,
      workerId: worker.id,
      kind: "no-protector",
      state: "done",
      dueOn: daysFromToday(-9),
    });
    const measure = (facts: object) =>
      insert("finding_measures", {
        organizationId,
        findingId: finding,
        control: "engineer",
        what: "Enclose the pump",
        ...facts,
      });
    await measure({ plannedOn: daysFromToday(4) });
    await measure({ plannedOn: daysFromToday(3), doneOn: daysFromToday(-1) });
    const instrument = await buildInstrument({ site, calibrationDueOn: daysFromToday(12) });
    const area = await buildArea({ site });
    const task = await buildTask({ site, areaId: area.id });
    const change = (facts: object) =>
      insert("workplace_changes", {
        organizationId,
        siteId: site.id,
        kind: "machine",
        what: "Second press",
        ...facts,
      });
    const changed = await change({ taskId: task.id, happenedOn: daysFromToday(-6) });
    await change({ taskId: task.id, happenedOn: "2019-01-01", what: "Measured since" });
    await buildDay(worker, daysFromToday(-7), {
      criteria: [
        {
          criterionId: "lower-action-training",
          verdict: "over",
          isClear: true,
          levelDb: 84,
          dosePct: null,
          bound: "exact",
          reason: null,
        },
      ],
    });
    const client = await as(site, "officer");
    const all = await client.get("/duties?limit=200");
    const items = all.body.rows as Item[];
    expect(items.map(({ kind }) => kind)).toEqual([
      "finding",
      "training",
      "monitoring",
      "measure",
      "calibration",
    ]);
    expect(items).toMatchObject([
      { targetId: finding, dueOn: daysFromToday(-9), isOverdue: true, worker: { id: worker.id } },
      { targetId: worker.id, dueOn: daysFromToday(-7), isOverdue: true },
      { targetId: changed, what: "Second press", isOverdue: true },
      { targetId: finding, what: "Enclose the pump", isOverdue: false },
      { targetId: instrument.id, what: expect.any(String), isOverdue: false },
    ]);
    const first = await client.get("/duties?limit=3");
    const second = await client.get(
      `/duties?limit=3&cursor=${encodeURIComponent(first.body.next)}`,
    );
    expect([...first.body.rows, ...second.body.rows]).toEqual(items);
    const span = await client.get(`/duties?from=${daysFromToday(-7)}&to=${daysFromToday(4)}`);
    expect(span.body.rows.map(({ kind }: Item) => kind)).toEqual([
      "training",
      "monitoring",
      "measure",
    ]);
    expect((await client.get("/duties?kind=measure")).body.rows).toHaveLength(1);
  });

  test("a supervisor sees what concerns the own crew, and no one else's", async () => {
    const site = await buildSite();
    const [own, other] = [await buildWorker({ site }), await buildWorker({ site })];
    const supervisor = await buildUser({
      organizationId: site.organizationId,
      roles: ["supervisor"],
    });
    await buildCrew({ site, members: [own], supervisors: [supervisor] });
    const ownFinding = await buildFinding({ site, workerId: own.id, dueOn: daysFromToday(1) });
    await buildFinding({ site, workerId: other.id, dueOn: daysFromToday(1) });
    const client = await signInAs(supervisor);
    expect((await client.get("/duties")).body.rows).toMatchObject([{ targetId: ownFinding }]);
  });
});

describe("a private calendar address", () => {
  const pathOf = (address: string) => new URL(address).pathname.replace(/^\/api/, "");

  test("gives its person's duties to whoever has it, is not sent again unchanged, and ends", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site, name: "R. Szabó" });
    await buildFinding({ site, workerId: worker.id, kind: "no-protector", dueOn: "2026-11-30" });
    const client = await as(site, "officer");
    const made = await client.post("/me/calendar", {});
    const path = pathOf(made.body.address);
    const read = await nobody.send({ method: "get", path });
    expect(read.status).toBe(200);
    expect(read.headers["content-type"]).toContain("text/calendar");
    expect(read.text).toContain("DTSTART;VALUE=DATE:20261130\r\n");
    expect(read.text).toContain("SUMMARY:No protector: R. Szabó\r\n");
    const again = await request(testApp())
      .get(`/api${path}`)
      .set("if-none-match", read.headers.etag ?? "");
    expect(again.status).toBe(304);

    const other = await client.post("/me/calendar", {});
    expect((await nobody.send({ method: "get", path })).status).toBe(404);
    const otherPath = pathOf(other.body.address);
    expect((await nobody.send({ method: "get", path: otherPath })).status).toBe(200);
    expect((await client.post("/me/calendar/end", {})).body).toEqual({ madeAt: null });
    expect((await nobody.send({ method: "get", path: otherPath })).status).toBe(404);
    const kept = await select("SELECT 1 FROM calendar_feeds WHERE secret_hash = $1", [
      Buffer.from(other.body.address),
    ]);
    expect(kept).toEqual([]);
  });

  test("ends with the person's roles; a made-up one is nowhere", async () => {
    const site = await buildSite();
    const user = await buildUser({ organizationId: site.organizationId, roles: ["officer"] });
    const made = await (await signInAs(user)).post("/me/calendar", {});
    const path = pathOf(made.body.address);
    await select("UPDATE role_grants SET revoked_at = now() WHERE user_id = $1", [user.id]);
    expect((await nobody.send({ method: "get", path })).status).toBe(404);
    expect(
      (await nobody.send({ method: "get", path: `/calendar/${"a".repeat(54)}.ics` })).status,
    ).toBe(404);
    expect((await nobody.send({ method: "get", path: "/calendar/none.ics" })).status).toBe(404);
  });
});
