import { describe, expect, test } from "vitest";
import { openCalibrationFindings } from "../../server/jobs/look-after";
import { inTransaction } from "../../server/lib/db";
import {
  buildCrew,
  buildInstrument,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const passed = { doneOn: daysFromToday(-2), hasPassed: true, dueOn: daysFromToday(700) };

describeEndpoint({
  route: "GET /instruments/:id/calibrations",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/instruments/${(await buildInstrument({ site })).id}/calibrations`,
  }),
});
describeEndpoint({
  route: "POST /instruments/:id/calibrations",
  as: "officer",
  not: "auditor",
  event: "record-calibration",
  bad: { body: { hasPassed: false } },
  badField: "dueOn",
  call: async (site) => ({
    method: "post",
    path: `/instruments/${(await buildInstrument({ site })).id}/calibrations`,
    body: passed,
  }),
});

async function buildDesk() {
  const site = await buildSite();
  const worker = await buildWorker({ site });
  const instrument = await buildInstrument({ site, calibrationDueOn: daysFromToday(30) });
  const { organizationId } = site;
  const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const path = `/instruments/${instrument.id}/calibrations`;
  const run = (date: string, more: object = {}) =>
    client.post("/runs", {
      instrumentId: instrument.id,
      workerId: worker.id,
      date,
      durationMin: 480,
      covers: "shift",
      readings: [
        {
          settings: {
            criterionLevelDb: 85,
            exchangeRateDb: 3,
            thresholdDb: null,
            weighting: "A",
            response: "slow",
          },
          averageDb: 88,
        },
      ],
      ...more,
    });
  return { site, worker, instrument, client, path, run };
}
const dueOf = async (id: string) =>
  (
    await select<{ due: string }>(
      "SELECT calibration_due_on::text AS due FROM instruments WHERE id = $1",
      [id],
    )
  )[0]!.due;

describe("an instrument's calibrations", () => {
  test("the latest that it passed says until when it is good; an older one typed later does not", async () => {
    const { client, path, instrument } = await buildDesk();
    const { status, body } = await client.post(path, passed);
    expect(status).toBe(201);
    expect(body.rows).toMatchObject([{ hasPassed: true, dueOn: passed.dueOn }]);
    expect(await dueOf(instrument.id)).toBe(passed.dueOn);
    await client.post(path, {
      doneOn: daysFromToday(-800),
      hasPassed: true,
      dueOn: daysFromToday(-70),
    });
    expect(await dueOf(instrument.id)).toBe(passed.dueOn);
  });

  test("a run is held to the certificate of its own date", async () => {
    const { client, path, run } = await buildDesk();
    await client.post(path, {
      doneOn: daysFromToday(-400),
      hasPassed: true,
      dueOn: daysFromToday(-35),
    });
    await client.post(path, { ...passed, doneOn: daysFromToday(-10) });
    expect((await run(daysFromToday(-36))).status).toBe(201);
    const between = await run(daysFromToday(-20));
    expect(between.body.issues).toMatchObject([
      { path: ["keptReason"], code: "calibration-out-of-date" },
    ]);
    expect((await run(daysFromToday(-9))).status).toBe(201);
  });

  test("failed: what was measured since the last good check is listed, and one finding opens", async () => {
    const { client, path, instrument, run, site } = await buildDesk();
    await client.post(path, { ...passed, doneOn: daysFromToday(-60) });
    await run(daysFromToday(-50));
    const checked = await run(daysFromToday(-40), { checkBeforeDb: 94, checkAfterDb: 94.2 });
    const { body: early } = await run(daysFromToday(-30));
    const { body: late } = await run(daysFromToday(-20), { checkBeforeDb: 94 });
    const failed = await client.post(path, {
      doneOn: daysFromToday(-5),
      hasPassed: false,
      foundErrorDb: -1.4,
    });
    expect(failed.body.lastGoodCheck).toBe("field-check");
    expect(checked.status).toBe(201);
    expect(failed.body.inDoubt.map(({ runId }: { runId: string }) => runId)).toEqual([
      late.id,
      early.id,
    ]);
    const findings = await select<{ facts: object; state: string; id: string }>(
      "SELECT id, facts, state FROM findings WHERE instrument_id = $1 AND kind = 'instrument'",
      [instrument.id],
    );
    expect(findings).toMatchObject([
      { state: "new", facts: { runsCount: 2, calibrationFailedOn: daysFromToday(-5) } },
    ]);
    // From now on it has no certificate.
    const after = await run(daysFromToday(-1));
    expect(after.body.issues).toMatchObject([{ code: "calibration-failed" }]);

    // Mended and calibrated again it is good; whether the old runs stand is still somebody's to say.
    await client.post(path, { ...passed, doneOn: daysFromToday(-1) });
    await inTransaction({ organizationId: site.organizationId }, () =>
      openCalibrationFindings(site.organizationId),
    );
    const [open] = await select<{ state: string }>("SELECT state FROM findings WHERE id = $1", [
      findings[0]!.id,
    ]);
    expect(open!.state).toBe("new");
    expect((await run(daysFromToday(-1))).status).toBe(201);
  });

  test("counts the results that rest on a run in doubt", async () => {
    const { client, path, run, site, worker } = await buildDesk();
    const task = await buildTask({ site, levelDb: 80, metric: { kind: "steady" } });
    const crew = await buildCrew({ site, members: [worker] });
    const date = daysFromToday(-20);
    await client.post(`/crews/${crew.id}/day`, {
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
    await run(date);
    const { body } = await client.post(path, { doneOn: daysFromToday(-5), hasPassed: false });
    expect(body.lastGoodCheckAt).toBeNull();
    expect(body.inDoubt).toMatchObject([{ date, resultsCount: 1 }]);
  });

  test("lies neither ahead nor ends before it begins", async () => {
    const { client, path } = await buildDesk();
    const ahead = await client.post(path, { doneOn: daysFromToday(3), hasPassed: true });
    expect(ahead.body.issues).toMatchObject([{ path: ["doneOn"], code: "in-the-future" }]);
    const backwards = await client.post(path, { ...passed, dueOn: daysFromToday(-9) });
    expect(backwards.body.issues).toMatchObject([{ path: ["dueOn"], code: "ends-before-start" }]);
  });
});

describe("an instrument without a certificate", () => {
  test("is not slipped into a day's grid", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const crew = await buildCrew({ site, members: [worker] });
    const task = await buildTask({ site });
    const old = await buildInstrument({ site, calibrationDueOn: daysFromToday(-30) });
    const { organizationId } = site;
    const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    const saved = await client.post(`/crews/${crew.id}/day`, {
      date: daysFromToday(-1),
      rows: [
        {
          kind: "worked",
          workerId: worker.id,
          localStart: "06:00",
          lengthMin: 480,
          unaccounted: { how: "unknown" },
          tasks: [{ taskId: task.id, durationMin: 480 }],
          run: {
            instrumentId: old.id,
            runId: null,
            runRevision: null,
            durationMin: 480,
            covers: "shift",
            readings: [
              {
                settings: {
                  criterionLevelDb: 85,
                  exchangeRateDb: 3,
                  thresholdDb: null,
                  weighting: "A",
                  response: "slow",
                },
                averageDb: 88,
              },
            ],
          },
        },
      ],
    });
    expect(saved.body.refused).toMatchObject([
      { issues: [{ path: ["run", "instrumentId"], code: "run-doubtful" }] },
    ]);
    expect(await select("SELECT 1 FROM runs WHERE instrument_id = $1", [old.id])).toHaveLength(0);
  });
});
