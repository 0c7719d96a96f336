import { describe, expect, test } from "vitest";
import { hashCode } from "../../server/auth/routes";
import {
  buildArea,
  buildAssignment,
  buildCrew,
  buildDay,
  buildJob,
  buildProtector,
  buildShift,
  buildSite,
  buildSupervisorOf,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const workerBody = (site: Site) => ({
  siteId: site.id,
  employeeNumber: "5501",
  name: "Anneke Ruhl",
  hiredOn: "2024-02-01",
});

describeEndpoint({
  route: "GET /workers",
  as: "officer",
  not: "administrator",
  event: null,
  bad: { path: "?cursor=garbage" },
  badField: "cursor",
  namesNothing: true,
  call: async (site) => {
    await buildWorker({ site });
    return { method: "get", path: "/workers" };
  },
});
describeEndpoint({
  route: "GET /worker-names",
  as: "administrator",
  not: "auditor",
  event: null,
  bad: { path: `&search=${"x".repeat(101)}` },
  namesNothing: true,
  call: async (site) => {
    await buildWorker({ site });
    return { method: "get", path: "/worker-names?search=worker" };
  },
});
describeEndpoint({
  route: "GET /workers/:id",
  as: "auditor",
  not: "administrator",
  event: null,
  bad: { path: "x" },
  call: async (site) => ({ method: "get", path: `/workers/${(await buildWorker({ site })).id}` }),
});
describeEndpoint({
  route: "POST /workers",
  as: "officer",
  not: "supervisor",
  event: "create-worker",
  bad: { body: { hiredOn: daysFromToday(400) } },
  badField: "hiredOn",
  call: async (site) => ({
    method: "post",
    path: "/workers",
    body: { ...workerBody(site), jobId: (await buildJob({ site })).id },
  }),
});
describeEndpoint({
  route: "PUT /workers/:id",
  as: "officer",
  not: "auditor",
  event: "change-worker",
  bad: { body: { leftOn: "2023-01-01" } },
  badField: "leftOn",
  call: async (site) => ({
    method: "put",
    path: `/workers/${(await buildWorker({ site })).id}`,
    revision: 1,
    body: workerBody(site),
  }),
});
describeEndpoint({
  route: "POST /workers/:id/sign-in-codes",
  as: "administrator",
  not: "supervisor",
  event: "issue-sign-in-code",
  bad: null,
  call: async (site) => ({
    method: "post",
    path: `/workers/${(await buildWorker({ site })).id}/sign-in-codes`,
  }),
});
describeEndpoint({
  route: "GET /workers/:id/assignments",
  as: "auditor",
  not: "administrator",
  event: null,
  bad: null,
  call: async (site) => {
    const worker = await buildWorker({ site });
    await buildAssignment({ worker });
    return { method: "get", path: `/workers/${worker.id}/assignments` };
  },
});
describeEndpoint({
  route: "POST /workers/:id/assignments",
  as: "officer",
  not: "supervisor",
  event: "assign-protector",
  bad: { body: { toDate: "2025-12-31" } },
  badField: "toDate",
  call: async (site) => {
    const [worker, model] = [
      await buildWorker({ site }),
      await buildProtector({ organizationId: site.organizationId }),
    ];
    return {
      method: "post",
      path: `/workers/${worker.id}/assignments`,
      body: { innerModelId: model.id, fromDate: "2026-01-01" },
    };
  },
});
describeEndpoint({
  route: "POST /assignments/many",
  as: "officer",
  not: "auditor",
  event: "assign-protector",
  bad: { body: { workerIds: [] } },
  badField: "workerIds",
  call: async (site) => {
    const workers = [await buildWorker({ site }), await buildWorker({ site })];
    const model = await buildProtector({ organizationId: site.organizationId });
    const assignment = { innerModelId: model.id, fromDate: "2026-01-01" };
    return {
      method: "post",
      path: "/assignments/many",
      body: { workerIds: workers.map(({ id }) => id), assignment },
    };
  },
});
describeEndpoint({
  route: "PATCH /assignments/:id",
  as: "officer",
  not: "supervisor",
  event: "end-assignment",
  bad: { body: { toDate: "2020-12-31" } },
  badField: "toDate",
  call: async (site) => {
    const assignment = await buildAssignment({ worker: await buildWorker({ site }) });
    return {
      method: "patch",
      path: `/assignments/${assignment.id}`,
      revision: 1,
      body: { toDate: "2026-01-31" },
    };
  },
});

const as = async (organizationId: string, ...roles: ("officer" | "auditor" | "administrator")[]) =>
  signInAs(await buildUser({ organizationId, roles }));
const names = (answer: { body: { rows: { name: string }[] } }) =>
  answer.body.rows.map(({ name }) => name);

describe("the list of workers", () => {
  test("pages through by name without a gap or a double, two of one name included", async () => {
    const site = await buildSite();
    for (const name of ["Cem", "Ada", "Ben", "Ben", "Dora"]) await buildWorker({ site, name });
    const client = await as(site.organizationId, "officer");
    const seen: string[] = [];
    let next: string | null = "";
    while (next !== null) {
      const answer = await client.get(`/workers?limit=2${next ? `&cursor=${next}` : ""}`);
      seen.push(
        ...answer.body.rows.map((row: { id: string; name: string }) => `${row.name} ${row.id}`),
      );
      next = answer.body.next;
    }
    expect(seen.map((entry) => entry.split(" ")[0])).toEqual(["Ada", "Ben", "Ben", "Cem", "Dora"]);
    expect(new Set(seen).size).toBe(5);
  });

  test("carries the last day's figures and the open findings", async () => {
    const site = await buildSite();
    const [worker, task] = [
      await buildWorker({ site, name: "Ada" }),
      await buildTask({ site, name: "Riveting" }),
    ];
    await buildDay(worker, "2026-03-01", { atEarDb: 70 });
    const resultId = await buildDay(worker, "2026-03-02", {
      outsideDb: 91.3,
      atEarDb: 78.25,
      decidingTaskId: task.id,
    });
    const finding = {
      organizationId: site.organizationId,
      siteId: site.id,
      workerId: worker.id,
      kind: "no-protector",
      firstDate: "2026-03-02",
      lastDate: "2026-03-02",
    };
    await insert("findings", { ...finding, state: "new" });
    await insert("findings", {
      ...finding,
      state: "closed",
      closedOn: "2026-03-02",
      closingReason: "given one",
    });
    await buildCrew({ site, name: "Early", members: [worker] });
    const answer = await (await as(site.organizationId, "officer")).get("/workers");
    expect(answer.body.rows[0]).toMatchObject({
      name: "Ada",
      crewName: "Early",
      openFindings: 1,
      lastDay: {
        resultId,
        date: "2026-03-02",
        outsideDb: 91.3,
        atEarDb: 78.25,
        decidingTaskName: "Riveting",
        word: "good",
      },
    });
  });

  test.each([
    ["ruhl", ["Anneke Ruhl"]],
    ["RUHL anne", ["Anneke Ruhl"]],
    ["77_0", ["Odd One"]],
    ["100%", ["Percent 100%"]],
    ["_", ["Odd One"]],
    ["\\", []],
    ["'; --", []],
    ["şölen", ["Şölen Öz"]],
  ])("search for «%s»", async (text, found) => {
    const site = await buildSite();
    await buildWorker({ site, name: "Anneke Ruhl", employeeNumber: "5501" });
    await buildWorker({ site, name: "Odd One", employeeNumber: "77_0" });
    await buildWorker({ site, name: "Percent 100%", employeeNumber: "1001" });
    await buildWorker({ site, name: "Şölen Öz", employeeNumber: "1002" });
    const client = await as(site.organizationId, "officer");
    expect(names(await client.get(`/workers?search=${encodeURIComponent(text)}`))).toEqual(found);
  });

  test("leaves out who has left, unless asked, and keeps to a site and a crew", async () => {
    const site = await buildSite();
    const other = await buildSite({ organizationId: site.organizationId });
    const ada = await buildWorker({ site, name: "Ada" });
    await buildWorker({ site, name: "Ben", leftOn: "2024-01-01" });
    await buildWorker({ site: other, name: "Cem" });
    const crew = await buildCrew({ site, members: [ada] });
    const client = await as(site.organizationId, "auditor");
    expect(names(await client.get("/workers"))).toEqual(["Ada", "Cem"]);
    expect(names(await client.get("/workers?includeLeft=true"))).toEqual(["Ada", "Ben", "Cem"]);
    expect(names(await client.get(`/workers?siteId=${other.id}`))).toEqual(["Cem"]);
    expect(names(await client.get(`/workers?crewId=${crew.id}`))).toEqual(["Ada"]);
  });

  test("shows a supervisor the own crew only, and of a day only what was by that day's membership", async () => {
    const site = await buildSite();
    const [mine, other] = [
      await buildWorker({ site, name: "Mine" }),
      await buildWorker({ site, name: "Other" }),
    ];
    const user = await buildUser({ organizationId: site.organizationId, roles: ["supervisor"] });
    await buildCrew({ site, members: [mine], supervisors: [user], fromDate: "2026-02-01" });
    await buildDay(mine, "2026-01-31");
    const client = await signInAs(user);
    const answer = await client.get("/workers");
    expect(names(answer)).toEqual(["Mine"]);
    expect(answer.body.rows[0].lastDay).toBeNull();
    expect((await client.get(`/workers/${other.id}`)).status).toBe(404);
  });

  test("names are those of who is there; whoever holds records finds who left too, at the site asked for", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const elsewhere = await buildSite({ organizationId });
    const here = await buildWorker({ site, name: "Q. Olmstead" });
    const gone = await buildWorker({ site, name: "A. Olmstead", leftOn: "2026-03-31" });
    await buildWorker({ site: elsewhere, name: "B. Olmstead" });
    const client = await as(organizationId, "officer");
    const found = async (query: string) =>
      (await client.get(`/worker-names?search=olmstead${query}`)).body.rows.map(
        ({ id, leftOn }: { id: string; leftOn: string | null }) => [id, leftOn],
      );
    expect(await found(`&siteId=${site.id}`)).toEqual([[here.id, null]]);
    expect(await found(`&siteId=${site.id}&who=all`)).toEqual([
      [here.id, null],
      [gone.id, "2026-03-31"],
    ]);
    expect(await found("&who=all")).toHaveLength(3);
  });

  test("a worker's day says when its last shift is over; nothing where no hours are known", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    await buildDay(worker, "2026-03-01", { origin: "imported", governingRuleSet: "uk-2005" });
    await buildDay(worker, "2026-03-02");
    await buildShift(worker, { date: "2026-03-02", localStart: "06:00", lengthMin: 120 });
    await buildShift(worker, { date: "2026-03-02", localStart: "22:00", lengthMin: 480 });
    await buildDay(worker, "2026-03-03");
    const client = await as(site.organizationId, "officer");
    const { body } = await client.get(`/workers/${worker.id}/days`);
    expect(
      body.rows.map((day: { date: string; endsAt: string | null }) => [day.date, day.endsAt]),
    ).toEqual([
      ["2026-03-03", null],
      ["2026-03-02", "2026-03-03T06:00:00.000Z"],
      ["2026-03-01", null],
    ]);
  });

  test("a worker sees self and nobody else", async () => {
    const site = await buildSite();
    const [self, other] = [await buildWorker({ site }), await buildWorker({ site })];
    const client = await signInAs(
      await buildUser({
        organizationId: site.organizationId,
        roles: ["worker"],
        workerId: self.id,
      }),
    );
    expect((await client.get(`/workers/${self.id}`)).body).toMatchObject({
      id: self.id,
      can: { change: false, report: true },
    });
    expect((await client.get(`/workers/${other.id}`)).status).toBe(404);
    expect((await client.get(`/workers/${other.id}/assignments`)).status).toBe(404);
  });
});

