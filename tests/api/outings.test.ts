import { describe, expect, test } from "vitest";
import {
  buildArea,
  buildCrew,
  buildInstrument,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  insert,
  type Site,
  select,
  signInAs,
  type Worker,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const date = daysFromToday(-1);
const at = (time: string, on = date) => `${on}T${time}:00.000Z`;
const laeq = {
  criterionLevelDb: 85,
  exchangeRateDb: 3,
  thresholdDb: null,
  weighting: "A",
  response: "slow",
};
const back = {
  backAt: at("14:30"),
  checkAfterDb: 113.9,
  covers: "shift",
  readings: [{ settings: laeq, averageDb: 91.2 }],
};

const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

async function buildDesk(overrides: Parameters<typeof buildSite>[0] = {}) {
  const site = await buildSite({ timeZone: "UTC", ...overrides });
  const worker = await buildWorker({ site });
  const instrument = await buildInstrument({ site, calibrationDueOn: daysFromToday(90) });
  const start = {
    instrumentId: instrument.id,
    workerId: worker.id,
    date,
    outAt: at("06:00"),
    checkBeforeDb: 114,
  };
  return { site, worker, instrument, start, client: await officerAt(site) };
}

/** An instrument that somebody of that site sent out; gives the run's id. */
async function buildOuting(site: Site): Promise<string> {
  const worker = await buildWorker({ site });
  const instrument = await buildInstrument({ site });
  const [head] = await select<{ id: string }>(
    `WITH v AS (INSERT INTO run_revisions (organization_id, run_id, number, out_at, check_before_db, covers) VALUES ($1, gen_random_uuid(), 1, $5, 114, 'part') RETURNING id, run_id)
     INSERT INTO runs (id, organization_id, site_id, instrument_id, worker_id, date, is_out, span, current_revision_id)
     SELECT run_id, $1, $2, $3, $4, $6, TRUE, tstzrange($5, NULL), id FROM v RETURNING id`,
    [site.organizationId, site.id, instrument.id, worker.id, at("06:00"), date],
  );
  return head!.id;
}

/** A shift of eight hours at 80 dB, entered as an officer enters it. */
async function enterShift(client: Client, site: Site, worker: Worker) {
  const task = await buildTask({ site, levelDb: 80, metric: { kind: "steady" } });
  const crew = await buildCrew({ site, members: [worker] });
  const saved = await client.post(`/crews/${crew.id}/day`, {
    date,
    rows: [
      {
        kind: "worked",
        workerId: worker.id,
        localStart: "06:00",
        lengthMin: 480,
        unaccounted: { how: "unknown" },
        tasks: [{ taskId: task.id, durationMin: 480 }],
      },
    ],
  });
  expect(saved.body.refused).toEqual([]);
  return crew;
}

/** Revisions of runs on which the result of the worker's day rests. */
async function runsOfResult(workerId: string): Promise<string[]> {
  const [day] = await select<{ refs: { shifts: { runRevisionIds: string[] }[] } }>(
    "SELECT x.refs FROM days d JOIN day_results x ON x.id = d.current_result_id WHERE d.worker_id = $1 AND d.date = $2",
    [workerId, date],
  );
  return day!.refs.shifts.flatMap(({ runRevisionIds }) => runRevisionIds);
}

const send = (client: Client, path: string, body: object, revision: number) =>
  client.send({ method: "post", path, body, revision });

describeEndpoint({
  route: "GET /sites/:id/outings",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: { path: "?date=yesterday" },
  call: async (site) => ({ method: "get", path: `/sites/${site.id}/outings` }),
});
describeEndpoint({
  route: "POST /outings",
  as: "officer",
  not: "auditor",
  event: "start-outing",
  bad: { body: { checkBeforeDb: 20 } },
  badField: "checkBeforeDb",
  call: async (site) => ({
    method: "post",
    path: "/outings",
    body: {
      instrumentId: (await buildInstrument({ site })).id,
      workerId: (await buildWorker({ site })).id,
      date,
      outAt: at("06:00"),
    },
  }),
});
describeEndpoint({
  route: "POST /runs/:id/back",
  as: "officer",
  not: "auditor",
  event: "end-outing",
  status: 200,
  bad: { body: { covers: "most of it" } },
  badField: "covers",
  call: async (site) => ({
    method: "post",
    path: `/runs/${await buildOuting(site)}/back`,
    revision: 1,
    body: back,
  }),
});
describeEndpoint({
  route: "POST /runs/:id/undo-out",
  as: "officer",
  not: "supervisor",
  event: "undo-outing",
  status: 200,
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async (site) => ({
    method: "post",
    path: `/runs/${await buildOuting(site)}/undo-out`,
    revision: 1,
    body: { reason: "wrong instrument" },
  }),
});

describe("out and back", () => {
  test("what comes back is one run with its length, and already in the day", async () => {
    const { client, worker, start, site } = await buildDesk();
    await enterShift(client, site, worker);

    const out = await client.post("/outings", start);
    expect(out.status).toBe(201);
    expect(out.body).toMatchObject({ isOut: true, durationMin: null, readings: [], backAt: null });

    const done = await send(client, `/runs/${out.body.id}/back`, back, 1);
    expect(done.status).toBe(200);
    // 06:00 to 14:30.
    expect(done.body).toMatchObject({ isOut: false, durationMin: 510, doubts: [], revision: 2 });
    expect(done.body.readings[0]).toMatchObject({ averageDb: 91.2, source: "instrument" });

    const [revision] = await select<{ id: string }>(
      "SELECT current_revision_id AS id FROM runs WHERE id = $1",
      [out.body.id],
    );
    expect(await runsOfResult(worker.id)).toEqual([revision!.id]);
  });

  test("while it is out it says nothing about its worker's day", async () => {
    const { client, worker, start, site } = await buildDesk();
    await client.post("/outings", start);
    const crew = await enterShift(client, site, worker);
    expect(await runsOfResult(worker.id)).toEqual([]);
    const grid = await client.get(`/crews/${crew.id}/day?date=${date}`);
    expect(grid.body.rows[0].readings).toEqual([]);
  });

  test("elapsed minutes, when the clock is set back in the night", async () => {
    // Europe/Berlin on 25 October 2026: 22:00 to 06:00 on the clock are nine hours.
    const { client, start } = await buildDesk({ timeZone: "Europe/Berlin" });
    const out = await client.post("/outings", {
      ...start,
      date: "2026-10-24",
      outAt: "2026-10-24T22:00:00+02:00",
    });
    const { body } = await send(
      client,
      `/runs/${out.body.id}/back`,
      { ...back, backAt: "2026-10-25T06:00:00+01:00" },
      1,
    );
    expect(body.durationMin).toBe(540);
  });

  test("still out comes first, then what is reserved for the day, then the rest by number", async () => {
    const { client, site, start, worker } = await buildDesk();
    await buildInstrument({ site, serialNumber: "A 1" });
    const reserved = await buildInstrument({ site, serialNumber: "Z 9" });
    await buildInstrument({ site, kind: "calibrator", serialNumber: "A 0" });
    const job = await insert("jobs", {
      organizationId: site.organizationId,
      siteId: site.id,
      name: "Fitters",
    });
    const surveyId = await insert("surveys", {
      organizationId: site.organizationId,
      siteId: site.id,
      jobId: job,
      name: "Fitters in spring",
      strategy: "task",
      fromDate: date,
      toDate: date,
      drawSeed: "seed",
    });
    await insert("instrument_reservations", {
      organizationId: site.organizationId,
      surveyId,
      instrumentId: reserved.id,
      valid: `[${date},${date}]`,
    });
    await client.post("/outings", start);
    const { body } = await client.get(`/sites/${site.id}/outings?date=${date}`);
    expect(body.rows.map((row: { serialNumber: string }) => row.serialNumber)).toEqual([
      expect.stringContaining("serial"),
      "Z 9",
      "A 1",
    ]);
    expect(body.rows[0].run).toMatchObject({
      isOut: true,
      workerName: worker.name,
      outAt: at("06:00"),
      checkBeforeDb: 114,
    });
    expect(body.rows[1].reservedFor).toEqual({ surveyId, surveyName: "Fitters in spring" });
    expect(body.can).toEqual({ change: true });
  });

  test("says when the worker's shift ends, by the shift or by the crew's usual one", async () => {
    const { client, site, start, worker } = await buildDesk({ timeZone: "Europe/Berlin" });
    await buildCrew({ site, members: [worker], usualStart: "06:00", usualLengthMin: 480 });
    await client.post("/outings", { ...start, date: "2026-07-01", outAt: "2026-07-01T04:00:00Z" });
    const usual = await client.get(`/sites/${site.id}/outings`);
    expect(usual.body.rows[0].run.expectedBackAt).toBe("2026-07-01T12:00:00.000Z");
    await buildShift(worker, { date: "2026-07-01", localStart: "06:00", lengthMin: 600 });
    const worked = await client.get(`/sites/${site.id}/outings`);
    // The factory's shift is worked in UTC.
    expect(worked.body.rows[0].run.expectedBackAt).toBe("2026-07-01T16:00:00.000Z");
  });

  test("two people who send the same instrument out at once: one does, the other is told who", async () => {
    const { client, site, start } = await buildDesk();
    const other = await officerAt(site);
    const worker = await buildWorker({ site });
    const answers = await Promise.all([
      client.post("/outings", start),
      other.post("/outings", { ...start, workerId: worker.id }),
    ]);
    expect(answers.map(({ status }) => status).toSorted()).toEqual([201, 409]);
    const refused = answers.find(({ status }) => status === 409)!;
    const done = answers.find(({ status }) => status === 201)!;
    expect(refused.body.code).toBe("already-out");
    expect(refused.body.params).toMatchObject({
      withName: done.body.workerName,
      authorName: done.body.authorName,
      outAt: at("06:00"),
    });
    const runs = await select("SELECT 1 FROM runs WHERE instrument_id = $1", [start.instrumentId]);
    expect(runs).toHaveLength(1);
  });

  test("two people who write it back: the second sees what the first wrote", async () => {
    const { client, site, start } = await buildDesk();
    const other = await officerAt(site);
    const { body: run } = await client.post("/outings", start);
    expect((await send(client, `/runs/${run.id}/back`, back, 1)).status).toBe(200);
    const late = await send(other, `/runs/${run.id}/back`, { ...back, backAt: at("15:00") }, 1);
    expect(late.status).toBe(412);
    expect(late.body.current).toMatchObject({ revision: 2, backAt: at("14:30") });
    expect(late.body.current.authorName).toBeTruthy();
    const again = await send(other, `/runs/${run.id}/back`, back, 2);
    expect([again.status, again.body.code]).toEqual([409, "wrong-state"]);
  });

  test("runs on one instrument don't overlap, and one that was struck is in nobody's way", async () => {
    const { client, start } = await buildDesk();
    const { body: first } = await client.post("/outings", start);
    await send(client, `/runs/${first.id}/back`, back, 1);
    const overlapping = await client.post("/outings", { ...start, outAt: at("14:00") });
    expect([overlapping.status, overlapping.body.code]).toEqual([409, "instruments-overlap"]);
    const after = await client.post("/outings", { ...start, outAt: at("14:30") });
    expect(after.status).toBe(201);
    expect(
      (await send(client, `/runs/${after.body.id}/undo-out`, { reason: "never left the desk" }, 1))
        .body,
    ).toMatchObject({ isVoid: true, revision: 2 });
    expect((await client.post("/outings", { ...start, outAt: at("14:45") })).status).toBe(201);
  });

  test("goes to a place without a worker, never to nobody and nowhere", async () => {
    const { client, site, start } = await buildDesk();
    const area = await buildArea({ site });
    const nowhere = await client.post("/outings", { ...start, workerId: null });
    expect(nowhere.body.issues).toMatchObject([{ path: ["workerId"], code: "worker-or-place" }]);
    const placed = await client.post("/outings", { ...start, workerId: null, areaId: area.id });
    expect(placed.body).toMatchObject({ workerId: null, areaName: area.name });
  });

  test.each([
    ["before it went out", at("05:00"), "ends-before-start"],
    ["more than a day later", at("06:01", daysFromToday(-1)), "longer-than-a-day"],
    ["tomorrow", at("06:00", daysFromToday(1)), "in-the-future"],
  ])("is not back %s", async (_, backAt, code) => {
    const { client, start } = await buildDesk();
    // A day earlier, so that a day later is not ahead of the clock.
    const earlier = { ...start, date: daysFromToday(-2), outAt: at("06:00", daysFromToday(-2)) };
    const { body: run } = await client.post(
      "/outings",
      code === "longer-than-a-day" ? earlier : start,
    );
    const refused = await send(client, `/runs/${run.id}/back`, { ...back, backAt }, 1);
    expect(refused.status).toBe(422);
    expect(refused.body.issues).toMatchObject([{ path: ["backAt"], code }]);
  });
});

describe("what a run covers", () => {
  const reading = { readings: [{ settings: laeq, averageDb: 91.2 }] };

  test("an hour is not the shift unless somebody says why", async () => {
    const { client, worker, start, site } = await buildDesk();
    await enterShift(client, site, worker);
    const { body: run } = await client.post("/outings", start);
    const hour = { ...back, ...reading, backAt: at("07:00") };
    const refused = await send(client, `/runs/${run.id}/back`, hour, 1);
    expect(refused.body.issues).toMatchObject([
      {
        path: ["keptReason"],
        code: "shorter-than-shift",
        params: { coveredMin: 60, shiftMin: 480 },
      },
    ]);
    const part = await send(client, `/runs/${run.id}/back`, { ...hour, covers: "part" }, 1);
    expect(part.body).toMatchObject({ covers: "part", doubts: [], keptReason: null });
    const [day] = await select<{ outside_db: number }>(
      "SELECT x.outside_db FROM days d JOIN day_results x ON x.id = d.current_result_id WHERE d.worker_id = $1",
      [worker.id],
    );
    // As evidence alone an hour leaves the day to its task: eight hours at 80 dB.
    expect(day!.outside_db).toBeCloseTo(80, 9);
  });

  test("outside the shift it neither covers nor stands for it; the crew's usual one, where none is entered yet", async () => {
    const { client, worker, start, site } = await buildDesk();
    await buildCrew({ site, members: [worker], usualStart: "14:00", usualLengthMin: 480 });
    const { body: run } = await client.post("/outings", start);
    const refused = await send(
      client,
      `/runs/${run.id}/back`,
      { ...back, backAt: at("13:00"), covers: "projected" },
      1,
    );
    expect(refused.body.issues).toMatchObject([
      { code: "outside-shift", params: { from: "14:00", to: "22:00" } },
    ]);
    const kept = await send(
      client,
      `/runs/${run.id}/back`,
      { ...back, backAt: at("13:00"), covers: "projected", keptReason: "swapped with the morning" },
      1,
    );
    expect(kept.body).toMatchObject({
      doubts: ["outside-shift"],
      keptReason: "swapped with the morning",
    });
  });

  test("so is a run on its own page", async () => {
    const { client, worker, instrument, site } = await buildDesk();
    await enterShift(client, site, worker);
    const run = {
      instrumentId: instrument.id,
      workerId: worker.id,
      date,
      durationMin: 60,
      covers: "shift",
      ...reading,
    };
    const refused = await client.post("/runs", run);
    expect(refused.body.issues).toMatchObject([
      { path: ["keptReason"], code: "shorter-than-shift" },
    ]);
    expect((await client.post("/runs", { ...run, covers: "projected" })).status).toBe(201);
  });

  test("so is one in the day's grid, and the other rows are saved", async () => {
    const { client, worker, instrument, site } = await buildDesk();
    const other = await buildWorker({ site });
    const task = await buildTask({ site, levelDb: 80, metric: { kind: "steady" } });
    const crew = await buildCrew({ site, members: [worker, other] });
    const row = (workerId: string) => ({
      kind: "worked",
      workerId,
      localStart: "06:00",
      lengthMin: 480,
      unaccounted: { how: "unknown" },
      tasks: [{ taskId: task.id, durationMin: 480 }],
    });
    const run = { instrumentId: instrument.id, durationMin: 60, covers: "shift", ...reading };
    const save = (covers: string) =>
      client.post(`/crews/${crew.id}/day`, {
        date,
        rows: [row(other.id), { ...row(worker.id), run: { ...run, covers } }],
      });
    const { body } = await save("shift");
    expect(body.saved).toHaveLength(1);
    expect(body.refused).toMatchObject([
      {
        index: 1,
        issues: [
          {
            path: ["run", "covers"],
            code: "shorter-than-shift",
            params: { coveredMin: 60, shiftMin: 480 },
          },
        ],
      },
    ]);
  });
});

describe("a day gone by", () => {
  const sheet = { ...back, backAt: at("14:30") };

  test("is caught up in one entry, whatever the instrument did since", async () => {
    const { client, worker, start, site } = await buildDesk();
    await enterShift(client, site, worker);
    const later = await buildWorker({ site });
    await client.post("/outings", { ...start, workerId: later.id, outAt: at("16:00") });
    const { status, body } = await client.post("/outings", { ...start, back: sheet });
    expect(status).toBe(201);
    expect(body).toMatchObject({
      isOut: false,
      durationMin: 510,
      doubts: [],
      outAt: at("06:00"),
      backAt: at("14:30"),
    });
    const [revision] = await select<{ id: string }>(
      "SELECT current_revision_id AS id FROM runs WHERE id = $1",
      [body.id],
    );
    expect(await runsOfResult(worker.id)).toEqual([revision!.id]);
  });

  test("its doubts are asked about, and an overlapping run is named", async () => {
    const { client, start } = await buildDesk();
    const refused = await client.post("/outings", {
      ...start,
      checkBeforeDb: null,
      back: { ...sheet, doubts: ["clipped"] },
    });
    expect(refused.body.issues.map(({ code }: { code: string }) => code)).toEqual([
      "field-check-missing",
      "clipped",
    ]);
    const { body: first } = await client.post("/outings", { ...start, back: sheet });
    const second = await client.post("/outings", { ...start, outAt: at("14:00"), back: sheet });
    expect([second.status, second.body.code]).toEqual([409, "instruments-overlap"]);
    expect(second.body).toMatchObject({
      runId: first.id,
      params: { from: at("06:00"), to: at("14:30") },
    });
  });

  test("does not show an instrument as out that went out after it", async () => {
    const { client, site, start } = await buildDesk();
    await client.post("/outings", {
      ...start,
      date: daysFromToday(0),
      outAt: at("00:01", daysFromToday(0)),
    });
    const past = await client.get(`/sites/${site.id}/outings?date=${date}`);
    expect(past.body.rows[0].run).toBeNull();
    const present = await client.get(`/sites/${site.id}/outings?date=${daysFromToday(0)}`);
    expect(present.body.rows[0].run).toMatchObject({ isOut: true });
  });
});

describe("what speaks against a run", () => {
  test("a reason that nothing calls for is not kept", async () => {
    const { client, start } = await buildDesk();
    const { body: run } = await client.post("/outings", start);
    const done = await send(
      client,
      `/runs/${run.id}/back`,
      { ...back, keptReason: "left over from an earlier question" },
      1,
    );
    expect(done.body).toMatchObject({ doubts: [], keptReason: null });
  });

  test("a missing field check is asked about", async () => {
    const { client, start } = await buildDesk();
    const { body: run } = await client.post("/outings", { ...start, checkBeforeDb: null });
    const refused = await send(client, `/runs/${run.id}/back`, back, 1);
    expect(refused.body.issues).toMatchObject([
      { path: ["keptReason"], code: "field-check-missing" },
    ]);
  });

  test("is asked about at its return, kept with a reason, and takes the standard's name away", async () => {
    const { client, start } = await buildDesk();
    const { body: run } = await client.post("/outings", start);
    const drifted = { ...back, checkAfterDb: 113.2, doubts: ["clipped"] };
    const refused = await send(client, `/runs/${run.id}/back`, drifted, 1);
    expect(refused.status).toBe(422);
    expect(refused.body.issues.map(({ code }: { code: string }) => code)).toEqual([
      "field-check-drift",
      "clipped",
    ]);
    const kept = await send(
      client,
      `/runs/${run.id}/back`,
      { ...drifted, keptReason: "battery cover was open for the second check" },
      1,
    );
    expect(kept.body).toMatchObject({
      doubts: ["field-check-drift", "clipped"],
      keptReason: "battery cover was open for the second check",
    });
  });

  test("114 entered as 94 is not called drift", async () => {
    const { client, start } = await buildDesk();
    const { body: run } = await client.post("/outings", start);
    const refused = await send(client, `/runs/${run.id}/back`, { ...back, checkAfterDb: 94 }, 1);
    expect(refused.body.issues).toMatchObject([
      {
        path: ["keptReason"],
        code: "field-check-mistyped",
        params: { beforeDb: 114, afterDb: 94 },
      },
    ]);
  });

  test("a discarded run stays on record and counts for nothing", async () => {
    const { client, start, worker, site } = await buildDesk();
    await enterShift(client, site, worker);
    const { body: run } = await client.post("/outings", start);
    const { body } = await send(
      client,
      `/runs/${run.id}/back`,
      { ...back, checkAfterDb: 112, discardReason: "fell into the coolant" },
      1,
    );
    expect(body).toMatchObject({ isVoid: true, isOut: false, doubts: ["field-check-drift"] });
    expect(await runsOfResult(worker.id)).toEqual([]);
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE subject_id = $1 ORDER BY id",
      [run.id],
    );
    expect(events.map(({ action }) => action)).toEqual(["start-outing", "discard-outing"]);
  });

  test("a certificate out of date is asked about in the morning; its reason holds in the evening", async () => {
    const { client, site, start } = await buildDesk();
    const old = await buildInstrument({ site, calibrationDueOn: daysFromToday(-30) });
    const refused = await client.post("/outings", { ...start, instrumentId: old.id });
    expect(refused.body.issues).toMatchObject([
      { path: ["keptReason"], code: "calibration-out-of-date" },
    ]);
    const { body: run } = await client.post("/outings", {
      ...start,
      instrumentId: old.id,
      keptReason: "the other two are at the laboratory",
    });
    const done = await send(client, `/runs/${run.id}/back`, back, 1);
    expect(done.body).toMatchObject({
      doubts: ["calibration-out-of-date"],
      keptReason: "the other two are at the laboratory",
    });
    const { body: second } = await client.post("/outings", {
      ...start,
      instrumentId: old.id,
      outAt: at("16:00"),
      keptReason: "the other two are at the laboratory",
    });
    const drifted = await send(
      client,
      `/runs/${second.id}/back`,
      { ...back, backAt: at("17:00"), checkAfterDb: 113.2 },
      1,
    );
    expect(drifted.status).toBe(422);
  });

  test("an instrument that is out of use, or that calibrates others, does not go out", async () => {
    const { client, site, start } = await buildDesk();
    const calibrator = await buildInstrument({ site, kind: "calibrator" });
    const refused = await client.post("/outings", { ...start, instrumentId: calibrator.id });
    expect(refused.body.issues).toMatchObject([
      { path: ["instrumentId"], code: "instrument-not-for-runs" },
    ]);
  });
});
