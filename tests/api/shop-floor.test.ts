import { describe, expect, test } from "vitest";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import { wearingSeen } from "../../server/queries/own-attenuation";
import {
  buildArea,
  buildAssignment,
  buildCrew,
  buildJob,
  buildProtector,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  daysFromTodayAtSite,
  insert,
  owner,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const SIREN = [null, 60, 70, 80, 95, 92, 80, 70];

const buildSignal = (site: Site) =>
  insert("warning_signals", {
    organizationId: site.organizationId,
    siteId: site.id,
    name: "Crane siren",
    octaveBandsDb: [50, 60, 70, 80, 95, 92, 80, 70],
  });

async function buildRound(site: Site) {
  const { organizationId, id: siteId } = site;
  const worker = await buildWorker({ site });
  const task = await buildTask({ site });
  const seenOn = daysFromToday(-2);
  const id = await insert("wearing_rounds", { organizationId, siteId, seenOn, source: "round" });
  await insert("wearing_looks", {
    organizationId,
    roundId: id,
    workerId: worker.id,
    taskId: task.id,
    seenOn,
    wornCount: 3,
    seenCount: 4,
  });
  return id;
}

async function buildIssue(site: Site) {
  const model = await buildProtector({ organizationId: site.organizationId });
  const worker = await buildWorker({ site });
  const assignment = await buildAssignment({ worker, inner: model });
  return insert("protector_issues", {
    organizationId: site.organizationId,
    siteId: site.id,
    workerId: worker.id,
    modelId: model.id,
    assignmentId: assignment.id,
    issuedOn: daysFromToday(-10),
    offeredModelIds: [model.id],
    wasInstructed: true,
  });
}

describeEndpoint({
  route: "GET /warning-signals",
  as: "supervisor",
  not: "worker",
  event: null,
  namesNothing: true,
  bad: { path: "?siteId=none" },
  call: async (site) => {
    await buildSignal(site);
    return { method: "get", path: "/warning-signals" };
  },
});
describeEndpoint({
  route: "GET /warning-signals/:id",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "-32" },
  call: async (site) => ({ method: "get", path: `/warning-signals/${await buildSignal(site)}` }),
});
describeEndpoint({
  route: "POST /warning-signals",
  as: "officer",
  not: "auditor",
  event: "create-warning-signal",
  bad: { body: { name: "" } },
  badField: "name",
  call: async (site) => ({
    method: "post",
    path: "/warning-signals",
    body: { siteId: site.id, name: "Fire bell", octaveBandsDb: SIREN },
  }),
});
describeEndpoint({
  route: "PUT /warning-signals/:id",
  as: "officer",
  not: "supervisor",
  event: "change-warning-signal",
  bad: { body: { name: "" } },
  badField: "name",
  call: async (site) => ({
    method: "put",
    path: `/warning-signals/${await buildSignal(site)}`,
    revision: 1,
    body: {
      siteId: site.id,
      areaId: (await buildArea({ site })).id,
      name: "Reversing alarm",
      octaveBandsDb: SIREN,
    },
  }),
});
describeEndpoint({
  route: "GET /stock",
  as: "auditor",
  not: "supervisor",
  event: null,
  namesNothing: true,
  bad: { path: "?siteId=none" },
  call: async () => ({ method: "get", path: "/stock" }),
});
describeEndpoint({
  route: "GET /stock/moves",
  as: "auditor",
  not: "worker",
  event: null,
  namesNothing: true,
  bad: { path: "?limit=0" },
  call: async () => ({ method: "get", path: "/stock/moves" }),
});
describeEndpoint({
  route: "GET /stock/replacements",
  as: "officer",
  not: "supervisor",
  event: null,
  namesNothing: true,
  bad: { path: "?limit=0" },
  call: async () => ({ method: "get", path: "/stock/replacements" }),
});
describeEndpoint({
  route: "POST /stock/moves",
  as: "officer",
  not: "auditor",
  event: "enter-stock",
  bad: { body: { movedOn: daysFromToday(5) } },
  badField: "movedOn",
  call: async (site) => ({
    method: "post",
    path: "/stock/moves",
    body: {
      siteId: site.id,
      modelId: (await buildProtector({ organizationId: site.organizationId })).id,
      kind: "received",
      quantity: 20,
      movedOn: daysFromToday(-1),
    },
  }),
});
describeEndpoint({
  route: "POST /issues/:id/replacements",
  as: "officer",
  not: "supervisor",
  event: "change-cushions",
  bad: { body: { changedOn: daysFromToday(-11) } },
  badField: "changedOn",
  call: async (site) => ({
    method: "post",
    path: `/issues/${await buildIssue(site)}/replacements`,
    body: { part: "cushions", changedOn: daysFromToday(-1) },
  }),
});
describeEndpoint({
  route: "GET /wearing-crews",
  as: "officer",
  not: "auditor",
  event: null,
  namesNothing: true,
  bad: { path: "/wearing-crews?date=today" },
  call: async (site) => {
    await buildCrew({ site });
    return { method: "get", path: `/wearing-crews?date=${daysFromToday(0)}` };
  },
});
describeEndpoint({
  route: "GET /crews/:id/wearing-tally",
  as: "officer",
  not: "auditor",
  event: null,
  bad: { path: "-32" },
  call: async (site) => ({
    method: "get",
    path: `/crews/${(await buildCrew({ site, members: [await buildWorker({ site })] })).id}/wearing-tally?date=${daysFromToday(0)}`,
  }),
});
describeEndpoint({
  route: "GET /workers/:id/own-reports",
  as: "officer",
  not: "supervisor",
  event: null,
  bad: { path: "?from=today" },
  call: async (site) => ({
    method: "get",
    path: `/workers/${(await buildWorker({ site })).id}/own-reports?from=${daysFromToday(-5)}`,
  }),
});
describeEndpoint({
  route: "GET /wearing-rounds",
  as: "auditor",
  not: "worker",
  event: null,
  namesNothing: true,
  bad: { path: "?limit=0" },
  call: async (site) => {
    await buildRound(site);
    return { method: "get", path: "/wearing-rounds" };
  },
});
describeEndpoint({
  route: "POST /wearing-rounds",
  as: "officer",
  not: "auditor",
  event: "record-wearing-round",
  bad: { body: { seenOn: daysFromToday(2) } },
  badField: "seenOn",
  call: async (site) => ({
    method: "post",
    path: "/wearing-rounds",
    body: {
      siteId: site.id,
      seenOn: daysFromToday(-1),
      looks: [
        {
          workerId: (await buildWorker({ site })).id,
          taskId: (await buildTask({ site })).id,
          wornCount: 1,
          seenCount: 2,
        },
      ],
    },
  }),
});
describeEndpoint({
  route: "POST /wearing-rounds/:id/strike",
  as: "officer",
  not: "supervisor",
  event: "strike-wearing-round",
  status: 200,
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async (site) => ({
    method: "post",
    path: `/wearing-rounds/${await buildRound(site)}/strike`,
    revision: 1,
    body: { reason: "the wrong crew" },
  }),
});

