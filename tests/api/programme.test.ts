import { describe, expect, test } from "vitest";
import {
  buildArea,
  buildDay,
  buildInstrument,
  buildJob,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const settings = {
  effectiveFrom: "2026-01-01",
  governingRuleSet: "uk-2005",
  comparisonRuleSets: ["niosh-rel"],
};
const level = {
  metric: { kind: "laeq" },
  levelDb: 91.4,
  grade: "task-level",
  effectiveFrom: "2026-01-01",
  reason: "measured again",
};
const meter = {
  criterionLevelDb: 90,
  exchangeRateDb: 5,
  thresholdDb: 80,
  weighting: "A",
  response: "slow",
};

describeEndpoint({
  route: "GET /sites",
  as: "auditor",
  not: "worker",
  event: null,
  bad: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/sites" }),
});
describeEndpoint({
  route: "GET /sites/:id",
  as: "supervisor",
  not: "worker",
  event: null,
  bad: { path: "x" },
  call: async (site) => ({ method: "get", path: `/sites/${site.id}` }),
});
describeEndpoint({
  route: "POST /sites",
  as: "administrator",
  not: "officer",
  event: "create-site",
  namesNothing: true,
  bad: { body: { timeZone: "Atlantis/Centre" } },
  badField: "timeZone",
  call: async () => ({
    method: "post",
    path: "/sites",
    body: { name: "Werk Süd 🔧", timeZone: "Europe/Berlin", settings },
  }),
});
describeEndpoint({
  route: "PUT /sites/:id",
  as: "administrator",
  not: "officer",
  event: "change-site",
  bad: { body: { noticeDelayMin: -1 } },
  badField: "noticeDelayMin",
  call: async (site) => ({
    method: "put",
    path: `/sites/${site.id}`,
    revision: 1,
    body: { name: "Renamed", timeZone: "America/Chicago", language: "de", noticeDelayMin: 0 },
  }),
});
describeEndpoint({
  route: "POST /sites/:id/settings",
  as: "officer",
  not: "administrator",
  event: "add-site-settings",
  bad: { body: { comparisonRuleSets: ["niosh-rel", "niosh-rel"] } },
  badField: "comparisonRuleSets.1",
  call: async (site) => ({
    method: "post",
    path: `/sites/${site.id}/settings`,
    body: { ...settings, reason: "the rules of the site changed" },
  }),
});
describeEndpoint({
  route: "GET /areas",
  as: "supervisor",
  not: "administrator",
  event: null,
  bad: { path: "?siteId=x" },
  namesNothing: true,
  call: async (site) => {
    await buildArea({ site });
    return { method: "get", path: "/areas" };
  },
});
describeEndpoint({
  route: "POST /areas",
  as: "officer",
  not: "supervisor",
  event: "create-area",
  bad: { body: { zone: "triple" } },
  badField: "zone",
  call: async (site) => ({
    method: "post",
    path: "/areas",
    body: { siteId: site.id, name: "Test cell", zone: "double" },
  }),
});
describeEndpoint({
  route: "PUT /areas/:id",
  as: "officer",
  not: "auditor",
  event: "change-area",
  bad: { body: { name: "  " } },
  badField: "name",
  call: async (site) => {
    const area = await buildArea({ site });
    return {
      method: "put",
      path: `/areas/${area.id}`,
      revision: 1,
      body: { siteId: site.id, name: "Fettling", zone: "single" },
    };
  },
});
describeEndpoint({
  route: "GET /tasks",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "?siteId=x" },
  namesNothing: true,
  call: async (site) => {
    await buildTask({ site });
    return { method: "get", path: "/tasks" };
  },
});
describeEndpoint({
  route: "GET /tasks/:id",
  as: "supervisor",
  not: "worker",
  event: null,
  bad: { path: "x" },
  call: async (site) => ({ method: "get", path: `/tasks/${(await buildTask({ site })).id}` }),
});
describeEndpoint({
  route: "POST /tasks",
  as: "officer",
  not: "auditor",
  event: "create-task",
  bad: { body: { level: { ...level, levelDb: 161 } } },
  badField: "level.levelDb",
  call: async (site) => ({
    method: "post",
    path: "/tasks",
    body: { siteId: site.id, name: "Grinding", level: { ...level, reason: null } },
  }),
});
describeEndpoint({
  route: "PUT /tasks/:id",
  as: "officer",
  not: "supervisor",
  event: "change-task",
  bad: { body: { name: "x".repeat(121) } },
  badField: "name",
  call: async (site) => {
    const [task, area] = [await buildTask({ site }), await buildArea({ site })];
    return {
      method: "put",
      path: `/tasks/${task.id}`,
      revision: 1,
      body: { siteId: site.id, areaId: area.id, name: "Grinding" },
    };
  },
});
describeEndpoint({
  route: "POST /tasks/:id/levels",
  as: "officer",
  not: "supervisor",
  event: "add-task-level",
  bad: { body: { effectiveFrom: "0000-01-01" } },
  badField: "effectiveFrom",
  call: async (site) => ({
    method: "post",
    path: `/tasks/${(await buildTask({ site })).id}/levels`,
    body: level,
  }),
});
describeEndpoint({
  route: "GET /jobs",
  as: "supervisor",
  not: "worker",
  event: null,
  bad: { path: "?siteId=x" },
  namesNothing: true,
  call: async (site) => {
    await buildJob({ site });
    return { method: "get", path: "/jobs" };
  },
});
describeEndpoint({
  route: "POST /jobs",
  as: "officer",
  not: "administrator",
  event: "create-job",
  bad: { body: { tasks: [{ taskId: "x", durationMin: 0 }] } },
  badField: "tasks.0.durationMin",
  call: async (site) => {
    const task = await buildTask({ site });
    return {
      method: "post",
      path: "/jobs",
      body: { siteId: site.id, name: "Fettler", tasks: [{ taskId: task.id, durationMin: 420 }] },
    };
  },
});
describeEndpoint({
  route: "PUT /jobs/:id",
  as: "officer",
  not: "supervisor",
  event: "change-job",
  bad: { body: { siteId: crypto.randomUUID() } },
  badField: "siteId",
  call: async (site) => {
    const job = await buildJob({ site });
    return {
      method: "put",
      path: `/jobs/${job.id}`,
      revision: 1,
      body: { siteId: site.id, name: "Fettler", tasks: [] },
    };
  },
});
describeEndpoint({
  route: "GET /instruments",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "?siteId=x" },
  namesNothing: true,
  call: async (site) => {
    await buildInstrument({ site });
    return { method: "get", path: "/instruments" };
  },
});
describeEndpoint({
  route: "POST /instruments",
  as: "officer",
  not: "auditor",
  event: "create-instrument",
  bad: { body: { calibrationDueOn: "2999-01-01" } },
  badField: "calibrationDueOn",
  call: async (site) => ({
    method: "post",
    path: "/instruments",
    body: {
      siteId: site.id,
      kind: "dosimeter",
      class: "2",
      serialNumber: "44-1",
      name: "Dosimeter",
      presets: [meter],
    },
  }),
});
describeEndpoint({
  route: "PUT /instruments/:id",
  as: "officer",
  not: "supervisor",
  event: "change-instrument",
  bad: { body: { class: "3" } },
  badField: "class",
  call: async (site) => {
    const { id, serialNumber } = await buildInstrument({ site });
    return {
      method: "put",
      path: `/instruments/${id}`,
      revision: 1,
      body: {
        siteId: site.id,
        kind: "dosimeter",
        class: "2",
        serialNumber,
        name: "Old dosimeter",
        isArchived: true,
      },
    };
  },
});

