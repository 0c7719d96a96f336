import { describe, expect, test } from "vitest";
import {
  buildCrew,
  buildInstrument,
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

const date = daysFromToday(-1);

async function buildPlace(given?: Site) {
  const site = given ?? (await buildSite());
  const task = await buildTask({ site, levelDb: 80, metric: { kind: "steady" } });
  const instrument = await buildInstrument({
    site,
    kind: "sound-level-meter",
    calibrationDueOn: daysFromToday(90),
  });
  const sample = {
    taskId: task.id,
    instrumentId: instrument.id,
    place: "second bench from the door",
    date,
    startedAt: `${date}T08:00:00Z`,
    durationMin: 6,
    levelDb: 94.6,
    peak: { levelDb: 121.3, weighting: "C" },
    checkBeforeDb: 94,
    checkAfterDb: 93.9,
  };
  return { site, task, instrument, sample };
}
async function buildDesk() {
  const place = await buildPlace();
  const { organizationId } = place.site;
  return {
    ...place,
    client: await signInAs(await buildUser({ organizationId, roles: ["officer"] })),
  };
}

describeEndpoint({
  route: "POST /samples",
  as: "officer",
  not: "auditor",
  event: "record-sample",
  bad: { body: { levelDb: 250 } },
  badField: "levelDb",
  call: async (site) => ({
    method: "post",
    path: "/samples",
    body: (await buildPlace(site)).sample,
  }),
});

describe("a sample by hand", () => {
  test("is a run on its task, with an LAeq and its spectrum", async () => {
    const { client, sample, task } = await buildDesk();
    const octaveBandsDb = [70, 74, 79, 84, 88, 90, 88, 81];
    const { status, body } = await client.post("/samples", { ...sample, octaveBandsDb });
    expect(status).toBe(201);
    expect(body).toMatchObject({
      taskId: task.id,
      taskName: task.name,
      place: "second bench from the door",
      covers: "part",
      durationMin: 6,
      isOut: false,
      doubts: [],
      outAt: `${date}T08:00:00.000Z`,
      backAt: `${date}T08:06:00.000Z`,
    });
    expect(body.readings).toMatchObject([
      {
        averageDb: 94.6,
        settings: { exchangeRateDb: 3, thresholdDb: null, weighting: "A" },
        peak: { levelDb: 121.3, weighting: "C" },
        octaveBandsDb,
      },
    ]);
  });

  test("sent twice under one key is one sample", async () => {
    const { client, sample, task } = await buildDesk();
    const key = "a-key-of-a-phone";
    const [first, second] = [
      await client.post("/samples", sample, key),
      await client.post("/samples", sample, key),
    ];
    expect(second.body.id).toBe(first.body.id);
    expect(await select("SELECT 1 FROM runs WHERE task_id = $1", [task.id])).toHaveLength(1);
  });

  test("of a worker is no reading of the worker's shift", async () => {
    const { client, sample, site, task } = await buildDesk();
    const worker = await buildWorker({ site });
    const crew = await buildCrew({ site, members: [worker] });
    const saved = await client.post("/samples", { ...sample, workerId: worker.id });
    expect(saved.body.workerName).toBe(worker.name);
    const shift = {
      kind: "worked",
      workerId: worker.id,
      localStart: "06:00",
      lengthMin: 480,
      unaccounted: { how: "unknown" },
      tasks: [{ taskId: task.id, durationMin: 480 }],
    };
    const entered = await client.post(`/crews/${crew.id}/day`, { date, rows: [shift] });
    expect(entered.body.refused).toEqual([]);
    const [result] = await select<{
      refs: { shifts: { runRevisionIds: string[] }[] };
      outside_db: number;
      grade: string;
    }>(
      "SELECT x.refs, x.outside_db, x.grade FROM days d JOIN day_results x ON x.id = d.current_result_id WHERE d.worker_id = $1",
      [worker.id],
    );
    expect(result!.refs.shifts[0]!.runRevisionIds).toEqual([]);
    // Eight hours at the task's 80 dB are LEX,8h 80.0 whatever was sampled at 94.6 beside them.
    expect(result!.outside_db).toBeCloseTo(80, 9);
    expect(result!.grade).toBe("task-level");
  });

  test("shorter than five minutes is kept with a reason only (ISO 9612:2009, 9.3)", async () => {
    const { client, sample } = await buildDesk();
    const refused = await client.post("/samples", { ...sample, durationMin: 4.9 });
    expect(refused.body.issues).toMatchObject([
      { path: ["keptReason"], code: "run-too-short", params: { durationMin: 4.9, leastMin: 5 } },
    ]);
    const kept = await client.post("/samples", {
      ...sample,
      durationMin: 2,
      keptReason: "the whole task takes two minutes",
    });
    expect(kept.body).toMatchObject({
      doubts: ["run-too-short"],
      keptReason: "the whole task takes two minutes",
    });
  });

  test("without its field checks is kept with a reason only; a correction does not forget it", async () => {
    const { client, sample } = await buildDesk();
    const unchecked = { ...sample, checkBeforeDb: null, checkAfterDb: null };
    const refused = await client.post("/samples", unchecked);
    expect(refused.body.issues).toMatchObject([
      { path: ["keptReason"], code: "field-check-missing" },
    ]);
    const keptReason = "the calibrator is at the laboratory";
    const { body: run } = await client.post("/samples", { ...unchecked, keptReason });
    expect(run).toMatchObject({ doubts: ["field-check-missing"], keptReason });
    const correction = {
      durationMin: 7,
      covers: "part",
      readings: run.readings,
      reason: "ran for seven minutes",
    };
    const corrected = await client.put(`/runs/${run.id}`, correction, 1);
    expect(corrected.body.issues).toMatchObject([{ code: "field-check-missing" }]);
  });

  test("a reason that outlived its doubt is not kept", async () => {
    const { client, sample } = await buildDesk();
    const { body } = await client.post("/samples", { ...sample, keptReason: "was too short" });
    expect(body).toMatchObject({ doubts: [], keptReason: null });
  });

  test.each([
    // Planned shorter than the standard asks of any sample (ISO 9612:2009, 9.3, from memory): five minutes.
    [{ sampleMin: 2, pattern: "steady" }, 60, 5],
    // Three whole cycles of four minutes.
    [{ sampleMin: 5, pattern: "cyclic", cycleMin: 4 }, 60, 12],
    // The whole of a task of three minutes.
    [{ sampleMin: 2, pattern: "steady" }, 3, 3],
    [{ sampleMin: 20, pattern: "steady" }, 60, 20],
  ])(
    "of a survey planned with %o, of a task of %i min, lasts %i min",
    async (target, nominalMin, leastMin) => {
      const { client, sample, site, task } = await buildDesk();
      const { organizationId } = site;
      const jobId = await insert("jobs", { organizationId, siteId: site.id, name: "Fitters" });
      await insert("job_tasks", {
        organizationId,
        jobId,
        taskId: task.id,
        position: 0,
        durationMin: nominalMin,
      });
      const { id: surveyId } = await buildSurvey({ site, jobId });
      await insert("survey_targets", {
        organizationId,
        surveyId,
        position: 0,
        taskId: task.id,
        samplesCount: 3,
        ...target,
      });
      const short = { ...sample, surveyId, durationMin: leastMin - 0.5 };
      const refused = await client.post("/samples", short);
      expect(refused.body.issues).toMatchObject([{ code: "run-too-short", params: { leastMin } }]);
      const taken = await client.post("/samples", { ...short, durationMin: leastMin });
      expect(taken.body.doubts).toEqual([]);
    },
  );

  test("of a survey lasts as long as the survey planned", async () => {
    const { client, sample, site, task } = await buildDesk();
    const { organizationId } = site;
    const jobId = await insert("jobs", { organizationId, siteId: site.id, name: "Fitters" });
    const surveyId = await insert("surveys", {
      organizationId,
      siteId: site.id,
      jobId,
      name: "Fitters",
      strategy: "task",
      fromDate: date,
      toDate: date,
      drawSeed: "seed",
    });
    await insert("survey_targets", {
      organizationId,
      surveyId,
      position: 0,
      taskId: task.id,
      samplesCount: 3,
      sampleMin: 15,
    });
    const refused = await client.post("/samples", { ...sample, surveyId, durationMin: 14 });
    expect(refused.body.issues).toMatchObject([
      { code: "run-too-short", params: { leastMin: 15 } },
    ]);
    const taken = await client.post("/samples", { ...sample, surveyId, durationMin: 15 });
    expect(taken.body).toMatchObject({ surveyName: "Fitters", doubts: [] });
    const listed = await client.get(`/runs?surveyId=${surveyId}`);
    expect(listed.body.rows.map(({ id }: { id: string }) => id)).toEqual([taken.body.id]);
  });

  test("every doubt is named at once", async () => {
    const { client, sample, site } = await buildDesk();
    const old = await buildInstrument({ site, calibrationDueOn: daysFromToday(-30) });
    const refused = await client.post("/samples", {
      ...sample,
      instrumentId: old.id,
      checkAfterDb: 114,
      durationMin: 1,
      doubts: ["under-range"],
    });
    expect(refused.body.issues.map(({ code }: { code: string }) => code)).toEqual([
      "field-check-mistyped",
      "calibration-out-of-date",
      "run-too-short",
      "under-range",
    ]);
  });

  test("its instrument was nowhere else meanwhile", async () => {
    const { client, sample } = await buildDesk();
    await client.post("/samples", sample);
    const second = await client.post("/samples", { ...sample, startedAt: `${date}T08:05:59Z` });
    expect([second.status, second.body.code]).toEqual([409, "instruments-overlap"]);
    expect(second.body.params).toEqual({
      from: `${date}T08:00:00.000Z`,
      to: `${date}T08:06:00.000Z`,
    });
    const next = await client.post("/samples", { ...sample, startedAt: `${date}T08:06:00Z` });
    expect(next.status).toBe(201);
  });

  test("a correction leaves the spectrum as it is, and asks again about what speaks against it", async () => {
    const { client, sample } = await buildDesk();
    const octaveBandsDb = [70, 74, 79, 84, 88, 90, 88, 81];
    const { body: run } = await client.post("/samples", { ...sample, octaveBandsDb });
    const correction = {
      durationMin: 6,
      covers: "part",
      checkBeforeDb: 94,
      checkAfterDb: 94.1,
      readings: run.readings,
      reason: "read the second check again",
    };
    const corrected = await client.put(`/runs/${run.id}`, correction, 1);
    expect(corrected.body.readings[0].octaveBandsDb).toEqual(octaveBandsDb);
    const short = await client.put(`/runs/${run.id}`, { ...correction, durationMin: 3 }, 2);
    expect(short.body.issues).toMatchObject([{ path: ["keptReason"], code: "run-too-short" }]);
  });
});
