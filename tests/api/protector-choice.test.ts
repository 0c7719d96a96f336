import { expect, test } from "vitest";
import type { GivingPreview, IssueSlip, ProtectorChoiceView } from "../../shared/schemas/choice";
import {
  buildArea,
  buildAssignment,
  buildCrew,
  buildFitTest,
  buildIssue,
  buildJob,
  buildProtector,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

/** All of it at 1 kHz, where the weightings A and C are 0 dB: LC equals LA. */
const at1kHz = (levelDb: number) => [20, 20, 20, 20, levelDb, 20, 20, 20];

const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

describeEndpoint({
  route: "GET /protector-choice",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: { path: "&jobId=none" },
  call: async (site) => ({
    method: "get",
    path: `/protector-choice?taskId=${(await buildTask({ site })).id}`,
  }),
});
describeEndpoint({
  route: "GET /issue-slips",
  as: "officer",
  not: "supervisor",
  event: null,
  bad: { path: ",none" },
  call: async (site) => ({
    method: "get",
    path: `/issue-slips?workerIds=${(await buildWorker({ site })).id}`,
  }),
});

describeEndpoint({
  route: "POST /assignments/many/preview",
  as: "officer",
  not: "auditor",
  event: null,
  status: 200,
  bad: { body: { workerIds: [] } },
  badField: "workerIds",
  call: async (site) => ({
    method: "post",
    path: "/assignments/many/preview",
    body: {
      workerIds: [(await buildWorker({ site })).id],
      assignment: {
        innerModelId: (await buildProtector({ organizationId: site.organizationId })).id,
        fromDate: "2026-01-01",
      },
    },
  }),
});

test("before a group is given a protector: whose usual day changes verdict, and whether the stock goes round", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const task = await buildTask({ site, levelDb: 98, octaveBandsDb: at1kHz(98) });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const bySnr = (snrDb: number) =>
    buildProtector({ organizationId, data: { snrDb, usRatingDb: null } });
  const [weak, good] = [await bySnr(5), await bySnr(20)];
  const bare = await buildWorker({ site, jobId: job.id, name: "Ada" });
  const weakly = await buildWorker({ site, jobId: job.id, name: "Ben" });
  const holder = await buildWorker({ site, jobId: job.id, name: "Cem" });
  const idle = await buildWorker({ site, name: "Dora" });
  await buildAssignment({ worker: weakly, inner: weak });
  await buildAssignment({ worker: holder, inner: good });
  const client = await officerAt(site);
  const entered = await client.post("/stock/moves", {
    siteId: site.id,
    modelId: good.id,
    kind: "received",
    part: "device",
    size: null,
    quantity: 2,
    movedOn: "2026-01-05",
    note: "",
  });
  expect(entered.status).toBe(201);
  const today = new Date().toISOString().slice(0, 10);
  const ask = (modelId: string, taskId: string | null = null) =>
    client.post("/assignments/many/preview", {
      workerIds: [bare.id, weakly.id, holder.id, idle.id],
      assignment: { innerModelId: modelId, fromDate: today, taskId },
    });
  const { status, body } = await ask(good.id);
  expect(status).toBe(200);
  expect(body.daysCount).toBe(3);
  expect(body.withoutDayCount).toBe(1);
  expect(
    body.changes.map((row: GivingPreview["changes"][number]) => [
      row.workerName,
      row.before.word,
      row.after.word,
    ]),
  ).toEqual([
    ["Ada", null, "good"],
    ["Ben", "too-little", "good"],
  ]);
  expect(body.stock).toMatchObject([
    { modelId: good.id, neededCount: 3, assignedCount: 0, stockCount: 2 },
  ]);

  // For a task it is a further use: who has it for everywhere, but never issued here, is counted apart.
  const forTask = await ask(good.id, task.id);
  expect(forTask.body.stock).toMatchObject([{ neededCount: 4, assignedCount: 1 }]);

  // The other way round: whoever would fall to too little, and nothing is stored by the look.
  const worse = await ask(weak.id);
  expect(worse.body.changes[0]).toMatchObject({ after: { word: "too-little" } });
  expect(worse.body.stock).toMatchObject([{ modelId: weak.id, stockCount: null }]);
  expect(
    await select("SELECT 1 FROM assignments WHERE organization_id = $1", [organizationId]),
  ).toHaveLength(2);
});

