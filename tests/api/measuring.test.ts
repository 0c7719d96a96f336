import { describe, expect, test } from "vitest";
import {
  buildDay,
  buildInstrument,
  buildJob,
  buildRun,
  buildShift,
  buildSite,
  buildSurvey,
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

const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

/** A measured level of a task from a date on. */
async function measure(site: Site, taskId: string, from: string, samplesDb = [89, 90, 91]) {
  await insert("task_levels", {
    organizationId: site.organizationId,
    taskId,
    number: 2,
    effectiveFrom: from,
    metric: JSON.stringify({ kind: "laeq" }),
    levelDb: 90,
    samplesDb,
    instrumentClass: "class-1-meter",
    grade: "measured-group",
    reason: "survey",
  });
}

describeEndpoint({
  route: "GET /measuring-needs",
  as: "auditor",
  not: "supervisor",
  event: null,
  namesNothing: true,
  bad: { path: "?siteId=none" },
  call: async (site) => {
    await buildWorker({ site, jobId: (await buildJob({ site })).id });
    return { method: "get", path: "/measuring-needs" };
  },
});
describeEndpoint({
  route: "PUT /sites/:id/remeasuring",
  as: "officer",
  not: "administrator",
  event: "set-remeasure-interval",
  bad: { body: { remeasureAfterMonths: 0 } },
  badField: "remeasureAfterMonths",
  call: async (site) => ({
    method: "put",
    path: `/sites/${site.id}/remeasuring`,
    revision: 1,
    body: { remeasureAfterMonths: 36 },
  }),
});
describeEndpoint({
  route: "GET /survey-plan",
  as: "officer",
  not: "auditor",
  event: null,
  bad: { path: "&strategy=some" },
  call: async (site) => ({
    method: "get",
    path: `/survey-plan?siteId=${site.id}&jobId=${(await buildJob({ site })).id}`,
  }),
});
describeEndpoint({
  route: "GET /groups/:id",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: { path: "?surveyId=none" },
  call: async (site) => ({ method: "get", path: `/groups/${(await buildJob({ site })).id}` }),
});

describe("what needs measuring", () => {
  test("tasks without a measured level, and levels older than the site's interval", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const [estimated, measured] = [
      await buildTask({ site, name: "Chipping" }),
      await buildTask({ site, name: "Grinding" }),
    ];
    await measure(site, measured.id, daysFromToday(-500));
    const job = await buildJob({
      site,
      tasks: [
        { taskId: estimated.id, durationMin: 120 },
        { taskId: measured.id, durationMin: 360 },
      ],
    });
    await buildWorker({ site, jobId: job.id });
    const never = { code: "never-measured", taskNames: ["Chipping"], taskIds: [estimated.id] };
    const without = await client.get("/measuring-needs");
    expect(without.body.rows[0].reasons).toEqual([never]);
    expect(without.body.sites[0]).toMatchObject({ remeasureAfterMonths: null, revision: 1 });

    const set = await client.send({
      method: "put",
      path: `/sites/${site.id}/remeasuring`,
      revision: 1,
      body: { remeasureAfterMonths: 12 },
    });
    expect(set.body).toMatchObject({ remeasureAfterMonths: 12, revision: 2 });
    const after = await client.get("/measuring-needs");
    expect(after.body.rows[0].reasons).toEqual([
      never,
      expect.objectContaining({
        code: "measured-too-long-ago",
        measuredOn: daysFromToday(-500),
      }),
    ]);
  });

  test("undecided verdicts of the last 90 days, and a survey under way last", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const task = await buildTask({ site });
    await measure(site, task.id, daysFromToday(-20));
    const tasks = [{ taskId: task.id, durationMin: 480 }];
    const [open, planned] = [await buildJob({ site, tasks }), await buildJob({ site })];
    const worker = await buildWorker({ site, jobId: open.id });
    await buildWorker({ site, jobId: planned.id });
    const survey = await buildSurvey({ site, jobId: planned.id });
    const recent = await buildDay(worker, daysFromToday(-3));
    // Results are append-only: what is undecided is written as such.
    await select("ALTER TABLE day_results DISABLE TRIGGER append_only");
    await select("UPDATE day_results SET verdict_at_ear = 'cant-tell-yet' WHERE id = $1", [recent]);
    await select("ALTER TABLE day_results ENABLE TRIGGER append_only");
    const { body } = await client.get("/measuring-needs");
    expect(body.rows).toMatchObject([
      { jobId: open.id, surveyId: null, reasons: [{ code: "undecided", daysCount: 1 }] },
      { jobId: planned.id, surveyId: survey.id, reasons: [{ code: "never-measured" }] },
    ]);
  });

  test("runs with an instrument that failed its calibration", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const task = await buildTask({ site });
    await measure(site, task.id, daysFromToday(-20));
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const worker = await buildWorker({ site, jobId: job.id });
    const instrument = await buildInstrument({ site, serialNumber: "77 401" });
    const run = { site, workerId: worker.id, instrument };
    await buildRun({ ...run, date: daysFromToday(-2) });
    await buildRun({ ...run, date: daysFromToday(-3), keptReason: "checked against another" });
    const calibrate = (doneOn: string, hasPassed: boolean) =>
      insert("instrument_calibrations", {
        organizationId: site.organizationId,
        instrumentId: instrument.id,
        doneOn,
        hasPassed,
      });
    await calibrate(daysFromToday(-100), true);
    expect((await client.get("/measuring-needs")).body.rows).toEqual([]);
    await calibrate(daysFromToday(-1), false);
    expect((await client.get("/measuring-needs")).body.rows[0].reasons).toEqual([
      { code: "doubtful-instrument", serialNumber: "77 401", runsCount: 1 },
    ]);
  });
});

