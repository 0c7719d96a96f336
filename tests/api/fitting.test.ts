import { describe, expect, test } from "vitest";
import { closeFitDues, openFitDues } from "../../server/commands/follow-fits";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import { inTransaction } from "../../server/lib/db";
import type { Candidate } from "../../shared/schemas/fit";
import {
  buildAssignment,
  buildFitTest,
  buildIssue,
  buildJob,
  buildProtector,
  buildShift,
  buildSite,
  buildSupervisorOf,
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

const today = daysFromToday(0);
const facts = { leftDb: [26, 28], rightDb: [24, 25, 26], methodSdDb: 2, bands: null };
const fitBody = (modelId: string, more: object = {}) => ({
  modelId,
  testedOn: today,
  method: "psychophysical",
  facts,
  confidencePct: 84,
  needDb: 20,
  ...more,
});
const correction = (more: object = {}) => {
  const { modelId: _, testedOn: __, ...entry } = fitBody("");
  return { ...entry, reason: "misread", ...more };
};

async function models(site: Site) {
  const { organizationId } = site;
  return {
    muff: await buildProtector({ organizationId, name: "Fenmuff", kind: "earmuff" }),
    plug: await buildProtector({ organizationId, name: "Alder foam", kind: "foam-plug" }),
  };
}
const issueOf = (modelId: string, offeredModelIds: string[], more: object = {}) => ({
  modelId,
  issuedOn: today,
  offeredModelIds,
  wasInstructed: true,
  isAcknowledged: true,
  ...more,
});

describeEndpoint({
  route: "GET /fitting/lookup",
  as: "officer",
  not: "supervisor",
  event: null,
  bad: null,
  namesNothing: true,
  call: async (site) => {
    const { employeeNumber } = await buildWorker({ site });
    return { method: "get", path: `/fitting/lookup?employeeNumber=${employeeNumber}` };
  },
});
describeEndpoint({
  route: "GET /workers/:id/fitting",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/workers/${(await buildWorker({ site })).id}/fitting`,
  }),
});
describeEndpoint({
  route: "GET /fit-tests",
  as: "auditor",
  not: "administrator",
  event: null,
  bad: null,
  namesNothing: true,
  call: async (site) => {
    await buildFitTest({ worker: await buildWorker({ site }) });
    return { method: "get", path: "/fit-tests" };
  },
});
describeEndpoint({
  route: "POST /workers/:id/fit-tests",
  as: "officer",
  not: "auditor",
  event: "record-fit-test",
  bad: { body: { facts: { ...facts, leftDb: [], rightDb: [] } } },
  badField: "facts.leftDb",
  call: async (site) => ({
    method: "post",
    path: `/workers/${(await buildWorker({ site })).id}/fit-tests`,
    body: fitBody((await models(site)).muff.id),
  }),
});
describeEndpoint({
  route: "PUT /fit-tests/:id",
  as: "officer",
  not: "auditor",
  event: "correct-fit-test",
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async (site) => ({
    method: "put",
    path: `/fit-tests/${(await buildFitTest({ worker: await buildWorker({ site }) })).id}`,
    body: correction(),
    revision: 1,
  }),
});
describeEndpoint({
  route: "POST /fit-tests/:id/void",
  as: "officer",
  not: "supervisor",
  event: "void-fit-test",
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async (site) => ({
    method: "post",
    path: `/fit-tests/${(await buildFitTest({ worker: await buildWorker({ site }) })).id}/void`,
    body: { reason: "another worker’s" },
    revision: 1,
  }),
});
describeEndpoint({
  route: "GET /issues",
  as: "auditor",
  not: "administrator",
  event: null,
  bad: null,
  namesNothing: true,
  call: async (site) => {
    await buildIssue({ worker: await buildWorker({ site }) });
    return { method: "get", path: "/issues" };
  },
});
describeEndpoint({
  route: "POST /workers/:id/issues",
  as: "officer",
  not: "auditor",
  event: "issue-protector",
  bad: { body: { offeredModelIds: [] } },
  badField: "offeredModelIds",
  call: async (site) => {
    const { muff, plug } = await models(site);
    return {
      method: "post",
      path: `/workers/${(await buildWorker({ site })).id}/issues`,
      body: issueOf(muff.id, [muff.id, plug.id]),
    };
  },
});
describeEndpoint({
  route: "POST /issues/:id/end",
  as: "officer",
  not: "worker",
  event: "end-issue",
  bad: { body: { endedOn: daysFromToday(2) } },
  badField: "endedOn",
  call: async (site) => ({
    method: "post",
    path: `/issues/${(await buildIssue({ worker: await buildWorker({ site }) })).id}/end`,
    body: { endedOn: today, how: "lost" },
    revision: 1,
  }),
});
describeEndpoint({
  route: "POST /issues/:id/acknowledge",
  as: "officer",
  not: "auditor",
  event: "acknowledge-issue",
  bad: null,
  call: async (site) => ({
    method: "post",
    path: `/issues/${(await buildIssue({ worker: await buildWorker({ site }) })).id}/acknowledge`,
    revision: 1,
  }),
});
describeEndpoint({
  route: "GET /workers/:id/refusals",
  as: "officer",
  not: "auditor",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/workers/${(await buildWorker({ site })).id}/refusals`,
  }),
});
describeEndpoint({
  route: "POST /workers/:id/refusals",
  as: "officer",
  not: "supervisor",
  event: "record-refusal",
  bad: { body: { happenedOn: daysFromToday(3) } },
  badField: "happenedOn",
  call: async (site) => ({
    method: "post",
    path: `/workers/${(await buildWorker({ site })).id}/refusals`,
    body: { kind: "cannot-wear", happenedOn: today, reason: "inflamed ear canal" },
  }),
});
describeEndpoint({
  route: "PUT /sites/:id/fit-policy",
  as: "officer",
  not: "administrator",
  event: "set-fit-policy",
  bad: { body: { confidencePct: 85 } },
  badField: "confidencePct",
  call: async (site) => ({
    method: "put",
    path: `/sites/${site.id}/fit-policy`,
    body: { confidencePct: 90, everyMonths: 12, afterFailDays: 14 },
    revision: 1,
  }),
});
describeEndpoint({
  route: "POST /sites/:id/fit-policy/preview",
  as: "officer",
  not: "administrator",
  event: null,
  status: 200,
  bad: { body: { firstDays: 0 } },
  badField: "firstDays",
  call: async (site) => ({
    method: "post",
    path: `/sites/${site.id}/fit-policy/preview`,
    body: { confidencePct: 90, everyMonths: 12, afterFailDays: 14 },
  }),
});
describeEndpoint({
  route: "GET /sites/:id/fits",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: null,
  call: async (site) => ({ method: "get", path: `/sites/${site.id}/fits` }),
});

