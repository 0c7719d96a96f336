import { expect, test } from "vitest";
import {
  buildAssignment,
  buildFitTest,
  buildJob,
  buildProtector,
  buildSite,
  buildSupervisorOf,
  buildTask,
  buildUser,
  buildWorker,
  insert,
  type Site,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

/** 100 dB(A), its C-weighted level 2 dB above. */
async function buildNoise(site: Site) {
  const task = await buildTask({ site, levelDb: null });
  await insert("task_levels", {
    organizationId: site.organizationId,
    taskId: task.id,
    number: 1,
    effectiveFrom: "2020-01-01",
    metric: JSON.stringify({ kind: "laeq" }),
    levelDb: 100,
    lcMinusLaDb: 2,
    grade: "task-level",
  });
  return task;
}

describeEndpoint({
  route: "GET /protectors/:id/at-ear",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "&workerId=nobody" },
  badField: "workerId",
  call: async (site) => {
    const { organizationId } = site;
    const model = await buildProtector({ organizationId });
    const task = await buildTask({ site });
    return { method: "get", path: `/protectors/${model.id}/at-ear?taskId=${task.id}` };
  },
});

interface Row {
  method: string;
  derating: string | null;
  protectedPct: number | null;
  atEarDb: number | null;
  reason: string | null;
  governs: boolean;
}

test("every method stands beside the one that governs, with the reason where there is no figure", async () => {
  const site = await buildSite({ governingRuleSet: "uk-2005" });
  const model = await buildProtector({ organizationId: site.organizationId });
  const task = await buildNoise(site);
  const officer = await officerAt(site);
  const answer = await officer.get(`/protectors/${model.id}/at-ear?taskId=${task.id}`);
  expect(answer.status).toBe(200);
  const of = (method: string, derating: string | null = null): Row =>
    answer.body.methods.find((row: Row) => row.method === method && row.derating === derating);
  // SNR 28 off the C-weighted 102 dB, less the United Kingdom's 4 dB.
  expect(of("snr").atEarDb).toBeCloseTo(78, 9);
  expect(of("snr").governs).toBe(true);
  // The US 23 off 102 dB, less 4 dB. Halved, and an earmuff's three quarters of it: off the same 102, in place of the 4 dB.
  expect(of("us-single-number", "none").atEarDb).toBeCloseTo(83, 9);
  expect(of("us-single-number", "half").atEarDb).toBeCloseTo(102 - 11.5, 9);
  expect(of("us-single-number", "by-type").atEarDb).toBeCloseTo(102 - 17.25, 9);
  expect(of("octave-band")).toMatchObject({
    protectedPct: 80,
    atEarDb: null,
    reason: "no-attenuation-data",
  });
  expect(answer.body).toMatchObject({
    spreadDb: expect.closeTo(5, 9),
    isSpreadLarge: false,
    worker: null,
    outer: null,
    whileWorn: { offDb: expect.closeTo(78, 9), onDb: null, word: "good" },
    limit: { levelDb: 87, kind: "limit" },
  });
});

test("a worker's own fit widens the spread; a supervisor of another crew doesn't learn of it", async () => {
  const site = await buildSite({ governingRuleSet: "uk-2005" });
  const { organizationId } = site;
  const worker = await buildWorker({ site });
  const model = await buildProtector({ organizationId });
  await buildAssignment({ worker, inner: model });
  await buildFitTest({ worker, model, parDb: 12 });
  const task = await buildNoise(site);
  const path = `/protectors/${model.id}/at-ear?taskId=${task.id}&workerId=${worker.id}`;
  const { body } = await (await officerAt(site)).get(path);
  const own = body.methods.find((row: Row) => row.method === "own-fit");
  expect(own).toMatchObject({ atEarDb: 88, governs: true });
  expect(body).toMatchObject({
    worker: { name: worker.name, ownFitDb: 12 },
    spreadDb: expect.closeTo(10, 9),
    isSpreadLarge: true,
  });
  const other = await signInAs(await buildSupervisorOf(site));
  expect((await other.get(path)).status).toBe(404);
});