describe("a plan", () => {
  test("asks what the standard asks of the group's size, and draws the same again from its seed", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const task = await buildTask({ site });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    for (let count = 0; count < 15; count++) await buildWorker({ site, jobId: job.id });
    const path = `/survey-plan?siteId=${site.id}&jobId=${job.id}`;
    const first = await client.get(path);
    // ISO 9612:2009, 9.3: three samples of 5 min; one task at one place is measured by tasks (Annex B).
    expect(first.body).toMatchObject({
      strategy: "task",
      proposedStrategy: "task",
      strategyReason: "fixed-simple",
      groupSize: 15,
      targets: [{ taskId: task.id, samplesCount: 3, sampleMin: 5 }],
    });
    const parts = first.body.people.map(({ part }: { part: string }) => part);
    expect(parts).toEqual(["drawn", "drawn", "drawn", "reserve", "reserve"]);
    const again = await client.get(`${path}&seed=${first.body.seed}`);
    expect(again.body.people).toEqual(first.body.people);

    // Table 1: 15 workers want 10 h, here as five samples of 2 h.
    const byJob = await client.get(`${path}&strategy=job`);
    expect(byJob.body.targets).toEqual([
      expect.objectContaining({ taskId: null, samplesCount: 5, sampleMin: 120 }),
    ]);
    const byDay = await client.get(`${path}&strategy=full-day`);
    expect(byDay.body.targets).toEqual([
      expect.objectContaining({ samplesCount: 3, sampleMin: 480 }),
    ]);
  });

  test("lays what the shifts really had beside the nominal day, and says what is reserved", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const [task, other] = [await buildTask({ site }), await buildTask({ site })];
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 240 }] });
    const worker = await buildWorker({ site, jobId: job.id });
    for (const [index, durationMin] of [100, 120, 140].entries())
      await buildShift(worker, {
        date: daysFromToday(-2 - index),
        tasks: [{ taskId: task.id, durationMin }],
      });
    await buildShift(worker, {
      date: daysFromToday(-9),
      tasks: [{ taskId: other.id, durationMin: 200 }],
    });
    const instrument = await buildInstrument({ site, calibrationDueOn: daysFromToday(2) });
    const survey = await buildSurvey({ site });
    await insert("instrument_reservations", {
      organizationId: site.organizationId,
      surveyId: survey.id,
      instrumentId: instrument.id,
      valid: `[${daysFromToday(1)},${daysFromToday(4)})`,
    });
    const { body } = await client.get(`/survey-plan?siteId=${site.id}&jobId=${job.id}`);
    // 100, 120, 140: mean 120, standard deviation 20.
    expect(body.targets[0]).toMatchObject({
      nominalMin: 240,
      observed: { count: 3, meanMin: 120, sdMin: 20, shiftsCount: 4 },
    });
    expect(body.instruments).toEqual([
      expect.objectContaining({
        id: instrument.id,
        calibrationDueOn: daysFromToday(2),
        reservedBy: [
          expect.objectContaining({
            surveyId: survey.id,
            fromDate: daysFromToday(1),
            toDate: daysFromToday(3),
          }),
        ],
      }),
    ]);
  });
});