interface Desk extends Awaited<ReturnType<typeof models>> {
  site: Site;
  worker: Worker;
  client: Client;
}

async function openDesk(): Promise<Desk> {
  const site = await buildSite();
  const task = await buildTask({ site, name: "Run-up", levelDb: 98 });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 240 }] });
  const worker = await buildWorker({ site, jobId: job.id });
  const { organizationId } = site;
  const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  return { site, worker, client, ...(await models(site)) };
}
const record = ({ client, worker }: Desk, body: object) =>
  client.post(`/workers/${worker.id}/fit-tests`, body);
const issue = ({ client, worker }: Desk, body: object, key?: string) =>
  client.post(`/workers/${worker.id}/issues`, body, key);
const findingsOf = (worker: Worker, kind: string) =>
  select<{ id: string; state: string; closing_reason: string | null; facts: { parDb: number } }>(
    "SELECT id, state, closing_reason, facts FROM findings WHERE worker_id = $1 AND kind = $2 ORDER BY opened_at",
    [worker.id, kind],
  );
const assignmentsOf = (worker: Worker) =>
  select<{ model: string; size: string | null; from: string; to: string | null }>(
    `SELECT inner_model_id AS model, size, lower(valid)::text AS from, (upper(valid) - 1)::text AS to FROM assignments
     WHERE worker_id = $1 ORDER BY lower(valid)`,
    [worker.id],
  );

describe("the fitting desk", () => {
  test("finds by number at once, else by name", async () => {
    const { site, client } = await openDesk();
    await buildWorker({ site, name: "R. Szabó", employeeNumber: "34" });
    await buildWorker({ site, name: "M. Okwuosa", employeeNumber: "3425" });
    const byNumber = await client.get("/fitting/lookup?employeeNumber=34");
    expect(byNumber.body.rows).toMatchObject([{ name: "R. Szabó", isExact: true }]);
    const byName = await client.get("/fitting/lookup?employeeNumber=okwu");
    expect(byName.body.rows).toMatchObject([{ employeeNumber: "3425", isExact: false }]);
    expect((await client.get("/fitting/lookup?employeeNumber=zzzz")).body.rows).toEqual([]);
  });

  test("says what the noise asks for, by the nominal day where no day is on record", async () => {
    const { client, worker, muff } = await openDesk();
    const { body } = await client.get(`/workers/${worker.id}/fitting`);
    // Directive 2003/10/EC: the upper action value of 85 dB(A), from which EN 458's words hang: 98 - 85.
    expect(body.need).toMatchObject({ outsideDb: 98, targetDb: 85, taskName: "Run-up" });
    expect(body.need.needDb).toBeCloseTo(13, 9);
    expect(body.need.reason).toBe("nominal-day");
    expect(body.policy).toEqual({ confidencePct: 84, everyMonths: null, afterFailDays: null });
    expect(body.candidates.map(({ modelId }: { modelId: string }) => modelId)).toContain(muff.id);
    expect(body.can).toEqual({ test: true, issue: true });
  });

  test("a fit of which no need was known is held against the need at the head", async () => {
    const { client, worker, muff } = await openDesk();
    await buildFitTest({ worker, model: muff, parDb: 11.5, needDb: null });
    const { body } = await client.get(`/workers/${worker.id}/fitting`);
    const row = body.candidates.find(({ modelId }: Candidate) => modelId === muff.id);
    expect(row.lastFit).toMatchObject({ hasPassed: false, needDb: body.need.needDb });
    // The test itself stays as it was recorded.
    expect(body.tests).toMatchObject([{ hasPassed: null, needDb: null }]);
  });

  test("a worker’s own days come before the job’s, and a stricter target before the rule’s", async () => {
    const { site, client } = await openDesk();
    const worker = await buildWorker({ site, personalTargetDb: 80 });
    const quiet = await client.get(`/workers/${worker.id}/fitting`);
    expect(quiet.body.need).toMatchObject({ needDb: null, reason: "no-noise" });
    const job = await buildJob({
      site,
      tasks: [
        { taskId: (await buildTask({ site, levelDb: 91 })).id, durationMin: 60 },
        { taskId: (await buildTask({ site, levelDb: 76 })).id, durationMin: 60 },
      ],
    });
    await select("UPDATE workers SET job_id = $2 WHERE id = $1", [worker.id, job.id]);
    const { body } = await client.get(`/workers/${worker.id}/fitting`);
    expect(body.need.needDb).toBeCloseTo(11, 9);

    const loud = await buildTask({ site, name: "Chipping", levelDb: 104 });
    const date = daysFromToday(-2);
    await buildShift(worker, { date, tasks: [{ taskId: loud.id, durationMin: 120 }] });
    const { organizationId } = site;
    await insert("days", { organizationId, siteId: site.id, workerId: worker.id, date });
    await recomputeStaleDays(organizationId);
    const own = await client.get(`/workers/${worker.id}/fitting`);
    expect(own.body.need).toMatchObject({ taskName: "Chipping", outsideDb: 104, reason: null });
    expect(own.body.need.needDb).toBeCloseTo(24, 9);
  });

  test("where Appendix B governs, the shift’s TWA asks", async () => {
    const site = await buildSite({ governingRuleSet: "us-general-industry" });
    const task = await buildTask({ site, levelDb: 100, metric: { kind: "steady" } });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 240 }] });
    const worker = await buildWorker({ site, jobId: job.id });
    const { organizationId } = site;
    const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    const { body } = await client.get(`/workers/${worker.id}/fitting`);
    // 29 CFR 1910.95 App. A: 4 h at 100 dBA are 200 %, TWA 16.61 lg 2 + 90 = 95.0; to 90: 5.0.
    expect(body.need.taskName).toBeNull();
    expect(body.need.outsideDb).toBeCloseTo(95, 2);
    expect(body.need.needDb).toBeCloseTo(5, 2);
    expect(body.need.mostDb).toBeNull();
    expect(body.need.isUpperBound).toBe(false);
  });

  test("of an average that left something out the most that it can have been asks", async () => {
    const site = await buildSite({ governingRuleSet: "us-general-industry" });
    const settings = { criterionLevelDb: 90, exchangeRateDb: 5, weighting: "A", response: "slow" };
    const metric = { kind: "lavg", settings: { ...settings, thresholdDb: 90 } };
    const task = await buildTask({ site, levelDb: 97, metric });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const worker = await buildWorker({ site, jobId: job.id });
    const { organizationId } = site;
    const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    const { body } = await client.get(`/workers/${worker.id}/fitting`);
    // 29 CFR 1910.95 App. A: as much again as a whole shift at its threshold of 90, 5 log2(2^(97/5) + 2^(90/5)).
    expect(body.need).toMatchObject({ isUpperBound: true });
    expect(body.need.outsideDb).toBeCloseTo(99.3, 1);
    expect(body.need.needDb).toBeCloseTo(9.3, 1);
  });

  test("a noise too deep for a fit rated in pink noise says so, and which task it is", async () => {
    const site = await buildSite({ governingRuleSet: "uk-2005" });
    const octaveBandsDb = [108, 104, 98, 90, 84, 80, 74, 68];
    const task = await buildTask({ site, levelDb: 95, octaveBandsDb });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 240 }] });
    const worker = await buildWorker({ site, jobId: job.id });
    const { organizationId } = site;
    const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    const { body } = await client.get(`/workers/${worker.id}/fitting`);
    expect(body.need).toMatchObject({ taskId: task.id, isTooDeepForOwnFit: true });
  });
});