test("what a round saw is the wearing time of a day that says none, until it is struck", async () => {
  const site = await buildSite({ governingRuleSet: "uk-2005" });
  const { organizationId } = site;
  const task = await buildTask({ site, levelDb: 100, metric: { kind: "laeq" } });
  const worker = await buildWorker({ site });
  const protector = await buildProtector({ organizationId, data: { snrDb: 28 } });
  await insert("task_levels", {
    organizationId,
    taskId: task.id,
    number: 2,
    effectiveFrom: "2020-01-01",
    metric: JSON.stringify({ kind: "laeq" }),
    levelDb: 100,
    lcMinusLaDb: 2,
    grade: "task-level",
    reason: "with its C-weighted level",
  });
  await buildAssignment({ worker, inner: protector });
  const crew = await buildCrew({ site, members: [worker] });
  const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const date = daysFromToday(-1);
  const saved = await officer.post(`/crews/${crew.id}/day`, {
    date,
    rows: [
      {
        kind: "worked",
        workerId: worker.id,
        localStart: "06:00",
        lengthMin: 480,
        tasks: [{ taskId: task.id, durationMin: 480 }],
      },
    ],
  });
  expect(saved.status).toBe(201);
  const figures = async () => {
    await recomputeStaleDays(organizationId);
    const [found] = await select<{ verdict: string; db: number | null }>(
      `SELECT r.verdict_at_ear AS verdict, r.at_ear_db AS db FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.worker_id = $1`,
      [worker.id],
    );
    return found;
  };
  expect(await figures()).toMatchObject({ verdict: "not-assessed" });
  const round = await officer.post("/wearing-rounds", {
    siteId: site.id,
    seenOn: date,
    looks: [{ workerId: worker.id, taskId: task.id, wornCount: 9, seenCount: 10 }],
  });
  expect(round.status).toBe(201);
  // SNR off LC, less the United Kingdom's 4 dB: 100 + 2 − 28 + 4 = 78 while worn; a tenth of the time at 100.
  expect((await figures())?.db).toBeCloseTo(10 * Math.log10(0.9 * 10 ** 7.8 + 0.1 * 10 ** 10), 6);
  const struck = await officer.send({
    method: "post",
    path: `/wearing-rounds/${round.body.id}/strike`,
    body: { reason: "another crew was meant" },
    revision: round.body.revision,
  });
  expect(struck.status).toBe(200);
  expect(await figures()).toMatchObject({ verdict: "not-assessed" });
});