describe("a worker", () => {
  test("an employee number that is taken is refused by its field; another organization may use it too", async () => {
    const site = await buildSite();
    await buildWorker({ site, employeeNumber: "5501" });
    await buildWorker({ employeeNumber: "5502" });
    const client = await as(site.organizationId, "officer");
    const taken = await client.post("/workers", workerBody(site));
    expect(taken.status).toBe(422);
    expect(taken.body.issues[0]).toMatchObject({
      path: ["employeeNumber"],
      code: "employee-number-taken",
    });
    expect(
      (await client.post("/workers", { ...workerBody(site), employeeNumber: "5502" })).status,
    ).toBe(201);
  });

  test("a double click adds one", async () => {
    const site = await buildSite();
    const client = await as(site.organizationId, "officer");
    const key = crypto.randomUUID();
    const answers = await Promise.all([
      client.post("/workers", workerBody(site), key),
      client.post("/workers", workerBody(site), key),
    ]);
    expect(answers.map(({ status }) => status)).toEqual([201, 201]);
    expect(answers[0]?.body.id).toBe(answers[1]?.body.id);
    const otherBody = await client.post(
      "/workers",
      { ...workerBody(site), name: "Somebody else" },
      key,
    );
    expect(otherBody.body.code).toBe("key-reused");
  });

  test("the reason of a personal requirement is the officer's alone, and stands in no event and no kept answer", async () => {
    const site = await buildSite();
    const secret = "tinnitus since a blast";
    const client = await as(site.organizationId, "officer");
    const body = { ...workerBody(site), personalTargetDb: 75, requirementReason: secret };
    const { id } = (await client.post("/workers", body)).body;
    expect((await client.get(`/workers/${id}`)).body.requirementReason).toBe(secret);
    const changed = await client.put(
      `/workers/${id}`,
      { ...body, requirementReason: `${secret}, left` },
      1,
    );
    expect(changed.body).toMatchObject({ requirementReason: `${secret}, left`, revision: 2 });

    const supervisor = await signInAs(
      await buildSupervisorOf(site, { ...site, id, siteId: site.id, employeeNumber: "5501" }),
    );
    const worker = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["worker"], workerId: id }),
    );
    for (const reader of [await as(site.organizationId, "auditor"), supervisor, worker]) {
      expect((await reader.get(`/workers/${id}`)).body).toMatchObject({
        id,
        personalTargetDb: 75,
        requirementReason: null,
      });
    }
    const kept = await select(
      `SELECT recorded::text AS text FROM audit_values WHERE organization_id = $1
       UNION ALL SELECT coalesce(reply::text, '') FROM idempotency_keys WHERE organization_id = $1`,
      [site.organizationId],
    );
    expect(kept).toHaveLength(3);
    expect(JSON.stringify(kept)).not.toContain("tinnitus");
    expect(JSON.stringify(kept)).toContain("isRequirementReasonChanged");
  });

  test("a reason without a requirement is refused; without a reason the row is gone", async () => {
    const site = await buildSite();
    const client = await as(site.organizationId, "officer");
    const refused = await client.post("/workers", {
      ...workerBody(site),
      requirementReason: "medical",
    });
    expect(refused.body.issues[0]).toMatchObject({
      path: ["requirementReason"],
      code: "reason-without-requirement",
    });
    const { id } = (
      await client.post("/workers", {
        ...workerBody(site),
        mustWear: true,
        requirementReason: "medical",
      })
    ).body;
    await client.put(`/workers/${id}`, workerBody(site), 1);
    expect(
      await select("SELECT 1 FROM worker_requirement_reasons WHERE worker_id = $1", [id]),
    ).toHaveLength(0);
  });

  test("a stricter target moves the days from today on", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    await buildDay(worker, daysFromToday(-5));
    await buildDay(worker, daysFromToday(1));
    const client = await as(site.organizationId, "officer");
    await client.put(`/workers/${worker.id}`, { ...workerBody(site), personalTargetDb: 75 }, 1);
    const days = await select<{ is_stale: boolean }>(
      "SELECT is_stale FROM days WHERE worker_id = $1 ORDER BY date",
      [worker.id],
    );
    expect(days.map(({ is_stale }) => is_stale)).toEqual([false, true]);
  });
});