describe("an active muff at the desk and among what is chosen from", () => {
  const flat = (db: number) => [db, db, db, db, db, db, db, db];

  /** Its label leaves 88 of 100 dB(A); the active part takes 10 dB off in every band. */
  async function openActive(creditsActivePart: boolean) {
    const site = await buildSite({ creditsActivePart });
    const task = await buildTask({ site, name: "Run-up", levelDb: 100, octaveBandsDb: flat(93) });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const worker = await buildWorker({ site, jobId: job.id });
    const { organizationId } = site;
    const active = await buildProtector({
      organizationId,
      name: "Tern active",
      kind: "active-earmuff",
      data: {
        snrDb: null,
        usRatingDb: null,
        bands: { meanDb: flat(16), sdDb: flat(4) },
        active: {
          attenuationDb: flat(10),
          delayS: null,
          gain: null,
          maximumDb: null,
          bandwidthHz: null,
          saturatesAboveDb: null,
          batteryMin: null,
        },
      } as object,
    });
    await buildAssignment({ worker, inner: active });
    const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    const desk = async () =>
      (await client.get(`/workers/${worker.id}/fitting`)).body.candidates[0] as Candidate;
    const choice = async () =>
      (await client.get(`/protector-choice?jobId=${job.id}`)).body.singles[0] as Candidate;
    const word = async () => {
      const date = daysFromToday(-1);
      await buildShift(worker, { date, tasks: [{ taskId: task.id, durationMin: 480 }] });
      await insert("days", { organizationId, siteId: site.id, workerId: worker.id, date });
      await recomputeStaleDays(organizationId);
      return (
        await select<{ word: string }>(
          "SELECT word FROM day_results WHERE worker_id = $1 ORDER BY computed_at DESC",
          [worker.id],
        )
      )[0]?.word;
    };
    return { site, job, worker, active, desk, choice, word };
  }

  test("is judged as the day is: with the part on where the site credits it and its check has passed", async () => {
    const { site, job, worker, active, desk, choice, word } = await openActive(true);
    const off = { word: "too-little", isActiveCredited: false };
    expect(await desk()).toMatchObject(off);
    expect(await choice()).toMatchObject(off);
    await buildFitTest({ worker, model: active, parDb: null, activePassed: true });
    const on = { word: "good", isActiveCredited: true };
    for (const found of [await desk(), await choice()]) {
      expect(found).toMatchObject(on);
      expect(found.wornDb).toBeCloseTo(88, 0);
      expect(found.wornActiveDb).toBeCloseTo(found.wornDb! - 10, 6);
    }
    expect(await word()).toBe("good");
    // For a group it has to have passed on all of them.
    await buildWorker({ site, jobId: job.id });
    expect(await choice()).toMatchObject(off);
    expect(await desk()).toMatchObject(on);
    // The latest check counts.
    await buildFitTest({
      worker,
      model: active,
      parDb: null,
      activePassed: false,
      testedOn: today,
    });
    expect(await desk()).toMatchObject(off);
  });

  test("one ear that passed credits nothing, and takes nothing from what the pair has passed", async () => {
    const { worker, active, desk, word } = await openActive(true);
    const check = { worker, model: active, parDb: null };
    await buildFitTest({ ...check, activePassed: true, checkedEar: "left" });
    expect(await desk()).toMatchObject({ word: "too-little", isActiveCredited: false });
    expect(await word()).toBe("too-little");
    await buildFitTest({ ...check, activePassed: true, testedOn: daysFromToday(-2) });
    expect(await desk()).toMatchObject({ word: "good", isActiveCredited: true });
    // One ear alone is enough to fail it.
    await buildFitTest({ ...check, activePassed: false, checkedEar: "right", testedOn: today });
    expect(await desk()).toMatchObject({ isActiveCredited: false });
  });

  test("no credit at the site: the part off, whatever has passed", async () => {
    const { worker, active, desk, choice, word } = await openActive(false);
    await buildFitTest({ worker, model: active, parDb: null, activePassed: true });
    for (const found of [await desk(), await choice()])
      expect(found).toMatchObject({ word: "too-little", isActiveCredited: false });
    expect(await word()).toBe("too-little");
  });
});