test("orders the register by EN 458's words for a task, and says what decided", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const task = await buildTask({ site, levelDb: 98, octaveBandsDb: at1kHz(98) });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 120 }] });
  const worker = await buildWorker({ site, jobId: job.id });
  const other = await buildWorker({ site });
  const bySnr = (name: string, snrDb: number, worksWith?: object) =>
    buildProtector({ organizationId, name, data: { snrDb, usRatingDb: null, worksWith } });
  // EN 458 Annex A at an action value of 85 dB: 78 is good, 68 too much, 86 too little.
  await bySnr("Weak", 12);
  const good = await bySnr("Good", 20);
  await bySnr("Strong", 30);
  const withGlasses = { helmet: null, glasses: false, respirator: null };
  await bySnr("Not with glasses", 20, withGlasses);
  await buildProtector({
    organizationId,
    name: "No data",
    data: { snrDb: null, usRatingDb: null },
  });
  await select("UPDATE tasks SET required_gear = '{glasses}' WHERE id = $1", [task.id]);
  await buildAssignment({ worker, inner: good });

  const client = await officerAt(site);
  const { status, body } = await client.get(`/protector-choice?taskId=${task.id}`);
  expect(status).toBe(200);
  const choice = body as ProtectorChoiceView;
  expect(choice.noises).toMatchObject([{ levelDb: 98, durationMin: 120, hasSpectrum: true }]);
  expect(choice.isDurationAssumed).toBe(false);
  expect(choice.singles.map(({ name, word, decidedBy }) => [name, word, decidedBy])).toEqual([
    ["Good", "good", "first"],
    ["Strong", "too-much", "adequacy"],
    ["Weak", "too-little", "adequacy"],
    ["Not with glasses", "good", "compatibility"],
    ["No data", null, "adequacy"],
  ]);
  expect(choice.singles[0]?.wornDb).toBeCloseTo(78, 6);
  expect(choice.singles[3]?.excludedBy).toEqual({ code: "gear", gear: "glasses" });
  // Nobody tested two of them together, and the directive knows no rule of thumb.
  expect(choice.pairs).toEqual([]);
  expect(choice.wearers.map(({ id, currentName }) => [id, currentName])).toEqual([
    [worker.id, "Good"],
  ]);
  expect(choice.wearers.map(({ id }) => id)).not.toContain(other.id);
  const everywhere = {
    use: "everywhere",
    modelId: good.id,
    outerModelId: null,
    fromDate: expect.any(String),
  };
  expect(choice.wearers[0]?.holds).toEqual([everywhere]);
  expect(choice.subject.area).toBeNull();

  // In the task's area it can be given as well, and whoever has it there is said to.
  const { id: areaId } = await buildArea({ site, name: "Booths" });
  await select("UPDATE tasks SET area_id = $2 WHERE id = $1", [task.id, areaId]);
  const given = await client.post("/assignments/many", {
    workerIds: [worker.id],
    assignment: {
      taskId: null,
      areaId,
      innerModelId: good.id,
      outerModelId: null,
      fromDate: daysFromToday(0),
      toDate: null,
      size: null,
      audioDb: null,
    },
  });
  expect(given.status).toBe(201);
  const again = (await client.get(`/protector-choice?taskId=${task.id}`))
    .body as ProtectorChoiceView;
  expect(again.subject.area).toEqual({ id: areaId, name: "Booths" });
  expect(again.wearers[0]?.holds).toEqual(
    expect.arrayContaining([everywhere, { ...everywhere, use: "area" }]),
  );
});

test("two together in the US: five more than the better one after its derating", async () => {
  const site = await buildSite({ governingRuleSet: "us-general-industry" });
  const { organizationId } = site;
  const task = await buildTask({ site, levelDb: 100, metric: { kind: "steady" } });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const rated = (name: string, kind: string, usRatingDb: number) =>
    buildProtector({ organizationId, name, kind, data: { snrDb: null, usRatingDb } });
  const plug = await rated("Plug", "foam-plug", 29);
  const muff = await rated("Muff", "earmuff", 24);
  await rated("Band", "banded-plug", 17);

  const client = await officerAt(site);
  const { body } = await client.get(`/protector-choice?jobId=${job.id}`);
  const choice = body as ProtectorChoiceView;
  // 1910.95 App. B: 100 − (29 − 7) = 78; OSHA Technical Manual III:5: 100 − (22 + 5) = 73.
  expect(
    choice.singles.map(({ name, wornDb }) => [name, wornDb && Math.round(wornDb * 1e6)]),
  ).toEqual([
    ["Plug", 78_000_000],
    ["Muff", 83_000_000],
    ["Band", 90_000_000],
  ]);
  expect(choice.pairs).toHaveLength(1);
  expect(choice.pairs[0]).toMatchObject({
    modelId: plug.id,
    outerModelId: muff.id,
    name: "Plug + Muff",
    word: "enough",
  });
  expect(choice.pairs[0]?.wornDb).toBeCloseTo(73, 6);
});