test("a supervisor makes rounds among the people of the own crew on that date, and among no others", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const user = await buildUser({ organizationId, roles: ["supervisor"] });
  const task = await buildTask({ site, levelDb: 95 });
  const [before, now] = [await buildWorker({ site }), await buildWorker({ site })];
  const given = daysFromToday(-10);
  const past = await buildCrew({
    site,
    members: [before],
    supervisors: [user],
    toDate: given,
  });
  const present = await buildCrew({ site, members: [now], supervisors: [user], fromDate: given });
  const supervisor = await signInAs(user);
  const crewsOn = async (date: string) =>
    (await supervisor.get(`/wearing-crews?date=${date}`)).body.rows.map(
      ({ id }: { id: string }) => id,
    );
  const [earlier, today] = [daysFromToday(-20), daysFromToday(0)];
  expect(await crewsOn(earlier)).toEqual([past.id]);
  expect(await crewsOn(today)).toEqual([present.id]);
  const tallyStatus = async (crewId: string, date: string) =>
    (await supervisor.get(`/crews/${crewId}/wearing-tally?date=${date}`)).status;
  expect(await tallyStatus(past.id, earlier)).toBe(200);
  expect(await tallyStatus(past.id, today)).toBe(404);
  expect(await tallyStatus(present.id, earlier)).toBe(404);
  const enter = async (workerId: string, seenOn: string) =>
    (
      await supervisor.post("/wearing-rounds", {
        siteId: site.id,
        seenOn,
        looks: [{ workerId, taskId: task.id, wornCount: 1, seenCount: 1 }],
      })
    ).status;
  expect(await enter(before.id, earlier)).toBe(201);
  expect(await enter(before.id, today)).toBe(404);
  expect(await enter(now.id, earlier)).toBe(404);
});

test("a worker says for themselves how long it was worn, and nothing of anybody else", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const [own, other] = [await buildWorker({ site }), await buildWorker({ site })];
  const task = await buildTask({ site, levelDb: 95 });
  const worker = await signInAs(
    await buildUser({ organizationId, roles: ["worker"], workerId: own.id }),
  );
  const say = async (workerId: string, source: string) =>
    (
      await worker.post("/wearing-rounds", {
        siteId: site.id,
        seenOn: daysFromToday(-1),
        source,
        looks: [{ workerId, taskId: task.id, wornCount: 3, seenCount: 4 }],
      })
    ).status;
  expect(await say(own.id, "round")).toBe(403);
  expect(await say(other.id, "own-report")).toBe(404);
  expect(await say(own.id, "own-report")).toBe(201);
  const [look] = await select<{ source: string; workerId: string }>(
    `SELECT o.source, l.worker_id AS "workerId" FROM wearing_looks l JOIN wearing_rounds o ON o.id = l.round_id WHERE o.organization_id = $1`,
    [organizationId],
  );
  expect(look).toEqual({ source: "own-report", workerId: own.id });
});