describe("what a worker cannot wear", () => {
  test("is out of the question, goes out only on a fit that was tested since, and a mere refusal is not", async () => {
    const desk = await openDesk();
    const { client, worker, muff, plug } = desk;
    const say = (kind: string, modelId: string) =>
      client.post(`/workers/${worker.id}/refusals`, {
        kind,
        modelId,
        happenedOn: today,
        reason: "inflamed ear canal",
      });
    await say("cannot-wear", plug.id);
    await say("refused", muff.id);
    const barOf = async (modelId: string) =>
      (await client.get(`/workers/${worker.id}/fitting`)).body.candidates.find(
        (one: { modelId: string }) => one.modelId === modelId,
      ).excludedBy?.code;
    expect(await barOf(plug.id)).toBe("cannot-wear");
    expect(await barOf(muff.id)).not.toBe("cannot-wear");
    const refused = await issue(desk, issueOf(plug.id, [muff.id, plug.id]));
    expect(refused.status).toBe(422);
    expect(refused.body.issues).toMatchObject([{ path: ["modelId"], code: "cannot-be-worn" }]);
    await record(desk, fitBody(plug.id));
    expect(await barOf(plug.id)).not.toBe("cannot-wear");
  });
});

describe("a fit test", () => {
  test("where Appendix B governs, the label's rating less 7 stands beside it", async () => {
    for (const [governingRuleSet, less7] of [
      ["us-general-industry", 16],
      ["eu-2003-10-ec", null],
    ] as const) {
      const site = await buildSite({ governingRuleSet });
      const { worker } = await buildFitTest({ worker: await buildWorker({ site }) });
      const { organizationId } = site;
      const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
      const [listed] = (await client.get(`/fit-tests?workerId=${worker.id}`)).body.rows;
      // 29 CFR 1910.95 App. B (ii): 23 − 7.
      expect(listed.labelLess7Db).toBe(less7);
    }
  });

  test("of a device that is out with the worker says issued; of another size or once brought back, tried", async () => {
    const desk = await openDesk();
    const { worker, client } = desk;
    const out = await buildIssue({ worker, model: desk.muff });
    const outcome = async () =>
      (await client.get(`/fit-tests?workerId=${worker.id}`)).body.rows.map(
        (row: { outcome: string }) => row.outcome,
      );
    await buildFitTest({ worker, model: desk.muff });
    expect(await outcome()).toEqual(["issued"]);
    await select("UPDATE protector_issues SET size = 'M' WHERE id = $1", [out.id]);
    await buildFitTest({ worker, model: desk.muff, size: "L", testedOn: today });
    expect(await outcome()).toEqual(["tried", "issued"]);
    const end = { endedOn: today, how: "returned" };
    const path = `/issues/${out.id}/end`;
    expect((await client.send({ method: "post", path, body: end, revision: 1 })).status).toBe(201);
    expect(await outcome()).toEqual(["tried", "tried"]);
  });

  test("gives the PAR of the weaker ear, tried until it is issued", async () => {
    const desk = await openDesk();
    const { body, status } = await record(desk, fitBody(desk.muff.id));
    expect(status).toBe(201);
    // Right: mean 25, s = 1, u = √(1/3 + 4) = 2.0817; one-sided 84 %: z = 0.99446; 25 − 2.0702 = 22.9298.
    expect(body.rightDb).toBeCloseTo(22.93, 2);
    expect(body).toMatchObject({ hasPassed: true, outcome: "tried", can: { change: true } });
    expect(body.parDb).toBe(body.rightDb);
    const { muff, plug } = desk;
    await issue(desk, issueOf(muff.id, [muff.id, plug.id], { fitTestId: body.id }));
    const [listed] = (await desk.client.get(`/fit-tests?workerId=${desk.worker.id}`)).body.rows;
    expect(listed).toMatchObject({ id: body.id, outcome: "issued" });
  });

  test("one ear alone is not assessed and takes the place of no fit of both, unless it falls short", async () => {
    const desk = await openDesk();
    const { client, worker, muff } = desk;
    const both = (await record(desk, fitBody(muff.id, { testedOn: daysFromToday(-1) }))).body;
    const oneEar = { ...facts, leftDb: [], rightDb: [38, 39] };
    const alone = await record(desk, fitBody(muff.id, { facts: oneEar }));
    expect(alone.body).toMatchObject({ leftDb: null, hasPassed: null });
    const own = async () =>
      (await client.get(`/workers/${worker.id}/fitting`)).body.candidates.find(
        ({ modelId }: Candidate) => modelId === muff.id,
      ).lastFit;
    expect(await own()).toMatchObject({ parDb: both.parDb, hasPassed: true });
    const short = { ...facts, leftDb: [], rightDb: [8, 9] };
    await record(desk, fitBody(muff.id, { facts: short }));
    expect(await own()).toMatchObject({ hasPassed: false });
  });

  test("what can’t be worn with what is worn beside it is not tried", async () => {
    const desk = await openDesk();
    await select("UPDATE workers SET worn_gear = '{glasses}' WHERE id = $1", [desk.worker.id]);
    const { organizationId } = desk.site;
    const worksWith = { helmet: null, glasses: false, respirator: null };
    const model = await buildProtector({ organizationId, data: { worksWith } });
    const refused = await record(desk, fitBody(model.id));
    expect(refused.body.issues).toMatchObject([{ path: ["modelId"], code: "not-with-gear" }]);
    const out = await issue(desk, issueOf(model.id, [model.id, desk.plug.id]));
    expect(out.body.issues).toContainEqual(
      expect.objectContaining({ path: ["modelId"], code: "not-with-gear" }),
    );
  });

  test("a device whose data say nothing of the noise is tried, and goes out only on a fit that passed", async () => {
    const desk = await openDesk();
    const { client, worker, plug, site } = desk;
    const spectrum = [20, 20, 20, 20, 98, 20, 20, 20];
    const task = await buildTask({ site, levelDb: 98, octaveBandsDb: spectrum });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 240 }] });
    await select("UPDATE workers SET job_id = $2 WHERE id = $1", [worker.id, job.id]);
    const { organizationId } = site;
    await buildProtector({ organizationId, data: { snrDb: 20, usRatingDb: null } });
    const bare = await buildProtector({ organizationId, data: { snrDb: null, usRatingDb: null } });
    const give = () =>
      client.post("/assignments/many", {
        workerIds: [worker.id],
        assignment: { innerModelId: bare.id, fromDate: today, taskId: task.id },
      });
    const issueBare = () => issue(desk, issueOf(bare.id, [bare.id, plug.id], { reason: "tried" }));
    const code = "no-data-no-fit";
    expect((await issueBare()).body.issues).toMatchObject([{ path: ["modelId"], code }]);
    expect((await give()).body.issues).toMatchObject([{ path: ["workerIds", 0], code }]);
    const failed = { ...facts, leftDb: [5], rightDb: [5] };
    expect((await record(desk, fitBody(bare.id, { facts: failed }))).status).toBe(201);
    expect((await issueBare()).body.issues).toMatchObject([{ path: ["modelId"], code }]);
    await record(desk, fitBody(bare.id));
    expect((await issueBare()).status).toBe(201);
    expect((await give()).status).toBe(201);
  });

  test("a correction is the next revision; who saw the earlier one is told; struck, it counts for nothing", async () => {
    const desk = await openDesk();
    const { body } = await record(desk, fitBody(desk.muff.id));
    const path = `/fit-tests/${body.id}`;
    const corrected = await desk.client.put(path, correction({ needDb: 30 }), 1);
    expect(corrected.body).toMatchObject({ revision: 2, hasPassed: false });
    expect((await desk.client.put(path, correction(), 1)).status).toBe(412);
    const struck = await desk.client.send({
      method: "post",
      path: `${path}/void`,
      body: { reason: "another worker’s ears" },
      revision: 2,
    });
    expect(struck.body).toMatchObject({
      isVoid: true,
      struckReason: "another worker’s ears",
      dueOn: null,
      can: { change: false },
    });
    expect((await desk.client.put(path, correction(), struck.body.revision)).status).toBe(409);
  });

  test("pages by date", async () => {
    const desk = await openDesk();
    for (const day of [-1, -2, -3])
      await buildFitTest({ worker: desk.worker, testedOn: daysFromToday(day) });
    const first = await desk.client.get(`/fit-tests?workerId=${desk.worker.id}&limit=2`);
    expect(first.body.rows).toHaveLength(2);
    const second = await desk.client.get(
      `/fit-tests?workerId=${desk.worker.id}&limit=2&cursor=${first.body.next}`,
    );
    expect(second.body.rows).toHaveLength(1);
    expect(second.body.next).toBeNull();
  });
});