describe("leaving", () => {
  test("comes on the day of the last shift or later: a shift after it would be nobody's", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    await buildShift(worker, { date: "2026-03-03" });
    const client = await as(site.organizationId, "officer");
    const body = { ...workerBody(site), leftOn: "2026-03-02" };
    const put = (leftOn: string) => client.put(`/workers/${worker.id}`, { ...body, leftOn }, 1);
    const early = await put("2026-03-02");
    expect(early.status).toBe(422);
    expect(early.body.issues).toMatchObject([
      { path: ["leftOn"], code: "shift-after-leaving", params: { lastOn: "2026-03-03" } },
    ]);
    expect((await put("2026-03-03")).status).toBe(200);
  });

  test("ends crew, loan, absence and assignments with it, and takes back what would only begin after it", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const [worker, stays] = [await buildWorker({ site }), await buildWorker({ site })];
    const own = await buildCrew({ site, name: "Own", members: [worker, stays] });
    const other = await buildCrew({ site, name: "Other" });
    const client = await as(site.organizationId, "officer");
    const organizationId = site.organizationId;
    const { id: authorId } = await buildUser({ organizationId, roles: ["supervisor"] });
    const day = daysFromToday;
    const span = { organizationId, workerId: worker.id };
    for (const valid of [`[${day(1)},${day(6)})`, `[${day(8)},${day(10)})`])
      await insert("crew_memberships", { ...span, crewId: other.id, valid, isLoan: true });
    for (const valid of [`[${day(-9)},${day(-7)})`, `[${day(3)},)`])
      await insert("absence_spans", { ...span, crewId: own.id, valid, authorId });
    await buildAssignment({ worker, fromDate: day(-20) });
    const later = await buildTask({ site });
    await buildAssignment({ worker, taskId: later.id, fromDate: day(7) });
    await buildAssignment({ worker: stays, fromDate: day(-20) });
    const body = { ...workerBody(site), leftOn: day(4) };

    expect((await client.put(`/workers/${worker.id}`, body, 1)).status).toBe(200);

    const spans = (table: string, person: { id: string }) =>
      select<{ from: string; to: string | null }>(
        `SELECT lower(valid)::text AS "from", (upper(valid) - 1)::text AS "to" FROM ${table} WHERE worker_id = $1
         ${table === "absence_spans" ? "AND NOT is_struck" : ""} ORDER BY lower(valid)`,
        [person.id],
      );
    expect((await spans("crew_memberships", worker)).map(({ to }) => to)).toEqual([day(4), day(4)]);
    expect(await spans("absence_spans", worker)).toEqual([
      { from: day(-9), to: day(-8) },
      { from: day(3), to: day(4) },
    ]);
    expect(await spans("assignments", worker)).toEqual([
      { from: day(-20), to: day(4) },
      { from: day(7), to: day(7) },
    ]);
    expect((await spans("crew_memberships", stays)).map(({ to }) => to)).toEqual([null]);
    expect((await spans("assignments", stays)).map(({ to }) => to)).toEqual([null]);
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1 ORDER BY id",
      [organizationId],
    );
    expect(events.map(({ action }) => action)).toEqual(
      expect.arrayContaining([
        "change-worker",
        "end-crew-membership",
        "end-loan",
        "take-back-loan",
        "end-absence",
        "end-assignment",
      ]),
    );
  });
});