test("where Appendix B governs, the label's rating less 7 stands beside a worker's own fit", async () => {
  for (const [governingRuleSet, less7] of [
    ["us-general-industry", 16],
    ["uk-2005", null],
  ] as const) {
    const site = await buildSite({ governingRuleSet });
    const worker = await buildWorker({ site });
    const model = await buildProtector({ organizationId: site.organizationId });
    await buildAssignment({ worker, inner: model });
    await buildFitTest({ worker, model, parDb: 12 });
    const task = await buildNoise(site);
    const { body } = await (await officerAt(site)).get(
      `/protectors/${model.id}/at-ear?taskId=${task.id}&workerId=${worker.id}`,
    );
    // 29 CFR 1910.95 App. B (ii): 23 − 7.
    expect(body.worker).toMatchObject({ ownFitDb: 12, labelLess7Db: less7 });
  }
});

test("how loud a programme may be over the nominal day, before the day at the ear passes the limit", async () => {
  const site = await buildSite({ governingRuleSet: "uk-2005" });
  const model = await buildProtector({ organizationId: site.organizationId });
  const task = await buildNoise(site);
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  await buildJob({ site });
  const { body } = await (await officerAt(site)).get(
    `/protectors/${model.id}/at-ear?taskId=${task.id}`,
  );
  expect(body.days).toHaveLength(1);
  // 8 h at 78 dB are LEX 78; what is left up to 87 by energy.
  expect(body.days[0]).toMatchObject({
    jobId: job.id,
    wornMin: 480,
    atEarDb: expect.closeTo(78, 9),
    mostAudioDb: expect.closeTo(10 * Math.log10(10 ** 8.7 - 10 ** 7.8), 6),
    audioReason: null,
  });
});

test("an active part is given on, off and as worked; a battery for half the day mixes both by energy", async () => {
  const site = await buildSite({ governingRuleSet: "uk-2005" });
  const flat = (db: number) => [db, db, db, db, db, db, db, db];
  const model = await buildProtector({
    organizationId: site.organizationId,
    kind: "active-earmuff",
    data: {
      bands: { meanDb: flat(24), sdDb: flat(4) },
      active: {
        attenuationDb: flat(10),
        delayS: null,
        gain: null,
        maximumDb: null,
        bandwidthHz: null,
        saturatesAboveDb: null,
        batteryMin: 240,
      },
    },
  });
  const task = await buildTask({ site, levelDb: 100, octaveBandsDb: flat(90) });
  await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const { body } = await (await officerAt(site)).get(
    `/protectors/${model.id}/at-ear?taskId=${task.id}`,
  );
  // 24 − 4 dB off every band, and 4 dB on; the active part takes 10 dB off every band.
  expect(body.whileWorn).toMatchObject({
    offDb: expect.closeTo(84, 9),
    onDb: expect.closeTo(74, 9),
  });
  expect(body.days[0].atEarAsWorkedDb).toBeCloseTo(
    10 * Math.log10(0.5 * 10 ** 8.4 + 0.5 * 10 ** 7.4),
    9,
  );
  expect(body.inner.active.batteryMin).toBe(240);
});

test("two worn together are not assessed without test data of the two", async () => {
  const site = await buildSite({ governingRuleSet: "uk-2005" });
  const { organizationId } = site;
  const plug = await buildProtector({ organizationId, kind: "foam-plug" });
  const muff = await buildProtector({ organizationId });
  const task = await buildNoise(site);
  const { body } = await (await officerAt(site)).get(
    `/protectors/${plug.id}/at-ear?taskId=${task.id}&outerId=${muff.id}`,
  );
  expect(body.outer).toEqual({ modelId: muff.id, name: muff.name });
  expect(body.methods.every((row: Row) => row.atEarDb === null)).toBe(true);
  expect(body.whileWorn).toMatchObject({ offDb: null, reason: "combination-not-tested" });
});

test("a task without a level has no methods", async () => {
  const site = await buildSite({ governingRuleSet: "uk-2005" });
  const model = await buildProtector({ organizationId: site.organizationId });
  const task = await buildTask({ site, levelDb: null });
  const answer = await (await officerAt(site)).get(
    `/protectors/${model.id}/at-ear?taskId=${task.id}`,
  );
  expect(answer.body).toMatchObject({ level: null, methods: [], spreadDb: null });
});