describe("findings of fits", () => {
  const failing = { needDb: 30 };

  test("a failed fit opens one, which a refit closes; a later fail brings it back", async () => {
    const desk = await openDesk();
    const { worker, muff } = desk;
    await record(desk, fitBody(muff.id, { ...failing, testedOn: daysFromToday(-9) }));
    await record(desk, fitBody(muff.id, { needDb: 31, testedOn: daysFromToday(-8) }));
    const [open] = await findingsOf(worker, "fit-failed");
    expect(open).toMatchObject({ state: "new", facts: { needDb: 31, protector: "Fenmuff" } });
    const waiting = await desk.client.get("/waiting");
    expect(waiting.body.findings).toMatchObject([
      { kind: "fit-failed", worker: { id: worker.id } },
    ]);

    await record(desk, fitBody(muff.id, { testedOn: daysFromToday(-5) }));
    expect(await findingsOf(worker, "fit-failed")).toMatchObject([
      { state: "closed", closing_reason: "refitted" },
    ]);
    await record(desk, fitBody(muff.id, failing));
    expect((await findingsOf(worker, "fit-failed")).map(({ state }) => state)).toEqual([
      "closed",
      "came-back",
    ]);
  });

  test("of a candidate that did not fit the issue of one that does closes it", async () => {
    const desk = await openDesk();
    const { worker, muff, plug } = desk;
    await record(desk, fitBody(muff.id, failing));
    const { body } = await record(desk, fitBody(plug.id));
    expect(await findingsOf(worker, "fit-failed")).toMatchObject([{ state: "new" }]);
    const sent = await issue(desk, issueOf(plug.id, [muff.id, plug.id], { fitTestId: body.id }));
    expect(sent.status).toBe(201);
    expect(await findingsOf(worker, "fit-failed")).toMatchObject([
      { state: "closed", closing_reason: "other-issued" },
    ]);
  });

  test("a device that is still worn stays a finding beside another that fits", async () => {
    const desk = await openDesk();
    const { worker, muff, plug } = desk;
    await buildAssignment({ worker, inner: { ...muff, organizationId: "", name: "" } });
    await record(desk, fitBody(muff.id, failing));
    const { body } = await record(desk, fitBody(plug.id));
    const task = await buildTask({ site: desk.site });
    await issue(
      desk,
      issueOf(plug.id, [muff.id, plug.id], { fitTestId: body.id, taskId: task.id }),
    );
    expect(await findingsOf(worker, "fit-failed")).toMatchObject([{ state: "new" }]);
  });

  test("a correction and a struck test take it back", async () => {
    const desk = await openDesk();
    const { worker, muff, client } = desk;
    const { body } = await record(desk, fitBody(muff.id, failing));
    await client.put(`/fit-tests/${body.id}`, correction(), 1);
    expect(await findingsOf(worker, "fit-failed")).toMatchObject([
      { state: "closed", closing_reason: "evidence-gone" },
    ]);
    await client.put(`/fit-tests/${body.id}`, correction(failing), 2);
    const again = await findingsOf(worker, "fit-failed");
    // What was withdrawn never was: it is new and did not come back.
    expect(again.map(({ state }) => state)).toEqual(["closed", "new"]);
    await client.send({
      method: "post",
      path: `/fit-tests/${body.id}/void`,
      body: { reason: "struck" },
      revision: 3,
    });
    expect((await findingsOf(worker, "fit-failed")).map(({ state }) => state)).toEqual([
      "closed",
      "closed",
    ]);
  });

  test("what a person closed stays closed until another test fails", async () => {
    const desk = await openDesk();
    const { worker, muff, client } = desk;
    await record(desk, fitBody(muff.id, { ...failing, testedOn: daysFromToday(-3) }));
    const [open] = await findingsOf(worker, "fit-failed");
    await client.send({
      method: "post",
      path: `/findings/${open!.id}/steps`,
      body: { kind: "close", text: "moved to a quiet place" },
      revision: 1,
    });
    await record(desk, fitBody(desk.plug.id));
    expect(await findingsOf(worker, "fit-failed")).toHaveLength(1);
    await record(desk, fitBody(muff.id, failing));
    expect((await findingsOf(worker, "fit-failed")).map(({ state }) => state)).toEqual([
      "closed",
      "came-back",
    ]);
  });
});