describe("a group", () => {
  test("has the budget of its nominal day with the levels in force, and what would narrow it", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const task = await buildTask({ site });
    await measure(site, task.id, daysFromToday(-20), [88, 90, 92]);
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const { body } = await client.get(`/groups/${job.id}`);
    // ISO 9612:2009 C.2: u1a = sqrt(8 / (3·2)) = 1.1547, u2 = 0.7 (class 1), u3 = 1.0; U = 1.65·sqrt(1.333 + 0.49 + 1).
    expect(body.budgets[0].budget.expandedDb).toBeCloseTo(1.65 * Math.sqrt(4 / 3 + 1.49), 9);
    expect(body.budgets[0].budget.items[0]).toMatchObject({ source: "sampling", taskId: task.id });
    expect(body.budgets[0].budget.narrowings[0].change).toEqual({
      kind: "more-samples",
      taskId: task.id,
      count: 3,
    });
    expect(body.blocks).toEqual([
      expect.objectContaining({ quantity: "lex-8h", statistics: null }),
    ]);
  });

  test("says which task keeps it from having one", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const task = await buildTask({ site });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const { body } = await client.get(`/groups/${job.id}`);
    expect(body.budgets[0]).toMatchObject({
      budget: null,
      reason: "too-few-samples",
      lackingTaskIds: [task.id],
    });
  });

  test("is described by the samples of full days of its members", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const job = await buildJob({ site });
    const survey = await buildSurvey({
      site,
      jobId: job.id,
      strategy: "full-day",
      targets: [{ taskId: null, sampleMin: 480 }],
    });
    const workers = [
      await buildWorker({ site, jobId: job.id, name: "M. Loud" }),
      await buildWorker({ site, jobId: job.id }),
    ];
    // Two members ten decibels apart, each alike from day to day.
    const levels: [number, number][] = [
      [0, 94],
      [0, 95],
      [0, 96],
      [1, 84],
      [1, 85],
      [1, 86],
    ];
    for (const [index, [worker, levelDb]] of levels.entries())
      await buildRun({
        site,
        surveyId: survey.id,
        workerId: workers[worker]!.id,
        levelDb,
        durationMin: 480,
        covers: "shift",
        date: daysFromToday(-1 - index),
      });
    const { body } = await client.get(`/groups/${job.id}?surveyId=${survey.id}`);
    expect(body.blocks).toHaveLength(1);
    const [{ statistics }] = body.blocks;
    expect(statistics).toMatchObject({
      sampleCount: 6,
      workerCount: 2,
      meanDb: 90,
      reasons: [],
      belonging: { verdict: "differ" },
    });
    // sqrt((4·1 + 6·25) / 5); K(6) = 3.708 of the published table.
    const sdDb = Math.sqrt((2 * 2 + 6 * 25) / 5);
    expect(statistics.sdDb).toBeCloseTo(sdDb, 9);
    expect(statistics.toleranceLimitDb).toBeCloseTo(90 + 3.708 * sdDb, 2);
    expect(statistics.exceedances.map(({ levelDb }: { levelDb: number }) => levelDb)).toContain(80);
    expect(statistics.plot[5]).toMatchObject({ workerName: "M. Loud", levelDb: 96 });
    expect(body.budgets[1]).toMatchObject({ surveyId: survey.id });
    expect(body.budgets[1]).toMatchObject({ belowRangeCount: 0, isAsInForce: false });
    // C.12: u1 is that standard deviation, more than 3.5 dB.
    expect(body.budgets[1].budget).toMatchObject({ strategy: "full-day", isScatterLarge: true });
  });

  test("under a rule of doses is described dose by dose, each against its own value", async () => {
    const site = await buildSite({ governingRuleSet: "us-general-industry" });
    const client = await officerAt(site);
    const job = await buildJob({ site });
    const worker = await buildWorker({ site, jobId: job.id });
    // TWA with threshold 80 and with threshold 90; on the third day nothing reached 90 dB: a dose of 0 has no level.
    const days: [number, number | null, number][] = [
      [88, 86, 58],
      [89, 87, 66],
      [84, null, 0],
      [90, 88, 76],
      [91, 89, 87],
    ];
    for (const [index, [actionDb, limitDb, limitPct]] of days.entries())
      await buildDay(worker, daysFromToday(-1 - index), {
        grade: "measured-worker",
        governingRuleSet: "us-general-industry",
        criteria: [
          ["action-value", actionDb, 100 * 2 ** ((actionDb - 90) / 5)],
          ["limit", limitDb, limitPct],
        ].map(([criterionId, levelDb, dosePct]) => ({
          ruleSetKey: "us-general-industry",
          criterionId,
          levelDb,
          dosePct,
          bound: "exact",
        })),
      });
    const { body } = await client.get(`/groups/${job.id}`);
    expect(body.blocks).toHaveLength(2);
    const [action, limit] = body.blocks;
    // 29 CFR 1910.95(c) and (a): the one counts from 80 dB and acts at 85, the other from 90 dB and at 90.
    expect(action).toMatchObject({ quantity: "dose", exchangeRateDb: 5, thresholdDb: 80 });
    expect(action.statistics).toMatchObject({ sampleCount: 5, belowCount: 0, energyMeanDb: null });
    expect(action.statistics.meanDb).toBeCloseTo(88.4, 9);
    expect(action.statistics.exceedances).toMatchObject([{ levelDb: 85 }]);
    expect(limit).toMatchObject({ quantity: "dose", exchangeRateDb: 5, thresholdDb: 90 });
    expect(limit.statistics).toMatchObject({ sampleCount: 5, belowCount: 1, energyMeanDb: null });
    expect(limit.statistics.exceedances).toMatchObject([{ levelDb: 90 }]);
  });

  test("samples under an instrument's range are named beside the budget that takes them as they are", async () => {
    const site = await buildSite();
    const client = await officerAt(site);
    const job = await buildJob({ site });
    const survey = await buildSurvey({
      site,
      jobId: job.id,
      strategy: "full-day",
      targets: [{ taskId: null, sampleMin: 480 }],
    });
    const worker = await buildWorker({ site, jobId: job.id });
    for (const [index, levelDb] of [84, 85, 70].entries())
      await buildRun({
        site,
        surveyId: survey.id,
        workerId: worker.id,
        levelDb,
        durationMin: 480,
        covers: "shift",
        date: daysFromToday(-1 - index),
        ...(levelDb === 70 ? { doubts: ["under-range"], keptReason: "Quiet day" } : {}),
      });
    const { body } = await client.get(`/groups/${job.id}`);
    expect(body.budgets[1]).toMatchObject({ belowRangeCount: 1, keptReasons: ["Quiet day"] });
    expect(body.budgets[0]).toMatchObject({ belowRangeCount: 0 });
  });
});
