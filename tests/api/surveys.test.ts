import { describe, expect, test } from "vitest";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import {
  buildCrew,
  buildInstrument,
  buildJob,
  buildRun,
  buildSite,
  buildSurvey,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  noRiskAnswers,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

async function planOf(site: Site, overrides: object = {}) {
  const task = await buildTask({ site });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  return {
    siteId: site.id,
    jobId: job.id,
    name: "Fitters in spring",
    strategy: "task",
    fromDate: daysFromToday(1),
    toDate: daysFromToday(3),
    drawSeed: "seed",
    riskFactors: noRiskAnswers,
    targets: [{ taskId: task.id, samplesCount: 3, sampleMin: 5 }],
    ...overrides,
  };
}

/** A survey of one task under way, with samples of these levels. */
async function buildMeasured(site: Site, levelsDb = [90, 91, 92]) {
  const task = await buildTask({ site });
  const survey = await buildSurvey({ site, targets: [{ taskId: task.id }] });
  const runs = [];
  for (const levelDb of levelsDb)
    runs.push(await buildRun({ site, surveyId: survey.id, taskId: task.id, levelDb }));
  return { task, survey, runs };
}
const adoptionOf = (taskId: string) => ({
  effectiveFrom: daysFromToday(-9),
  reason: "measured anew",
  targets: [{ position: 0, taskId }],
});

describeEndpoint({
  route: "GET /surveys",
  as: "auditor",
  not: "supervisor",
  event: null,
  namesNothing: true,
  bad: { path: "?state=lost" },
  call: async (site) => {
    await buildMeasured(site);
    return { method: "get", path: "/surveys" };
  },
});
describeEndpoint({
  route: "GET /surveys/:id",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/surveys/${(await buildMeasured(site)).survey.id}`,
  }),
});
describeEndpoint({
  route: "POST /surveys",
  as: "officer",
  not: "auditor",
  event: "create-survey",
  bad: { body: { toDate: daysFromToday(-30) } },
  badField: "toDate",
  call: async (site) => ({ method: "post", path: "/surveys", body: await planOf(site) }),
});
describeEndpoint({
  route: "PUT /surveys/:id",
  as: "officer",
  not: "auditor",
  event: "change-survey",
  bad: { body: { targets: [] } },
  badField: "targets",
  call: async (site) => {
    const { siteId: _, jobId: __, ...body } = await planOf(site);
    const survey = await buildSurvey({ site, state: "planned", targets: body.targets });
    return { method: "put", path: `/surveys/${survey.id}`, revision: 1, body };
  },
});
describeEndpoint({
  route: "POST /surveys/:id/state",
  as: "officer",
  not: "auditor",
  event: "set-survey-state",
  status: 200,
  bad: { body: { state: "struck", note: null } },
  badField: "note",
  call: async (site) => ({
    method: "post",
    path: `/surveys/${(await buildMeasured(site)).survey.id}/state`,
    revision: 1,
    body: { state: "done" },
  }),
});
describeEndpoint({
  route: "POST /surveys/:id/adoption/preview",
  as: "officer",
  not: "auditor",
  event: null,
  status: 200,
  bad: { body: { targets: [] } },
  badField: "targets",
  call: async (site) => {
    const { survey, task } = await buildMeasured(site);
    const { reason: _, ...body } = adoptionOf(task.id);
    return { method: "post", path: `/surveys/${survey.id}/adoption/preview`, body };
  },
});
describeEndpoint({
  route: "POST /surveys/:id/adoption",
  as: "officer",
  not: "auditor",
  event: "adopt-survey",
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async (site) => {
    const { survey, task } = await buildMeasured(site);
    return { method: "post", path: `/surveys/${survey.id}/adoption`, body: adoptionOf(task.id) };
  },
});

describe("a survey", () => {
  test("keeps its plan: people, instruments, observers and what was asked once", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const instrument = await buildInstrument({ site });
    const worker = await buildWorker({ site });
    const reservation = {
      instrumentId: instrument.id,
      fromDate: daysFromToday(1),
      toDate: daysFromToday(2),
    };
    const plan = await planOf(site, {
      observers: ["R. Ahlquist"],
      people: [{ workerId: worker.id, part: "named" }],
      reservations: [reservation],
      riskFactors: { ...noRiskAnswers, impulse: { answer: "yes", note: "hammer" } },
    });
    const made = await client.post("/surveys", plan);
    expect(made.status).toBe(201);
    const { siteId: _, jobId: __, ...facts } = plan;
    expect(made.body).toMatchObject({ ...facts, state: "planned", revision: 1 });
    expect(made.body.peopleNames[worker.id]).toMatchObject({ name: worker.name });

    const second = await client.post("/surveys", {
      ...(await planOf(site)),
      reservations: [reservation],
    });
    expect(second.status).toBe(422);
    expect(second.body.issues[0].code).toBe("instrument-reserved-already");

    const changed = await client.send({
      method: "put",
      path: `/surveys/${made.body.id}`,
      revision: 1,
      body: { ...facts, reservations: [], name: "Fitters in May" },
    });
    expect(changed.body).toMatchObject({ name: "Fitters in May", reservations: [], revision: 2 });
    const late = await client.send({
      method: "put",
      path: `/surveys/${made.body.id}`,
      revision: 1,
      body: facts,
    });
    expect(late.status).toBe(412);
    expect(late.body.current.name).toBe("Fitters in May");
  });

  test("says what is wanted of a plan: tasks by tasks only, each once, all of the site", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const other = await buildTask({
      site: await buildSite({ organizationId: site.organizationId }),
    });
    const target = { samplesCount: 3, sampleMin: 5 };
    const plan = await planOf(site);
    const codes = async (overrides: object) =>
      (await client.post("/surveys", { ...plan, ...overrides })).body.issues.map(
        ({ code }: { code: string }) => code,
      );
    expect(await codes({ targets: [{ ...target, taskId: null }] })).toEqual(["task-needed"]);
    expect(await codes({ strategy: "job" })).toEqual(["no-task-by-job"]);
    expect(await codes({ targets: [...plan.targets, ...plan.targets] })).toEqual(["task-twice"]);
    expect(await codes({ targets: [{ ...target, taskId: other.id }] })).toEqual([
      "task-of-other-site",
    ]);
  });

  test("goes from planned to measuring to done, and is struck with a reason only", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const { body: survey } = await client.post("/surveys", await planOf(site));
    const to = (state: string, revision: number, note?: string) =>
      client.send({
        method: "post",
        path: `/surveys/${survey.id}/state`,
        revision,
        body: { state, note: note ?? null },
      });
    expect((await to("done", 1)).status).toBe(409);
    expect((await to("measuring", 1)).body.state).toBe("measuring");
    expect((await to("done", 2)).body.state).toBe("done");
    const struck = await to("struck", 3, "the line was standing still");
    expect(struck.body).toMatchObject({
      state: "struck",
      closingNote: "the line was standing still",
    });
    expect((await to("measuring", 4)).status).toBe(409);
  });
});

describe("what a survey comes to", () => {
  test("is the energy mean of what counts, with the standard's next step", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const { task, survey } = await buildMeasured(site, [90, 91, 94]);
    const more = { site, surveyId: survey.id, taskId: task.id };
    await buildRun({ ...more, levelDb: 120, doubts: ["clipped"] });
    await buildRun({ ...more, levelDb: 120, exchangeRateDb: 5 });
    const other = await buildTask({ site });
    await buildRun({ ...more, taskId: other.id, levelDb: 120 });
    const { body } = await client.get(`/surveys/${survey.id}`);
    const energyMean = 10 * Math.log10((10 ** 9 + 10 ** 9.1 + 10 ** 9.4) / 3);
    expect(body.results[0]).toMatchObject({
      samplesCount: 3,
      rangeDb: 4,
      scatterDb: null,
      // 9.3: three samples 3 dB apart or more want three more.
      wantedCount: 6,
      missingCount: 3,
      asksFor: "large-spread",
      keptReasons: [],
      instrument: "dosimeter",
    });
    expect(body.results[0].levelDb).toBeCloseTo(energyMean, 9);
    expect(
      body.samples.map(({ notCounted }: { notCounted: string | null }) => notCounted).toSorted(),
    ).toEqual(["no-laeq", "of-no-target", "refused", null, null, null].toSorted());
    const list = await client.get("/surveys");
    expect(list.body.rows[0]).toMatchObject({ id: survey.id, wantedCount: 3 });
  });

  test("a sample that is kept counts, and its reason goes with the number", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const { task, survey } = await buildMeasured(site, [90, 91]);
    await buildRun({
      site,
      surveyId: survey.id,
      taskId: task.id,
      levelDb: 92,
      doubts: ["run-too-short"],
      keptReason: "the press stopped after four minutes",
    });
    const before = await client.get(`/surveys/${survey.id}`);
    expect(before.body.results[0]).toMatchObject({
      samplesCount: 3,
      asksFor: null,
      keptReasons: ["the press stopped after four minutes"],
    });
    await client.post(`/surveys/${survey.id}/adoption`, adoptionOf(task.id));
    const { body } = await client.get(`/tasks/${task.id}`);
    expect(body.level).toMatchObject({
      surveyId: survey.id,
      keptReasons: ["the press stopped after four minutes"],
    });
  });
});

/** A day of eight hours in the survey's task, entered as an officer enters it. */
async function enterDay(client: Client, site: Site, taskId: string) {
  const worker = await buildWorker({ site });
  const crew = await buildCrew({ site, members: [worker] });
  const saved = await client.post(`/crews/${crew.id}/day`, {
    date: daysFromToday(-2),
    rows: [
      {
        kind: "worked",
        workerId: worker.id,
        localStart: "06:00",
        lengthMin: 480,
        tasks: [{ taskId, durationMin: 480 }],
      },
    ],
  });
  expect(saved.body.refused).toEqual([]);
  const outside = async () => {
    const [day] = await select<{ verdict: string; kept: boolean; level: number }>(
      `SELECT r.verdict_outside AS verdict, r.is_kept AS kept, r.outside_db AS level
       FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.worker_id = $1`,
      [worker.id],
    );
    return day!;
  };
  return { worker, outside };
}

describe("adoption", () => {
  test("changes a day's verdict as its preview said, and is traced to the runs", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    // The task stands at 88 dB; the survey finds 70.
    const { task, survey, runs } = await buildMeasured(site, [69, 70, 71]);
    const { worker, outside } = await enterDay(client, site, task.id);
    expect((await outside()).verdict).toBe("over");

    const { reason, ...asked } = adoptionOf(task.id);
    const preview = await client.post(`/surveys/${survey.id}/adoption/preview`, asked);
    expect(preview.body).toMatchObject({
      days: 1,
      changedDays: 1,
      tally: expect.arrayContaining([{ line: "without-protection", after: "under", days: 1 }]),
    });
    expect(preview.body.changes).toContainEqual(
      expect.objectContaining({ workerId: worker.id, before: "over", after: "under" }),
    );
    expect((await outside()).verdict).toBe("over");

    const adopted = await client.post(`/surveys/${survey.id}/adoption`, { ...asked, reason });
    expect(adopted.status).toBe(201);
    expect(adopted.body.adopted).toMatchObject([{ taskId: task.id, isInForce: true }]);
    await recomputeStaleDays(site.organizationId);
    expect((await outside()).verdict).toBe("under");

    const { body } = await client.get(`/tasks/${task.id}`);
    expect(body.level).toMatchObject({
      surveyId: survey.id,
      strategy: "task",
      grade: "measured-group",
      instrument: "dosimeter",
      keptReasons: [],
    });
    expect(body.level.samplesDb.toSorted()).toEqual([69, 70, 71]);
    expect(body.level.samples.map(({ runId }: { runId: string }) => runId).toSorted()).toEqual(
      runs.map(({ id }) => id).toSorted(),
    );
    const traced = await select<{ id: string }>(
      "SELECT run_revision_id AS id FROM task_level_samples WHERE task_level_id = $1",
      [body.level.id],
    );
    expect(traced.map(({ id }) => id).toSorted()).toEqual(
      runs.map(({ revisionId }) => revisionId).toSorted(),
    );
  });

  test("with fewer samples than the standard asks for, the reason follows the number into the day", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const { task, survey } = await buildMeasured(site, [93]);
    const { outside } = await enterDay(client, site, task.id);
    expect((await outside()).kept).toBe(false);
    await client.post(`/surveys/${survey.id}/adoption`, adoptionOf(task.id));
    await recomputeStaleDays(site.organizationId);
    expect(await outside()).toMatchObject({ kept: true, level: 93 });
  });

  test("spectrum and LC − LA are energy means", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const task = await buildTask({ site });
    const survey = await buildSurvey({ site, targets: [{ taskId: task.id }] });
    const bands = (levelDb: number) => Array.from({ length: 8 }, () => levelDb);
    for (const levelDb of [80, 90, 90])
      await buildRun({
        site,
        surveyId: survey.id,
        taskId: task.id,
        levelDb,
        lceqDb: levelDb + 3,
        octaveBandsDb: bands(levelDb),
      });
    await client.post(`/surveys/${survey.id}/adoption`, adoptionOf(task.id));
    const { body } = await client.get(`/tasks/${task.id}`);
    const mean = 10 * Math.log10((10 ** 8 + 2 * 10 ** 9) / 3);
    expect(body.level.levelDb).toBeCloseTo(mean, 9);
    expect(body.level.octaveBandsDb[3]).toBeCloseTo(mean, 9);
    expect(body.level.lcMinusLaDb).toBeCloseTo(3, 9);
  });

  test("a result by full days stands for one task, and for nothing but a task of its site", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const task = await buildTask({ site });
    const survey = await buildSurvey({
      site,
      strategy: "full-day",
      targets: [{ taskId: null, sampleMin: 480 }],
    });
    for (const levelDb of [88, 89, 90])
      await buildRun({
        site,
        surveyId: survey.id,
        workerId: (await buildWorker({ site })).id,
        levelDb,
        durationMin: 480,
      });
    const other = await buildTask({
      site: await buildSite({ organizationId: site.organizationId }),
    });
    const elsewhere = await client.post(`/surveys/${survey.id}/adoption`, adoptionOf(other.id));
    expect(elsewhere.body.issues[0].code).toBe("task-of-other-site");
    const adopted = await client.post(`/surveys/${survey.id}/adoption`, adoptionOf(task.id));
    expect(adopted.status).toBe(201);
    const { body } = await client.get(`/tasks/${task.id}`);
    expect(body.level).toMatchObject({ strategy: "full-day" });
    expect(body.level.samplesDb.toSorted()).toEqual([88, 89, 90]);
  });

  test("without a sample, or before measuring has begun, there is nothing to adopt", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const { task, survey } = await buildMeasured(site, []);
    const none = await client.post(`/surveys/${survey.id}/adoption`, adoptionOf(task.id));
    expect(none.body.issues[0].code).toBe("no-samples-yet");
    const planned = await buildSurvey({ site, state: "planned", targets: [{ taskId: task.id }] });
    const early = await client.post(`/surveys/${planned.id}/adoption`, adoptionOf(task.id));
    expect(early.body.code).toBe("wrong-state");
  });
});