test("an assignment that is ended by hand closes what is open on its fit", async () => {
  const desk = await openDesk();
  const { worker, site, muff } = desk;
  const assignment = await buildAssignment({
    worker,
    inner: { ...muff, organizationId: site.organizationId, name: "" },
    fromDate: daysFromToday(-30),
  });
  await record(desk, fitBody(muff.id, { needDb: 30 }));
  expect(await findingsOf(worker, "fit-failed")).toMatchObject([{ state: "new" }]);
  const ended = await desk.client.patch(`/assignments/${assignment.id}`, { toDate: today }, 1);
  expect(ended.status).toBeLessThan(300);
  expect(await findingsOf(worker, "fit-failed")).toMatchObject([
    { state: "closed", closing_reason: "no-longer-worn" },
  ]);
});

describe("fits that are due", () => {
  const look = ({ site }: Desk) =>
    inTransaction({ organizationId: site.organizationId }, async () => {
      await closeFitDues(site.organizationId);
      await openFitDues(site.organizationId);
    });
  const policy = (desk: Desk, body: object, revision = 1) =>
    desk.client.put(
      `/sites/${desk.site.id}/fit-policy`,
      { confidencePct: 84, everyMonths: null, afterFailDays: null, ...body },
      revision,
    );
  const wears = ({ worker, site }: Desk, model: { id: string }, fromDate: string) =>
    buildAssignment({
      worker,
      inner: { ...model, organizationId: site.organizationId, name: "" },
      fromDate,
    });
  const fitOf = ({ worker, site }: Desk, model: { id: string }, testedOn: string, parDb = 25) =>
    buildFitTest({
      worker,
      model: { ...model, organizationId: site.organizationId, name: "" },
      testedOn,
      parDb,
    });

  test("by months after a pass; the next test closes it", async () => {
    const desk = await openDesk();
    await wears(desk, desk.muff, daysFromToday(-900));
    await fitOf(desk, desk.muff, daysFromToday(-400));
    await look(desk);
    expect(await findingsOf(desk.worker, "fit-due")).toEqual([]);
    const set = await policy(desk, { everyMonths: 12 });
    expect(set.body.fitPolicy.everyMonths).toBe(12);
    expect(await findingsOf(desk.worker, "fit-due")).toMatchObject([{ state: "new" }]);
    await look(desk);
    expect(await findingsOf(desk.worker, "fit-due")).toHaveLength(1);
    const [listed] = (await desk.client.get(`/fit-tests?workerId=${desk.worker.id}`)).body.rows;
    expect(listed.dueOn < today).toBe(true);

    await record(desk, fitBody(desk.muff.id));
    expect(await findingsOf(desk.worker, "fit-due")).toMatchObject([
      { state: "closed", closing_reason: "fit-tested" },
    ]);
  });

  test("sooner after a fail and after its refit", async () => {
    const desk = await openDesk();
    await wears(desk, desk.muff, daysFromToday(-900));
    await fitOf(desk, desk.muff, daysFromToday(-60), 12);
    await fitOf(desk, desk.muff, daysFromToday(-40));
    await policy(desk, { everyMonths: 24, afterFailDays: 30 });
    expect(await findingsOf(desk.worker, "fit-due")).toHaveLength(1);
    // The second pass in a row is good for the whole interval.
    await fitOf(desk, desk.muff, daysFromToday(-39));
    await look(desk);
    expect(await findingsOf(desk.worker, "fit-due")).toMatchObject([{ state: "closed" }]);
  });

  test("a device never tested on its wearer; not one that is worn no longer", async () => {
    const desk = await openDesk();
    await wears(desk, desk.plug, daysFromToday(-20));
    const asked = { confidencePct: 84, everyMonths: 24, afterFailDays: 14, firstDays: 60 };
    const preview = await desk.client.post(`/sites/${desk.site.id}/fit-policy/preview`, asked);
    expect(preview.body).toMatchObject({ dueNowCount: 0, untestedCount: 1 });
    expect(preview.body.untestedFrom > today).toBe(true);
    expect(preview.body.untestedTo <= daysFromToday(60)).toBe(true);
    // Setting the policy makes nobody's test due at once.
    await policy(desk, asked);
    expect(await findingsOf(desk.worker, "fit-due")).toEqual([]);
    await select("UPDATE sites SET fit_asked_from = current_date - 61 WHERE id = $1", [
      desk.site.id,
    ]);
    await look(desk);
    // Given since the site asks: sixty days from that day.
    expect(await findingsOf(desk.worker, "fit-due")).toEqual([]);
    await select("UPDATE assignments SET valid = daterange($2::date, NULL) WHERE worker_id = $1", [
      desk.worker.id,
      daysFromToday(-100),
    ]);
    await look(desk);
    expect(await findingsOf(desk.worker, "fit-due")).toMatchObject([{ state: "new" }]);
    await select(
      "UPDATE assignments SET valid = daterange(lower(valid), current_date) WHERE worker_id = $1",
      [desk.worker.id],
    );
    await look(desk);
    expect(await findingsOf(desk.worker, "fit-due")).toMatchObject([
      { state: "closed", closing_reason: "no-longer-due" },
    ]);
  });
});