describe("what a worker says anew of the same day and task", () => {
  async function saidTwice() {
    const site = await buildSite();
    const { organizationId } = site;
    const own = await buildWorker({ site });
    const [task, other] = [
      await buildTask({ site, levelDb: 95 }),
      await buildTask({ site, levelDb: 95 }),
    ];
    const worker = await signInAs(
      await buildUser({ organizationId, roles: ["worker"], workerId: own.id }),
    );
    const date = daysFromToday(-1);
    const say = async (answers: [string, number][], note = "") =>
      worker.post("/wearing-rounds", {
        siteId: site.id,
        seenOn: date,
        source: "own-report",
        note,
        looks: answers.map(([taskId, wornCount]) => ({
          workerId: own.id,
          taskId,
          wornCount,
          seenCount: 4,
        })),
      });
    const first = await say([
      [task.id, 1],
      [other.id, 4],
    ]);
    expect(first.status).toBe(201);
    const standing = async () =>
      (await worker.get(`/workers/${own.id}/own-reports?from=${daysFromToday(-3)}`)).body.rows;
    const seen = async (taskId: string) => {
      const [found] = await select<{ seen: [number, number] }>(
        `SELECT ${wearingSeen("$1::uuid", "$2::uuid", "$3::date")} AS seen`,
        [own.id, taskId, daysFromToday(0)],
      );
      return found?.seen;
    };
    return { site, own, task, other, worker, say, first, standing, seen };
  }

  test("a share that the shift leaves blank names the reports and rounds that it comes from", async () => {
    const { site, own, task, other, say, worker } = await saidTwice();
    const { organizationId } = site;
    await say([[task.id, 3]]);
    const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    const round = await officer.post("/wearing-rounds", {
      siteId: site.id,
      seenOn: daysFromToday(-2),
      looks: [{ workerId: own.id, taskId: task.id, wornCount: 9, seenCount: 10 }],
    });
    expect(round.status).toBe(201);
    const model = await buildProtector({ organizationId });
    await buildAssignment({ worker: own, inner: model });
    const date = daysFromToday(-1);
    const crew = await buildCrew({ site, members: [own] });
    const saved = await officer.post(`/crews/${crew.id}/day`, {
      date,
      rows: [
        {
          kind: "worked",
          workerId: own.id,
          localStart: "06:00",
          lengthMin: 120,
          tasks: [
            { taskId: task.id, durationMin: 60 },
            { taskId: other.id, durationMin: 60, wornPct: 80 },
          ],
        },
      ],
    });
    expect(saved.status).toBe(201);
    await recomputeStaleDays(organizationId);
    const { body } = await worker.get(`/workers/${own.id}/days/${date}`);
    // Nobody looked at the other task: that its share differs is the worker's own word.
    expect(body.wearingSeen).toMatchObject([{ taskId: other.id, from: "own-reports" }]);
    const [first, second] = body.input.shifts[0].tasks;
    expect(first).toMatchObject({
      wornPct: (100 * 12) / 14,
      wornFrom: {
        how: "looks",
        looks: [
          {
            source: "round",
            roundId: round.body.id,
            lastOn: daysFromToday(-2),
            roundCount: 1,
            wornCount: 9,
            seenCount: 10,
          },
          { source: "own-report", lastOn: date, roundCount: 1, wornCount: 3, seenCount: 4 },
        ],
      },
    });
    expect(second.wornFrom).toEqual({ how: "stated" });
    // Who said it is told, too, which of it the shift states itself.
    const said = await worker.get(`/workers/${own.id}/own-reports?from=${date}`);
    expect(
      new Map(
        said.body.rows.map((one: { taskId: string; statedPct: number | null }) => [
          one.taskId,
          one.statedPct,
        ]),
      ),
    ).toEqual(
      new Map([
        [task.id, null],
        [other.id, 80],
      ]),
    );
    expect(body.sources[round.body.id]).toEqual({ label: expect.any(String), note: null });
  });

  test("takes the place of what was said before, which stays on record with its event", async () => {
    const { site, task, other, say, first, standing, seen } = await saidTwice();
    expect(await seen(task.id)).toEqual([1, 4]);
    const second = await say([[task.id, 3]], "it was the hot day");
    expect(second.status).toBe(201);
    expect(await seen(task.id)).toEqual([3, 4]);
    expect(await seen(other.id)).toEqual([4, 4]);
    const rows = await standing();
    expect(rows).toHaveLength(2);
    expect(rows).toContainEqual(
      expect.objectContaining({
        taskId: task.id,
        wornCount: 3,
        note: "it was the hot day",
        isByWorker: true,
        canChange: true,
        changeableUntil: daysFromTodayAtSite(14),
      }),
    );
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const rounds = (await officer.get("/wearing-rounds")).body.rows as {
      id: string;
      looks: { taskId: string; isReplaced: boolean }[];
    }[];
    const looks = rounds.find(({ id }) => id === first.body.id)?.looks ?? [];
    expect(looks).toHaveLength(2);
    expect(looks.filter(({ isReplaced }) => isReplaced)).toMatchObject([{ taskId: task.id }]);
    const events = await select<{ subjectId: string }>(
      `SELECT subject_id AS "subjectId" FROM audit_events WHERE organization_id = $1 AND action = 'replace-own-report'`,
      [site.organizationId],
    );
    expect(events).toEqual([{ subjectId: first.body.id }]);
    // Struck by the officer, it gives its place back.
    const struck = await officer.send({
      method: "post",
      path: `/wearing-rounds/${second.body.id}/strike`,
      body: { reason: "said of another day" },
      revision: second.body.revision,
    });
    expect(struck.status).toBe(200);
    expect(await seen(task.id)).toEqual([1, 4]);
  });

  test("is refused once the first was said more than two weeks ago, at the task that it is about", async () => {
    const { site, own, task, say, first, standing } = await saidTwice();
    await owner().query(
      "UPDATE wearing_rounds SET created_at = now() - interval '20 days' WHERE id = $1",
      [first.body.id],
    );
    expect(await standing()).toMatchObject([{ canChange: false }, { canChange: false }]);
    const late = await say([[task.id, 3]]);
    expect(late.status).toBe(422);
    expect(late.body.issues).toMatchObject([
      { path: ["looks", 0, "taskId"], code: "said-long-ago", params: { days: 14 } },
    ]);
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const told = await officer.post("/wearing-rounds", {
      siteId: site.id,
      seenOn: daysFromToday(-1),
      source: "own-report",
      looks: [{ workerId: own.id, taskId: task.id, wornCount: 2, seenCount: 4 }],
    });
    expect(told.status).toBe(201);
    expect(await standing()).toContainEqual(
      expect.objectContaining({ taskId: task.id, wornCount: 2, isByWorker: false }),
    );
  });

  test("is nobody else's to read among workers", async () => {
    const { site, own } = await saidTwice();
    const other = await buildWorker({ site });
    const stranger = await signInAs(
      await buildUser({
        organizationId: site.organizationId,
        roles: ["worker"],
        workerId: other.id,
      }),
    );
    const answer = await stranger.get(`/workers/${own.id}/own-reports?from=${daysFromToday(-3)}`);
    expect(answer.status).toBe(404);
  });
});