test("a task in no nominal day stands for eight hours, and says so", async () => {
  const site = await buildSite();
  const task = await buildTask({ site, levelDb: 90 });
  const client = await officerAt(site);
  const { body } = await client.get(`/protector-choice?taskId=${task.id}`);
  expect(body).toMatchObject({ isDurationAssumed: true, noises: [{ durationMin: 480 }] });
});

test("a slip has each protector with its worst task, fit and crew; another organization's worker is not found", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const loud = await buildTask({ site, name: "Loud", levelDb: 98, octaveBandsDb: at1kHz(98) });
  const quiet = await buildTask({ site, name: "Quiet", levelDb: 70 });
  const job = await buildJob({
    site,
    tasks: [
      { taskId: loud.id, durationMin: 60 },
      { taskId: quiet.id, durationMin: 400 },
    ],
  });
  const worker = await buildWorker({ site, jobId: job.id });
  await buildCrew({ site, name: "Days", members: [worker] });
  const muff = await buildProtector({ organizationId, name: "Muff", data: { snrDb: 20 } });
  await buildAssignment({ worker, inner: muff });
  await buildFitTest({ worker, model: muff });

  const client = await officerAt(site);
  const { body } = await client.get(`/issue-slips?workerIds=${worker.id}`);
  const [slip] = body.rows as IssueSlip[];
  expect(slip?.worker).toMatchObject({ name: worker.name, crewName: "Days" });
  expect(slip?.protectors).toHaveLength(1);
  const [device] = slip!.protectors;
  expect(device).toMatchObject({ name: "Muff", taskName: "Loud", outsideDb: 98 });
  expect(device?.fit).not.toBeNull();

  const foreign = await buildWorker();
  const refused = await client.get(`/issue-slips?workerIds=${worker.id},${foreign.id}`);
  expect(refused.status).toBe(404);
});

test("where the rule judges the shift, a slip's word is the shift's with the protector on", async () => {
  const site = await buildSite({ governingRuleSet: "us-general-industry" });
  const { organizationId } = site;
  const task = await buildTask({ site, name: "Loud", levelDb: 100, metric: { kind: "steady" } });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const wears = async (usRatingDb: number) => {
    const worker = await buildWorker({ site, jobId: job.id });
    const inner = await buildProtector({ organizationId, data: { snrDb: null, usRatingDb } });
    await buildAssignment({ worker, inner });
    return worker.id;
  };
  // 1910.95 App. B: 100 − (29 − 7) = 78 and 100 − (12 − 7) = 95, to be at or below 90 over eight hours.
  const ids = [await wears(29), await wears(12)];
  const client = await officerAt(site);
  const { body } = await client.get(`/issue-slips?workerIds=${ids.join(",")}`);
  expect((body.rows as IssueSlip[]).map(({ protectors: [device] }) => device)).toMatchObject([
    { taskName: "Loud", wornDb: 78, word: "enough" },
    { taskName: "Loud", wornDb: 95, word: "too-little" },
  ]);
});

test("of two worn together a slip has both kinds, and what is due on either", async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const worker = await buildWorker({ site });
  const plug = await buildProtector({ organizationId, kind: "foam-plug", data: { snrDb: 30 } });
  const muff = await buildProtector({
    organizationId,
    kind: "earmuff",
    data: { snrDb: 20, cushionsEveryDays: 180 },
  });
  const task = await buildTask({ site });
  await buildAssignment({ worker, inner: plug, outer: muff, taskId: task.id });
  const issuedOn = daysFromToday(-30);
  await buildIssue({ worker, model: muff, issuedOn });
  const client = await officerAt(site);
  const { body } = await client.get(`/issue-slips?workerIds=${worker.id}`);
  expect(body.rows[0].protectors).toMatchObject([
    {
      kind: "foam-plug",
      outerKind: "earmuff",
      cushionsDueOn: daysFromToday(150),
      tipsDueOn: null,
      issuedOn: null,
    },
    { kind: "earmuff", outerKind: null, cushionsDueOn: daysFromToday(150), issuedOn },
  ]);
});