const officerAt = async (organizationId: string) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));
const isStale = async (resultId: string) =>
  (
    await select<{ is_stale: boolean }>("SELECT is_stale FROM days WHERE current_result_id = $1", [
      resultId,
    ])
  )[0]?.is_stale;

describe("a site's rules", () => {
  test("the days since their first one are judged again, earlier ones are not", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const [before, after] = [
      await buildDay(worker, "2026-02-28"),
      await buildDay(worker, "2026-03-01"),
    ];
    const client = await officerAt(site.organizationId);
    const answer = await client.post(`/sites/${site.id}/settings`, {
      ...settings,
      effectiveFrom: "2026-03-01",
      reason: "new limits",
    });
    expect(answer.status).toBe(201);
    expect(answer.body.settings).toMatchObject({
      number: 2,
      governingRuleSet: "uk-2005",
      reason: "new limits",
    });
    expect(answer.body.settingsHistory.map(({ number }: { number: number }) => number)).toEqual([
      2, 1,
    ]);
    expect([await isStale(before), await isStale(after)]).toEqual([false, true]);
    const queued = await select("SELECT 1 FROM graphile_worker.jobs WHERE key = $1", [
      `recompute:${site.organizationId}`,
    ]);
    expect(queued).toHaveLength(1);
  });

  test("a rule set that was not in force on the first day is refused by its field", async () => {
    const site = await buildSite();
    const client = await officerAt(site.organizationId);
    const body = {
      ...settings,
      effectiveFrom: "1951-01-01",
      governingRuleSet: "no-such-rule",
      reason: "a mistake",
    };
    const answer = await client.post(`/sites/${site.id}/settings`, body);
    expect(answer.status).toBe(422);
    expect(answer.body.issues[0]).toMatchObject({
      path: ["governingRuleSet"],
      code: "rule-set-not-in-force",
      params: { key: "no-such-rule" },
    });
  });

  test("an officer of another site of the organization may not change them", async () => {
    const site = await buildSite();
    const other = await buildSite({ organizationId: site.organizationId });
    const user = await buildUser({
      organizationId: site.organizationId,
      roles: ["officer"],
      siteId: other.id,
    });
    const answer = await (await signInAs(user)).post(`/sites/${site.id}/settings`, {
      ...settings,
      reason: "not mine",
    });
    expect(answer.status).toBe(404);
  });

  test("an administrator of one site adds no further one", async () => {
    const site = await buildSite();
    const user = await buildUser({
      organizationId: site.organizationId,
      roles: ["administrator"],
      siteId: site.id,
    });
    const answer = await (await signInAs(user)).post("/sites", {
      name: "Annexe",
      timeZone: "UTC",
      settings,
    });
    expect(answer.status).toBe(403);
  });
});

