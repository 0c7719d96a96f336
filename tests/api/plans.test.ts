import { describe, expect, test } from "vitest";
import {
  buildJob,
  buildProtector,
  buildSite,
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

/** A group of two with four hours at 100 dB and four at 70. */
async function buildGroup(site: Site) {
  const loud = await buildTask({ site, levelDb: 100 });
  const quiet = await buildTask({ site, levelDb: 70 });
  const job = await buildJob({
    site,
    tasks: [
      { taskId: loud.id, durationMin: 240 },
      { taskId: quiet.id, durationMin: 240 },
    ],
  });
  const workers = [
    await buildWorker({ site, jobId: job.id }),
    await buildWorker({ site, jobId: job.id }),
  ];
  return { loud, quiet, job, workers };
}

async function planBody(site: Site) {
  const { loud, job } = await buildGroup(site);
  return {
    name: "Quieter hammer",
    scopeKind: "job",
    scopeId: job.id,
    goal: "limit",
    changes: [{ kind: "noise", taskId: loud.id, byDb: 12, bandsDb: null }],
  };
}

/** A plan that stands there already. */
async function buildPlan(site: Site): Promise<string> {
  const { loud, job } = await buildGroup(site);
  return insert("plans", {
    organizationId: site.organizationId,
    siteId: site.id,
    name: "Quieter hammer",
    scopeKind: "job",
    scopeId: job.id,
    baseDate: daysFromToday(-3),
    governingRuleSet: "uk-2005",
    governingVersion: 1,
    methodVersion: 1,
    goal: "limit",
    changes: JSON.stringify([{ kind: "noise", taskId: loud.id, byDb: 12, bandsDb: null }]),
    outcome: JSON.stringify({ workers: [] }),
  });
}

describeEndpoint({
  route: "GET /try-changes",
  as: "officer",
  not: "auditor",
  event: null,
  bad: { path: "-7" },
  call: async (site) => {
    const { job } = await buildGroup(site);
    return { method: "get", path: `/try-changes?scopeKind=job&scopeId=${job.id}` };
  },
});
describeEndpoint({
  route: "GET /plans",
  as: "auditor",
  not: "supervisor",
  event: null,
  namesNothing: true,
  bad: { path: "?state=lost" },
  call: async (site) => {
    await buildPlan(site);
    return { method: "get", path: "/plans" };
  },
});
describeEndpoint({
  route: "GET /plans/:id",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "-7" },
  call: async (site) => ({ method: "get", path: `/plans/${await buildPlan(site)}` }),
});
describeEndpoint({
  route: "POST /plans",
  as: "officer",
  not: "auditor",
  event: "keep-plan",
  bad: { body: { name: "" } },
  badField: "name",
  call: async (site) => ({ method: "post", path: "/plans", body: await planBody(site) }),
});
describeEndpoint({
  route: "POST /plans/:id/put-aside",
  as: "officer",
  not: "auditor",
  event: "put-plan-aside",
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async (site) => ({
    method: "post",
    path: `/plans/${await buildPlan(site)}/put-aside`,
    revision: 1,
    body: { reason: "The hammer is replaced instead." },
  }),
});

describe("what is kept", () => {
  test("is computed on the server, for each of the group, before and after", async () => {
    const site = await buildSite();
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const { loud, job, workers } = await buildGroup(site);
    const { body } = await officer.send({
      method: "post",
      path: "/plans",
      body: {
        name: "Quieter hammer",
        scopeKind: "job",
        scopeId: job.id,
        goal: "limit",
        changes: [{ kind: "noise", taskId: loud.id, byDb: 12, bandsDb: null }],
      },
    });
    expect(
      body.outcome.workers.map(({ workerId }: { workerId: string }) => workerId).sort(),
    ).toEqual(workers.map(({ id }) => id).sort());
    // LEX,8h by hand: half a day at 100, then at 88 dB, the other half at 70.
    const byHand = (loudDb: number) => 10 * Math.log10(0.5 * 10 ** (loudDb / 10) + 0.5 * 10 ** 7);
    for (const { before, after } of body.outcome.workers) {
      expect(before.outsideDb).toBeCloseTo(byHand(100), 9);
      expect(after.outsideDb).toBeCloseTo(byHand(88), 9);
    }
    expect(body.before).toMatchObject({ over: 2, under: 0 });
    expect(body.after).toMatchObject({ over: 0, under: 2 });
    expect(body.since).toEqual([]);
  });

  test("of another site’s task, protector or worker nothing is kept, and each is named", async () => {
    const site = await buildSite();
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const { job, loud, workers } = await buildGroup(site);
    const foreign = await buildTask();
    const unknown = await buildProtector();
    const { status, body } = await officer.send({
      method: "post",
      path: "/plans",
      body: {
        name: "Mixed up",
        scopeKind: "job",
        scopeId: job.id,
        goal: "no-such",
        changes: [
          { kind: "wearing", taskId: foreign.id, wornPct: 100 },
          {
            kind: "protector",
            taskId: null,
            innerModelId: unknown.id,
            outerModelId: null,
            workerIds: null,
          },
          {
            kind: "rotation",
            taskId: loud.id,
            workerId: workers[0]!.id,
            otherWorkerId: (await buildWorker({ site })).id,
            otherTaskId: loud.id,
            minutes: 30,
          },
          { kind: "noise", taskId: loud.id, byDb: null, bandsDb: [0, 0, 0, 0, 5, 5, 0, 0] },
        ],
      },
    });
    expect(status).toBe(422);
    expect(
      body.issues.map(({ path, code }: { path: string[]; code: string }) => [path.join("."), code]),
    ).toEqual([
      ["changes.0.taskId", "task-of-other-site"],
      ["changes.1.innerModelId", "protector-unknown"],
      ["changes.2.otherTaskId", "task-twice"],
      ["changes.2.otherWorkerId", "worker-not-in-scope"],
      ["changes.3.bandsDb", "task-without-bands"],
      ["goal", "criterion-unknown"],
    ]);
    expect(await select("SELECT id FROM plans WHERE site_id = $1", [site.id])).toEqual([]);
  });

  test("put aside twice, the second time says so", async () => {
    const site = await buildSite();
    const id = await buildPlan(site);
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const put = (revision: number) =>
      officer.send({
        method: "post",
        path: `/plans/${id}/put-aside`,
        revision,
        body: { reason: "Not affordable." },
      });
    expect((await put(1)).body.putAsideReason).toBe("Not affordable.");
    expect((await put(2)).body.code).toBe("plan-put-aside-already");
    const list = await officer.send({ method: "get", path: "/plans" });
    expect(list.body.rows).toEqual([]);
    const all = await officer.send({ method: "get", path: "/plans?state=all" });
    expect(all.body.rows).toHaveLength(1);
  });
});