test("somebody on loan from another site is seen in the crew that they work in, in the tasks of its site", async () => {
  const here = await buildSite();
  const { organizationId } = here;
  const there = await buildSite({ organizationId });
  const [task, elsewhere] = [
    await buildTask({ site: here, levelDb: 95 }),
    await buildTask({ site: there, levelDb: 95 }),
  ];
  const job = await buildJob({
    site: there,
    tasks: [task, elsewhere].map(({ id: taskId }) => ({ taskId, durationMin: 240 })),
  });
  const lent = await buildWorker({ site: there, jobId: job.id });
  const protector = await buildProtector({ organizationId, data: { snrDb: 28 } });
  await buildAssignment({ worker: lent, inner: protector });
  const crew = await buildCrew({ site: here, members: [lent] });
  const officer = await signInAs(
    await buildUser({ organizationId, roles: ["officer"], siteId: here.id }),
  );
  const date = daysFromToday(-1);
  const tally = await officer.get(`/crews/${crew.id}/wearing-tally?date=${date}`);
  expect(tally.body.workers).toMatchObject([
    {
      id: lent.id,
      taskIds: [task.id],
      protectors: [{ taskId: task.id, name: protector.name }],
    },
  ]);
  const round = await officer.post("/wearing-rounds", {
    siteId: here.id,
    seenOn: date,
    looks: [{ workerId: lent.id, taskId: task.id, wornCount: 1, seenCount: 1 }],
  });
  expect(round.status).toBe(201);
});