describe("moving to another site", () => {
  test("ends the crews of the one before, and nothing else", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { organizationId } = site;
    const there = await buildSite({ organizationId, timeZone: "UTC" });
    const [worker, stays] = [await buildWorker({ site }), await buildWorker({ site })];
    await buildCrew({ site, members: [worker, stays] });
    await buildCrew({ site: there, members: [worker] });
    await buildAssignment({ worker });
    const client = await as(organizationId, "officer");
    const moved = await client.put(`/workers/${worker.id}`, { ...workerBody(there) }, 1);
    expect(moved.status).toBe(200);
    const spans = await select<{ siteId: string; workerId: string; to: string | null }>(
      `SELECT c.site_id AS "siteId", m.worker_id AS "workerId", (upper(m.valid) - 1)::text AS "to"
       FROM crew_memberships m JOIN crews c ON c.id = m.crew_id WHERE m.organization_id = $1`,
      [organizationId],
    );
    expect(spans).toHaveLength(3);
    expect(spans.filter(({ to }) => to !== null)).toEqual([
      { siteId: site.id, workerId: worker.id, to: daysFromToday(-1) },
    ]);
    expect(moved.body.assignments).toMatchObject([{ toDate: null }]);
  });
});

describe("a sign-in code", () => {
  test("is made for who has left too: their own record stays theirs", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site, leftOn: "2024-01-01" });
    const client = await as(site.organizationId, "officer");
    const made = await client.post(`/workers/${worker.id}/sign-in-codes`, {});
    expect(made.status).toBe(201);
  });

  test("is shown once, kept as a hash, and ends the one before it", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const client = await as(site.organizationId, "officer");
    const path = `/workers/${worker.id}/sign-in-codes`;
    const [first, second] = [
      (await client.post(path, {})).body,
      (await client.post(path, {})).body,
    ];
    expect(first.code).toMatch(/^[A-HJ-NP-Z2-9]{4}-[A-HJ-NP-Z2-9]{4}-[A-HJ-NP-Z2-9]{4}$/);
    expect(Date.parse(first.expiresAt)).toBeGreaterThan(Date.now() + 29 * 86_400_000);
    const codes = await select<{ code_hash: string; is_over: boolean }>(
      "SELECT code_hash, expires_at <= now() AS is_over FROM sign_in_codes WHERE worker_id = $1 ORDER BY created_at",
      [worker.id],
    );
    expect(codes).toEqual([
      { code_hash: hashCode(first.code), is_over: true },
      { code_hash: hashCode(second.code), is_over: false },
    ]);
  });

  test("a repeated key is refused, and the code stands nowhere", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const client = await as(site.organizationId, "administrator");
    const [path, key] = [`/workers/${worker.id}/sign-in-codes`, crypto.randomUUID()];
    const { code } = (await client.post(path, {}, key)).body;
    expect((await client.post(path, {}, key)).body.code).toBe("exists-already");
    const kept = await select(
      "SELECT reply::text AS text FROM idempotency_keys WHERE key = $1 UNION ALL SELECT recorded::text FROM audit_values WHERE organization_id = $2",
      [key, site.organizationId],
    );
    expect(JSON.stringify(kept)).not.toContain(code);
  });
});