describe("a change names the revision it saw", () => {
  test("a stale one gets 412 with the row as it stands and what was sent, a missing one 428", async () => {
    const site = await buildSite();
    const area = await buildArea({ site, name: "Stores" });
    const client = await officerAt(site.organizationId);
    const body = { siteId: site.id, name: "Old stores" };
    expect((await client.put(`/areas/${area.id}`, body, 1)).body.revision).toBe(2);
    const stale = await client.put(`/areas/${area.id}`, { ...body, name: "New stores" }, 1);
    expect(stale.status).toBe(412);
    expect(stale.body).toMatchObject({
      code: "stale",
      current: { name: "Old stores", revision: 2 },
      yours: { siteId: site.id, name: "New stores" },
    });
    const missing = await client.send({ method: "put", path: `/areas/${area.id}`, body });
    expect(missing.status).toBe(428);
  });

  test("of two at once one is saved and one is stale", async () => {
    const site = await buildSite();
    const area = await buildArea({ site });
    const client = await officerAt(site.organizationId);
    const save = (name: string) => client.put(`/areas/${area.id}`, { siteId: site.id, name }, 1);
    const answers = await Promise.all([save("One"), save("Other")]);
    expect(answers.map(({ status }) => status).toSorted()).toEqual([200, 412]);
  });
});

describe("text", () => {
  test.each(["铃木 健", "Zoë Ó Néill", "مريم", "Şölen 🎧👷🏽‍♀️", "O'Hara; DROP TABLE areas"])(
    "%s is a name",
    async (name) => {
      const site = await buildSite();
      const client = await officerAt(site.organizationId);
      const answer = await client.post("/areas", { siteId: site.id, name });
      expect(answer.body.name).toBe(name);
    },
  );

  test.each([
    ["a NUL", "a\0b"],
    ["half a character", "a\ud83d"],
  ])("%s is refused by its field", async (_, name) => {
    const site = await buildSite();
    const client = await officerAt(site.organizationId);
    const answer = await client.post("/areas", { siteId: site.id, name });
    expect(answer.status).toBe(422);
    expect(answer.body.issues[0]).toMatchObject({ path: ["name"], code: "text-unreadable" });
  });

  test("a name that is taken is refused by its field", async () => {
    const site = await buildSite();
    await buildArea({ site, name: "Stores" });
    const client = await officerAt(site.organizationId);
    const answer = await client.post("/areas", { siteId: site.id, name: "Stores" });
    expect(answer.status).toBe(422);
    expect(answer.body.issues[0]).toMatchObject({ path: ["name"], code: "name-taken" });
  });
});