test("in a round each task has the protector that is assigned for it", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const [press, saw] = [
    await buildTask({ site, name: "Press", levelDb: 95 }),
    await buildTask({ site, name: "Saw", levelDb: 95 }),
  ];
  const job = await buildJob({
    site,
    tasks: [press, saw].map(({ id: taskId }) => ({ taskId, durationMin: 240 })),
  });
  const worker = await buildWorker({ site, jobId: job.id });
  const [band, plug, muff] = [
    await buildProtector({ organizationId, name: "Sedge band" }),
    await buildProtector({ organizationId, name: "Alder foam" }),
    await buildProtector({ organizationId, name: "Fenmuff" }),
  ];
  await buildAssignment({ worker, inner: band });
  await buildAssignment({ worker, inner: plug, outer: muff, taskId: saw.id });
  const crew = await buildCrew({ site, members: [worker] });
  const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const tally = await officer.get(`/crews/${crew.id}/wearing-tally?date=${daysFromToday(0)}`);
  expect(tally.body.workers[0].protectors).toEqual([
    { taskId: press.id, name: "Sedge band" },
    { taskId: saw.id, name: "Alder foam + Fenmuff" },
  ]);
});

test("a count enters the difference, and cushions are due by the model's interval from the last change", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const model = await buildProtector({ organizationId, data: { cushionsEveryDays: 30 } });
  const move = (kind: string, quantity: number) =>
    officer.post("/stock/moves", {
      siteId: site.id,
      modelId: model.id,
      kind,
      quantity,
      movedOn: daysFromToday(-1),
    });
  await move("received", 20);
  await move("lost", 3);
  const tooMany = await move("lost", 18);
  expect(tooMany.status).toBe(422);
  expect(tooMany.body.issues).toMatchObject([
    { path: ["quantity"], code: "more-than-in-stock", params: { stock: 17 } },
  ]);
  expect((await move("counted", 15)).body).toMatchObject({ quantity: -2 });
  expect((await officer.get("/stock")).body.rows).toMatchObject([{ quantity: 15, part: "device" }]);
  const worker = await buildWorker({ site });
  const assignment = await buildAssignment({ worker, inner: model });
  const issueId = await insert("protector_issues", {
    organizationId,
    siteId: site.id,
    workerId: worker.id,
    modelId: model.id,
    assignmentId: assignment.id,
    issuedOn: daysFromToday(-40),
    offeredModelIds: [model.id],
    wasInstructed: true,
  });
  expect((await officer.get("/stock/replacements")).body.rows).toMatchObject([
    { issueId, part: "cushions", dueOn: daysFromToday(-10) },
  ]);
  await officer.post(`/issues/${issueId}/replacements`, {
    part: "cushions",
    changedOn: daysFromToday(0),
  });
  expect((await officer.get("/stock/replacements")).body.rows).toMatchObject([
    { issueId, dueOn: daysFromToday(30) },
  ]);
});

test("a signal is heard bare and lost under a protector where the noise masks it", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const task = await buildTask({ site, levelDb: null });
  await insert("task_levels", {
    organizationId,
    taskId: task.id,
    number: 1,
    effectiveFrom: "2020-01-01",
    metric: JSON.stringify({ kind: "laeq" }),
    levelDb: 90,
    octaveBandsDb: [80, 80, 80, 80, 80, 80, 80, 80],
    grade: "task-level",
  });
  const id = await buildSignal(site);
  const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const [bare] = (await officer.get(`/warning-signals/${id}`)).body.audibility;
  // 95 dB at 1 kHz over a masked threshold of 80: 15 dB above.
  expect(bare).toMatchObject({ off: { word: "audible", bestBandHz: 1000, aboveDb: 15 }, on: null });
});