describe("an issue", () => {
  const receive = ({ site }: Desk, model: { id: string }, quantity: number, size?: string) =>
    insert("stock_moves", {
      organizationId: site.organizationId,
      siteId: site.id,
      modelId: model.id,
      part: "device",
      kind: "received",
      quantity,
      size,
      movedOn: today,
    });
  const stock = async ({ site }: Desk, model: { id: string }) =>
    (
      await select<{ sum: number | null }>(
        "SELECT sum(quantity)::int AS sum FROM stock_moves WHERE site_id = $1 AND model_id = $2",
        [site.id, model.id],
      )
    )[0]?.sum;

  test("is one act: assignment, stock and acknowledgement; a double click issues once", async () => {
    const desk = await openDesk();
    const { worker, muff, plug } = desk;
    await receive(desk, muff, 12);
    const body = issueOf(muff.id, [muff.id, plug.id]);
    const key = crypto.randomUUID();
    const [first, second] = await Promise.all([issue(desk, body, key), issue(desk, body, key)]);
    expect([first.status, second.status]).toEqual([201, 201]);
    expect(second.body.id).toBe(first.body.id);
    expect(first.body).toMatchObject({
      acknowledgedHow: "in-person",
      offered: ["Alder foam", "Fenmuff"],
      can: { end: true, acknowledge: false },
    });
    expect(await stock(desk, muff)).toBe(11);
    expect(await assignmentsOf(worker)).toMatchObject([{ model: muff.id, from: today, to: null }]);
  });

  test("nothing of it stands where a part of it can’t", async () => {
    const desk = await openDesk();
    const { worker, muff, plug } = desk;
    await receive(desk, muff, 12);
    const of = await buildFitTest({ worker: await buildWorker({ site: desk.site }) });
    const refused = await issue(desk, issueOf(muff.id, [muff.id, plug.id], { fitTestId: of.id }));
    expect(refused.body.issues).toMatchObject([{ path: ["fitTestId"], code: "fit-of-another" }]);
    expect(await stock(desk, muff)).toBe(12);
    expect(await assignmentsOf(worker)).toEqual([]);
  });

  test("a device goes out on a fit no earlier than that was tested", async () => {
    const desk = await openDesk();
    const { muff, plug } = desk;
    const tested = (await record(desk, fitBody(muff.id))).body;
    const on = (issuedOn: string) =>
      issue(desk, issueOf(muff.id, [muff.id, plug.id], { fitTestId: tested.id, issuedOn }));
    const early = await on(daysFromToday(-1));
    expect(early.body.issues).toMatchObject([
      { path: ["issuedOn"], code: "before-its-fit", params: { testedOn: today } },
    ]);
    expect((await on(today)).status).toBe(201);
  });

  test("one kind only, or none in stock, needs a reason, which only officers read", async () => {
    const desk = await openDesk();
    const { worker, muff, plug, site } = desk;
    const one = await issue(desk, issueOf(muff.id, [muff.id]));
    expect(one.body.issues).toMatchObject([{ path: ["reason"], code: "one-kind-offered" }]);
    await receive(desk, muff, 0);
    const none = await issue(desk, issueOf(muff.id, [muff.id, plug.id]));
    expect(none.body.issues).toMatchObject([{ path: ["reason"], code: "none-in-stock" }]);
    const reason = "skin disease of the ear canal";
    const sent = await issue(desk, issueOf(muff.id, [muff.id], { reason }));
    expect(sent.status).toBe(201);
    const [asOfficer] = (await desk.client.get("/issues")).body.rows;
    expect(asOfficer.reason).toBe(reason);
    const { organizationId } = site;
    const auditor = await signInAs(await buildUser({ organizationId, roles: ["auditor"] }));
    const supervisor = await signInAs(await buildSupervisorOf(site, worker));
    for (const client of [auditor, supervisor]) {
      const { body } = await client.get("/issues");
      expect(body.rows).toHaveLength(1);
      expect(JSON.stringify(body)).not.toContain(reason);
    }
    const kept = await select(
      "SELECT 1 FROM idempotency_keys WHERE reply::text LIKE '%' || $1 || '%'",
      [reason],
    );
    const told = await select(
      "SELECT 1 FROM audit_values WHERE recorded::text LIKE '%' || $1 || '%'",
      [reason],
    );
    expect([...kept, ...told]).toEqual([]);
  });

  test("on a fit of one ear alone, or one that failed, needs a reason too", async () => {
    const desk = await openDesk();
    const { worker, muff, plug, client } = desk;
    const issueOn = async (trials: object, more: object = {}) => {
      const body = fitBody(muff.id, { facts: { ...facts, ...trials } });
      const fit = await client.post(`/workers/${worker.id}/fit-tests`, body);
      const fitTestId = fit.body.id;
      return issue(desk, issueOf(muff.id, [muff.id, plug.id], { fitTestId, ...more }));
    };
    const oneEar = await issueOn({ rightDb: [] });
    expect(oneEar.body.issues).toMatchObject([{ path: ["reason"], code: "fit-not-assessed" }]);
    const failed = await issueOn({ leftDb: [8] });
    expect(failed.body.issues).toMatchObject([{ path: ["reason"], code: "fit-not-passed" }]);
    expect((await issueOn({ rightDb: [] }, { reason: "right ear later" })).status).toBe(201);
    expect((await issueOn({})).status).toBe(201);
  });

  test("says what it takes the place of, and the desk says so before", async () => {
    const desk = await openDesk();
    const { worker, muff, plug, client } = desk;
    await client.post(`/workers/${worker.id}/assignments`, {
      innerModelId: plug.id,
      outerModelId: muff.id,
      fromDate: daysFromToday(-10),
    });
    const { body } = await client.get(`/workers/${worker.id}/fitting`);
    expect(body.assigned).toMatchObject([
      { name: "Alder foam + Fenmuff", taskId: null, fromDate: daysFromToday(-10), toDate: null },
    ]);
    const first = await issue(desk, issueOf(muff.id, [muff.id, plug.id]));
    expect(first.body.replacedName).toBe("Alder foam + Fenmuff");
    const again = await issue(desk, issueOf(muff.id, [muff.id, plug.id]));
    expect(again.body.replacedName).toBeNull();
  });

  test("a size that the model does not come in is refused", async () => {
    const desk = await openDesk();
    const sized = await buildProtector({
      organizationId: desk.site.organizationId,
      data: { sizes: ["S", "M"] } as object,
    });
    const body = issueOf(sized.id, [sized.id, desk.plug.id, desk.muff.id]);
    expect((await issue(desk, { ...body, size: "XL" })).body.issues).toMatchObject([
      { path: ["size"], code: "size-unknown" },
    ]);
    expect((await issue(desk, { ...body, size: "M" })).body.size).toBe("M");
    expect(await assignmentsOf(desk.worker)).toMatchObject([{ size: "M" }]);
  });

  test("takes the place of the earlier device; on the same day it corrects it", async () => {
    const desk = await openDesk();
    const { worker, muff, plug, client } = desk;
    await issue(desk, issueOf(muff.id, [muff.id, plug.id], { issuedOn: daysFromToday(-10) }));
    await issue(desk, issueOf(plug.id, [muff.id, plug.id]));
    expect(await assignmentsOf(worker)).toMatchObject([
      { model: muff.id, to: daysFromToday(-1) },
      { model: plug.id, from: today, to: null },
    ]);
    const back = await issue(desk, issueOf(muff.id, [muff.id, plug.id]));
    expect(back.status).toBe(201);
    expect(await assignmentsOf(worker)).toMatchObject([
      { model: muff.id, to: daysFromToday(-1) },
      { model: muff.id, from: today, to: null },
    ]);
    // Lost and another of the same: the assignment goes on.
    const lost = await client.send({
      method: "post",
      path: `/issues/${back.body.id}/end`,
      body: { endedOn: today, how: "lost" },
      revision: 1,
    });
    expect(lost.body).toMatchObject({ endedHow: "lost", can: { end: false } });
    expect((await assignmentsOf(worker)).at(-1)).toMatchObject({ to: today });
    expect((await issue(desk, issueOf(muff.id, [muff.id, plug.id]))).status).toBe(201);
    expect((await assignmentsOf(worker)).at(-1)).toMatchObject({ to: null });
  });

  test("brought back goes into the stock", async () => {
    const desk = await openDesk();
    const { muff, plug, client } = desk;
    await receive(desk, muff, 3);
    const { body } = await issue(desk, issueOf(muff.id, [muff.id, plug.id]));
    expect(await stock(desk, muff)).toBe(2);
    const path = `/issues/${body.id}/end`;
    const end = { endedOn: today, how: "returned" };
    expect((await client.send({ method: "post", path, body: end, revision: 1 })).status).toBe(201);
    expect(await stock(desk, muff)).toBe(3);
    expect((await client.send({ method: "post", path, body: end, revision: 2 })).status).toBe(409);
  });

  test("is acknowledged once, by the worker on the own page", async () => {
    const { site, worker } = await openDesk();
    const { id } = await buildIssue({ worker });
    const other = await buildIssue({ worker: await buildWorker({ site }) });
    const { organizationId } = site;
    const own = await signInAs(
      await buildUser({ organizationId, roles: ["worker"], workerId: worker.id }),
    );
    const mine = await own.get("/issues?state=open");
    expect(mine.body.rows).toMatchObject([{ id, can: { acknowledge: true, end: false } }]);
    const call = (path: string, revision: number) =>
      own.send({ method: "post", path: `/issues/${path}/acknowledge`, revision });
    expect((await call(other.id, 1)).status).toBe(404);
    expect((await call(id, 1)).body).toMatchObject({ acknowledgedHow: "own-page" });
    expect((await call(id, 2)).status).toBe(409);
    const supervisor = await signInAs(await buildSupervisorOf(site, worker));
    const { status } = await supervisor.send({
      method: "post",
      path: `/issues/${id}/acknowledge`,
      revision: 2,
    });
    expect(status).toBe(403);
  });
});