describe("tasks and areas", () => {
  test("a level is corrected by the next number; the latest one on or before today is in force", async () => {
    const site = await buildSite();
    const task = await buildTask({ site, levelDb: 88 });
    const client = await officerAt(site.organizationId);
    await client.post(`/tasks/${task.id}/levels`, {
      ...level,
      effectiveFrom: daysFromToday(30),
      levelDb: 70,
    });
    const sent = {
      ...level,
      effectiveFrom: "2020-01-01",
      levelDb: 89.25,
      peak: { levelDb: 131, weighting: "C" },
      octaveBandsDb: [null, 80, 81, 82, 83, 84, 85, 86],
      samplesDb: [88.5, 90],
    };
    // With the A-weightings of IEC 61672-1, Table 3, the bands add up to 91.2, two decibels away.
    for (const path of [`/tasks/${task.id}/levels/preview`, `/tasks/${task.id}/levels`]) {
      const asked = await client.post(path, sent);
      expect(asked.status).toBe(422);
      expect(asked.body.issues).toMatchObject([
        {
          path: ["levelDb"],
          code: "level-off-bands",
          params: { foundDb: expect.closeTo(91.2, 1), offDb: expect.closeTo(2, 1) },
        },
      ]);
    }
    const answer = await client.post(`/tasks/${task.id}/levels`, {
      ...sent,
      acceptedDoubts: ["level-off-bands"],
    });
    expect(answer.body.level).toMatchObject({
      number: 3,
      levelDb: 89.25,
      peak: { levelDb: 131, weighting: "C" },
      octaveBandsDb: [null, 80, 81, 82, 83, 84, 85, 86],
      samplesDb: [88.5, 90],
    });
    expect(answer.body.levels.map(({ number }: { number: number }) => number)).toEqual([2, 3, 1]);
    const listed = await client.get(`/tasks?siteId=${site.id}`);
    expect(listed.body.rows[0].level.levelDb).toBe(89.25);
  });

  test("a further level needs a reason", async () => {
    const site = await buildSite();
    const task = await buildTask({ site });
    const client = await officerAt(site.organizationId);
    const answer = await client.post(`/tasks/${task.id}/levels`, { ...level, reason: null });
    expect(answer.status).toBe(422);
    expect(answer.body.issues[0]).toMatchObject({ path: ["reason"], code: "reason-needed" });
  });

  test("an area, a task and a job stay at their site, and take only its parts", async () => {
    const site = await buildSite();
    const other = await buildSite({ organizationId: site.organizationId });
    const [area, task] = [await buildArea({ site: other }), await buildTask({ site: other })];
    const client = await officerAt(site.organizationId);
    const codes = [
      await client.post("/tasks", { siteId: site.id, name: "Riveting", areaId: area.id }),
      await client.put(`/tasks/${task.id}`, { siteId: site.id, name: "Riveting" }, 1),
      await client.post("/jobs", {
        siteId: site.id,
        name: "Riveter",
        tasks: [{ taskId: task.id, durationMin: 60 }],
      }),
    ].map(({ body }) => body.issues[0].code);
    expect(codes).toEqual(["area-of-other-site", "site-fixed", "task-of-other-site"]);
  });

  test("a nominal day is replaced as a whole, in its order, and ends within a day", async () => {
    const site = await buildSite();
    const job = await buildJob({ site });
    const [one, two] = [await buildTask({ site }), await buildTask({ site })];
    const client = await officerAt(site.organizationId);
    const body = {
      siteId: site.id,
      name: job.name,
      tasks: [
        { taskId: two.id, durationMin: 30.5 },
        { taskId: one.id, durationMin: 400 },
      ],
    };
    const answer = await client.put(`/jobs/${job.id}`, body, 1);
    expect(answer.body.tasks).toEqual(body.tasks);
    const long = await client.put(
      `/jobs/${job.id}`,
      {
        ...body,
        tasks: [
          { taskId: one.id, durationMin: 1000 },
          { taskId: two.id, durationMin: 441 },
        ],
      },
      2,
    );
    expect(long.body.issues[0]).toMatchObject({
      code: "tasks-longer-than-day",
      params: { overMin: 1 },
    });
  });

  test("another zone moves the days from today on whose shifts have a task there", async () => {
    const site = await buildSite();
    const area = await buildArea({ site });
    const task = await buildTask({ site, areaId: area.id });
    const worker = await buildWorker({ site });
    const [past, now] = [
      await buildDay(worker, daysFromToday(-9)),
      await buildDay(worker, daysFromToday(1)),
    ];
    await buildShift(worker, {
      date: daysFromToday(1),
      tasks: [{ taskId: task.id, durationMin: 60 }],
    });
    const client = await officerAt(site.organizationId);
    await client.put(`/areas/${area.id}`, { siteId: site.id, name: area.name, zone: "double" }, 1);
    expect([await isStale(past), await isStale(now)]).toEqual([false, true]);
  });
});

test("GET /rule-sets gives every rule set to whoever is signed in", async () => {
  const user = await buildUser({ roles: ["worker"] });
  const answer = await (await signInAs(user)).get("/rule-sets");
  expect(answer.status).toBe(200);
  expect(answer.body.rows.map(({ key }: { key: string }) => key)).toContain("eu-2003-10-ec");
});