describe("assignments", () => {
  test("a new one ends the open one of its use the day before, and moves the days since", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const worker = await buildWorker({ site });
    const task = await buildTask({ site });
    const [old, model] = [
      await buildAssignment({ worker, fromDate: "2026-01-01" }),
      await buildProtector({ organizationId, name: "Blue muff" }),
    ];
    const ofTask = await buildAssignment({ worker, taskId: task.id, fromDate: "2026-01-01" });
    await buildDay(worker, "2026-02-28");
    await buildDay(worker, "2026-03-01");
    const client = await as(organizationId, "officer");
    const answer = await client.post(`/workers/${worker.id}/assignments`, {
      innerModelId: model.id,
      fromDate: "2026-03-01",
    });
    expect(answer.body).toMatchObject({
      use: "everywhere",
      innerName: "Blue muff",
      fromDate: "2026-03-01",
      toDate: null,
      revision: 1,
    });
    const { rows } = (await client.get(`/workers/${worker.id}/assignments`)).body;
    const found = (id: string) => rows.find((row: { id: string }) => row.id === id);
    expect(found(old.id)).toMatchObject({
      fromDate: "2026-01-01",
      toDate: "2026-02-28",
      revision: 2,
    });
    expect(found(ofTask.id)).toMatchObject({
      toDate: null,
      revision: 1,
      use: "task",
      useName: task.name,
    });
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE subject_id = $1 ORDER BY id",
      [worker.id],
    );
    expect(events.map(({ action }) => action)).toEqual(["end-assignment", "assign-protector"]);
    const days = await select<{ is_stale: boolean }>(
      "SELECT is_stale FROM days WHERE worker_id = $1 ORDER BY date",
      [worker.id],
    );
    expect(days.map(({ is_stale }) => is_stale)).toEqual([false, true]);
  });

  test("one that would overlap a later or a closed one is refused with its dates", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    await buildAssignment({ worker, fromDate: "2026-04-01" });
    const model = await buildProtector({ organizationId: site.organizationId });
    const client = await as(site.organizationId, "officer");
    const answer = await client.post(`/workers/${worker.id}/assignments`, {
      innerModelId: model.id,
      fromDate: "2026-03-01",
    });
    expect(answer.status).toBe(422);
    expect(answer.body.issues[0]).toMatchObject({
      path: ["fromDate"],
      code: "assignments-overlap",
      params: { fromDate: "2026-04-01" },
    });
  });

  test("an archived protector, one without data yet, one use, two different ones, and nobody before being hired", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const worker = await buildWorker({ site, hiredOn: "2026-01-15" });
    const [good, archived, later] = [
      await buildProtector({ organizationId }),
      await buildProtector({ organizationId, isArchived: true }),
      await buildProtector({ organizationId, effectiveFrom: "2026-06-01" }),
    ];
    const [task, area] = [await buildTask({ site }), await buildArea({ site })];
    const client = await as(organizationId, "officer");
    const codes = [];
    for (const body of [
      { innerModelId: archived.id },
      { innerModelId: good.id, outerModelId: later.id },
      { innerModelId: good.id, taskId: task.id, areaId: area.id },
      { innerModelId: good.id, outerModelId: good.id },
      { innerModelId: good.id, fromDate: "2026-01-14" },
    ]) {
      const answer = await client.post(`/workers/${worker.id}/assignments`, {
        fromDate: "2026-02-01",
        ...body,
      });
      codes.push(`${answer.status} ${answer.body.issues[0].path} ${answer.body.issues[0].code}`);
    }
    expect(codes).toEqual([
      "422 innerModelId protector-archived",
      "422 outerModelId protector-data-later",
      "422 areaId one-use-only",
      "422 outerModelId same-protector-twice",
      "422 fromDate before-hire",
    ]);
  });

  test("many at once are all or nothing, and say whom it concerns", async () => {
    const site = await buildSite();
    const [one, two, three] = [
      await buildWorker({ site }),
      await buildWorker({ site, hiredOn: "2026-05-01" }),
      await buildWorker({ site }),
    ];
    await buildAssignment({ worker: three, fromDate: "2026-02-01", toDate: "2026-12-31" });
    const model = await buildProtector({ organizationId: site.organizationId });
    const client = await as(site.organizationId, "officer");
    const assignment = { innerModelId: model.id, fromDate: "2026-03-01" };
    const refused = await client.post("/assignments/many", {
      workerIds: [one.id, two.id, three.id],
      assignment,
    });
    expect(refused.status).toBe(422);
    expect(
      refused.body.issues.map((found: { path: unknown[]; code: string }) => [
        found.path,
        found.code,
      ]),
    ).toEqual([
      [["workerIds", 1], "before-hire"],
      [["workerIds", 2], "assignments-overlap"],
    ]);
    expect(
      await select("SELECT 1 FROM assignments WHERE inner_model_id = $1", [model.id]),
    ).toHaveLength(0);
    const twice = await client.post("/assignments/many", {
      workerIds: [one.id, one.id],
      assignment,
    });
    expect(twice.body.issues[0]).toMatchObject({ path: ["workerIds", 1], code: "worker-twice" });
    const foreign = await client.post("/assignments/many", {
      workerIds: [one.id, (await buildWorker()).id],
      assignment,
    });
    expect(foreign.status).toBe(404);
    const done = await client.post("/assignments/many", { workerIds: [one.id], assignment });
    expect(done.body.rows).toHaveLength(1);
    expect(done.body.alreadyHad).toEqual([]);
  });

  test("who has the same for this use already is left as they are, whatever the size", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const [holder, elsewhere, ending] = [
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
    ];
    const model = await buildProtector({ organizationId });
    const task = await buildTask({ site });
    const client = await as(organizationId, "officer");
    const giveOne = async (workerId: string, body: object) => {
      const answer = await client.post(`/workers/${workerId}/assignments`, {
        innerModelId: model.id,
        fromDate: "2026-01-01",
        ...body,
      });
      expect(answer.status).toBe(201);
      return answer.body.id as string;
    };
    const held = await giveOne(holder.id, { size: "M" });
    await giveOne(elsewhere.id, { taskId: task.id });
    await giveOne(ending.id, { toDate: "2026-12-31" });
    const give = (workerIds: string[], more: object = {}) =>
      client.post("/assignments/many", {
        workerIds,
        assignment: { innerModelId: model.id, fromDate: "2026-03-01", ...more },
      });
    // One that ends is not the same; the issue stands at the place in the request.
    const refused = await give([holder.id, ending.id]);
    expect(refused.body.issues).toMatchObject([
      { path: ["workerIds", 1], code: "assignments-overlap" },
    ]);
    const given = await give([holder.id, elsewhere.id]);
    expect(given.status).toBe(201);
    expect(given.body).toMatchObject({
      rows: [{ workerId: elsewhere.id, use: "everywhere" }],
      alreadyHad: [holder.id],
    });
    const again = await give([holder.id, elsewhere.id]);
    expect(again.body.rows).toEqual([]);
    expect(again.body.alreadyHad.toSorted()).toEqual([holder.id, elsewhere.id].toSorted());
    const standing = await select(
      `SELECT id, size, revision, upper_inf(valid) AS "isOpen" FROM assignments WHERE worker_id = $1`,
      [holder.id],
    );
    expect(standing).toEqual([{ id: held, size: "M", revision: 1, isOpen: true }]);
    // Another size is another device: the one before ends.
    expect((await give([holder.id], { size: "L" })).body.alreadyHad).toEqual([]);
  });

  test("an end moved back or forth moves the days between", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const { id } = await buildAssignment({ worker, fromDate: "2026-01-01", toDate: "2026-03-31" });
    for (const date of ["2026-02-10", "2026-02-11", "2026-04-02"]) await buildDay(worker, date);
    const client = await as(site.organizationId, "officer");
    const answer = await client.patch(`/assignments/${id}`, { toDate: "2026-02-10" }, 1);
    expect(answer.body).toMatchObject({ toDate: "2026-02-10", revision: 2 });
    const days = await select<{ is_stale: boolean }>(
      "SELECT is_stale FROM days WHERE worker_id = $1 ORDER BY date",
      [worker.id],
    );
    expect(days.map(({ is_stale }) => is_stale)).toEqual([false, true, true]);
    expect((await client.patch(`/assignments/${id}`, { toDate: "2026-02-12" }, 1)).status).toBe(
      412,
    );
  });

  test("six at once for one worker leave one open one", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const model = await buildProtector({ organizationId: site.organizationId });
    const client = await as(site.organizationId, "officer");
    const send = () =>
      client.post(`/workers/${worker.id}/assignments`, {
        innerModelId: model.id,
        fromDate: "2026-03-01",
      });
    const answers = await Promise.all(Array.from({ length: 6 }, send));
    expect(answers.map(({ status }) => status).toSorted()).toEqual([201, 422, 422, 422, 422, 422]);
  });
});

test("a worker's sign-in follows the language of the record until its owner chose another", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const languageOf = async ({ id }: { id: string }) =>
    (await select<{ language: string }>("SELECT language FROM users WHERE id = $1", [id]))[0]
      ?.language;
  const withSignIn = async (employeeNumber: string) => {
    const worker = await buildWorker({ site });
    const user = await buildUser({ organizationId, roles: ["worker"], workerId: worker.id });
    const setLanguage = (language: string, revision: number) =>
      officer.put(
        `/workers/${worker.id}`,
        { ...workerBody(site), employeeNumber, language },
        revision,
      );
    return { user, setLanguage };
  };
  const follows = await withSignIn("5601");
  await follows.setLanguage("de", 1);
  expect(await languageOf(follows.user)).toBe("de");

  const chose = await withSignIn("5602");
  await (await signInAs(chose.user)).send({
    method: "put",
    path: "/me/settings",
    body: { language: "de" },
  });
  await chose.setLanguage("de", 1);
  await chose.setLanguage("en", 2);
  expect(await languageOf(chose.user)).toBe("de");
});