test("an assignment carries its size and the level of what plays under it", async () => {
  const { worker, client, muff } = await openDesk();
  const path = `/workers/${worker.id}/assignments`;
  const body = { innerModelId: muff.id, fromDate: today, size: "L", audioDb: 76.5 };
  expect((await client.post(path, { ...body, audioDb: 140 })).body.issues).toMatchObject([
    { path: ["audioDb"], code: "too_big" },
  ]);
  expect((await client.post(path, body)).body).toMatchObject({ size: "L", audioDb: 76.5 });
  expect((await client.get(path)).body.rows).toMatchObject([{ size: "L", audioDb: 76.5 }]);
});

describe("refusals", () => {
  test("their reasons are read by officers and stand nowhere else", async () => {
    const { site, worker, client, muff } = await openDesk();
    const reason = "a scar behind the left ear";
    const path = `/workers/${worker.id}/refusals`;
    await client.post(path, { kind: "refused", modelId: muff.id, happenedOn: today, reason });
    expect((await client.get(path)).body.rows).toMatchObject([
      { kind: "refused", modelName: "Fenmuff", reason },
    ]);
    const supervisor = await signInAs(await buildSupervisorOf(site, worker));
    expect((await supervisor.get(path)).status).toBe(403);
    const sheet = await supervisor.get(`/workers/${worker.id}`);
    expect(JSON.stringify(sheet.body)).not.toContain(reason);
    const kept = await select(
      "SELECT 1 FROM audit_values v, idempotency_keys k WHERE v.recorded::text LIKE '%' || $1 || '%' OR k.reply::text LIKE '%' || $1 || '%'",
      [reason],
    );
    expect(kept).toEqual([]);
  });
});

test("a site’s fits stand beside the label, one per person and model", async () => {
  const { site, client } = await openDesk();
  const { organizationId } = site;
  const model = await buildProtector({
    organizationId,
    name: "Tern",
    data: { hDb: 30, mDb: 25, lDb: 18 },
  });
  const worker = await buildWorker({ site });
  await buildFitTest({ worker, model, parDb: 10, testedOn: daysFromToday(-30) });
  await buildFitTest({ worker, model, parDb: 22 });
  await buildFitTest({ worker: await buildWorker({ site }), model, parDb: 16 });
  const { body } = await client.get(`/sites/${site.id}/fits`);
  expect(body.rows).toMatchObject([
    {
      modelName: "Tern",
      count: 2,
      failedCount: 1,
      parsDb: [16, 22],
      meanDb: 19,
      labelDb: 25,
      labelMethod: "hml",
    },
  ]);
  // Of 16 and 22 the sample's deviation is √18.
  expect(body.rows[0].sdDb).toBeCloseTo(Math.sqrt(18), 9);
});
