import { describe, expect, test } from "vitest";
import {
  buildDay,
  buildFile,
  buildSite,
  buildSupervisorOf,
  buildUser,
  buildWorker,
  daysFromToday,
  type Site,
  select,
  signInAs,
} from "../factories";
import { buildTraining } from "../factories/training";
import { describeEndpoint } from "./five-cases";

const body = async (site: Site) => ({
  siteId: site.id,
  heldOn: daysFromToday(-1),
  title: "Noise and how protectors are worn",
  durationMin: 45,
  fileId: null,
  employeeNumbers: [(await buildWorker({ site })).employeeNumber],
});

describeEndpoint({
  route: "GET /trainings",
  as: "auditor",
  not: "supervisor",
  event: null,
  namesNothing: true,
  bad: { path: "?siteId=none" },
  call: async (site) => {
    await buildTraining(site, []);
    return { method: "get", path: "/trainings" };
  },
});
describeEndpoint({
  route: "GET /trainings/:id",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "-none" },
  call: async (site) => ({ method: "get", path: `/trainings/${await buildTraining(site, [])}` }),
});
describeEndpoint({
  route: "GET /training-dues",
  as: "officer",
  not: "administrator",
  event: null,
  namesNothing: true,
  bad: { path: "?siteId=none" },
  call: async () => ({ method: "get", path: "/training-dues" }),
});
describeEndpoint({
  route: "GET /workers/:id/training",
  as: "auditor",
  not: "administrator",
  event: null,
  bad: { path: "-none" },
  call: async (site) => ({
    method: "get",
    path: `/workers/${(await buildWorker({ site })).id}/training`,
  }),
});
describeEndpoint({
  route: "POST /trainings",
  as: "officer",
  not: "auditor",
  event: "record-training",
  bad: { body: { employeeNumbers: ["nobody"] } },
  badField: "employeeNumbers",
  call: async (site) => ({ method: "post", path: "/trainings", body: await body(site) }),
});
describeEndpoint({
  route: "PUT /trainings/:id",
  as: "officer",
  not: "supervisor",
  event: "change-training",
  bad: { body: { heldOn: daysFromToday(3) } },
  badField: "heldOn",
  call: async (site) => ({
    method: "put",
    path: `/trainings/${await buildTraining(site, [])}`,
    revision: 1,
    body: await body(site),
  }),
});
describeEndpoint({
  route: "POST /trainings/:id/strike",
  as: "officer",
  not: "supervisor",
  event: "strike-training",
  bad: { body: { reason: "" } },
  badField: "reason",
  status: 200,
  call: async (site) => ({
    method: "post",
    path: `/trainings/${await buildTraining(site, [])}/strike`,
    revision: 1,
    body: { reason: "Entered twice" },
  }),
});

const over = (criterionId: string, verdict = "over") => ({
  criteria: [
    {
      criterionId,
      verdict,
      isClear: true,
      levelDb: 91,
      dosePct: null,
      bound: "exact",
      reason: null,
    },
  ],
});

const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

describe("who is owed training", () => {
  test("a year after the last one under the US rules; a struck one does not count", async () => {
    const site = await buildSite({ governingRuleSet: "us-general-industry" });
    const us = { governingRuleSet: "us-general-industry" };
    const [never, longAgo, lately, quiet, left] = [
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site, leftOn: daysFromToday(-5) }),
    ];
    for (const worker of [never, longAgo, lately, left]) {
      await buildDay(worker, daysFromToday(-40), { ...us, ...over("action-value") });
      await buildDay(worker, daysFromToday(-30), { ...us, ...over("action-value") });
    }
    await buildDay(quiet, daysFromToday(-40), { ...us, ...over("action-value", "under") });
    await buildTraining(site, [longAgo], { heldOn: "2025-03-01" });
    await buildTraining(site, [lately], { heldOn: daysFromToday(-10) });
    await buildTraining(site, [never], { struckReason: "Was never held" });
    const client = await officerAt(site);
    const dues = await client.get("/training-dues");
    const byWorker = new Map(
      dues.body.rows.map((row: { workerId: string }) => [row.workerId, row]),
    );
    expect(byWorker.size).toBe(3);
    expect(dues.body.rows[0]).toMatchObject({
      workerId: longAgo.id,
      trainedOn: "2025-03-01",
      dueOn: "2026-03-01",
      exposedOn: daysFromToday(-40),
    });
    expect(byWorker.get(never.id)).toMatchObject({ trainedOn: null, dueOn: daysFromToday(-40) });
    const nextYear = (byWorker.get(lately.id) as { dueOn: string }).dueOn;
    expect(nextYear > daysFromToday(340)).toBe(true);

    const first = await client.get("/training-dues?limit=2");
    const second = await client.get(`/training-dues?limit=2&cursor=${first.body.next}`);
    expect([...first.body.rows, ...second.body.rows]).toEqual(dues.body.rows);
  });

  test("once where the rules set no interval, and never where they set no duty", async () => {
    const site = await buildSite();
    const [trained, untrained] = [await buildWorker({ site }), await buildWorker({ site })];
    for (const worker of [trained, untrained])
      await buildDay(worker, daysFromToday(-40), over("lower-action-training"));
    await buildTraining(site, [trained], { heldOn: "2021-03-01" });
    const client = await officerAt(site);
    const dues = await client.get("/training-dues");
    expect(dues.body.rows).toMatchObject([{ workerId: untrained.id }]);

    const construction = await buildSite({ governingRuleSet: "us-construction" });
    await buildDay(await buildWorker({ site: construction }), daysFromToday(-4), {
      governingRuleSet: "us-construction",
      ...over("limit"),
    });
    expect((await (await officerAt(construction)).get("/training-dues")).body.rows).toEqual([]);
  });

  test("the year's gaps name who was in such noise and not trained", async () => {
    const site = await buildSite({ governingRuleSet: "us-general-industry" });
    const us = { governingRuleSet: "us-general-industry", ...over("action-value") };
    const [untrained, trained] = [await buildWorker({ site }), await buildWorker({ site })];
    for (const worker of [untrained, trained]) await buildDay(worker, "2026-06-10", us);
    await buildTraining(site, [trained], { heldOn: "2025-09-01" });
    await buildTraining(site, [untrained], { heldOn: "2025-05-01" });
    const client = await officerAt(site);
    const gaps = await client.get(`/exports/gaps?siteId=${site.id}&year=2026`);
    expect(gaps.body.counts).toContainEqual({ kind: "not-trained", count: 1 });
    const names = await client.get(
      `/exports/gap-names?siteId=${site.id}&year=2026&kind=not-trained`,
    );
    expect(names.body.rows).toMatchObject([{ id: untrained.id, date: "2026-06-10" }]);
  });
});

describe("a training's list", () => {
  test("takes each number once, names those of nobody, and is put right as a whole", async () => {
    const site = await buildSite();
    const [one, two, three] = [
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
    ];
    const client = await officerAt(site);
    const input = {
      ...(await body(site)),
      employeeNumbers: [one.employeeNumber, two.employeeNumber, one.employeeNumber],
    };
    const refused = await client.post("/trainings", {
      ...input,
      employeeNumbers: [one.employeeNumber, "X-1", "X-2"],
    });
    expect(refused.body.issues).toMatchObject([
      {
        path: ["employeeNumbers"],
        code: "employee-numbers-unknown",
        params: { numbers: "X-1, X-2" },
      },
    ]);
    const created = await client.post("/trainings", input);
    expect(created.body).toMatchObject({ attendees: 2, revision: 1 });
    const change = (revision: number, employeeNumbers: string[]) =>
      client.send({
        method: "put",
        path: `/trainings/${created.body.id}`,
        revision,
        body: { ...input, employeeNumbers },
      });
    const changed = await change(1, [two.employeeNumber, three.employeeNumber]);
    expect(changed.body.attendance.map(({ id }: { id: string }) => id).toSorted()).toEqual(
      [two.id, three.id].toSorted(),
    );
    expect((await change(1, [one.employeeNumber])).body).toMatchObject({ code: "stale" });
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1 AND subject_id = $2 ORDER BY id",
      [site.organizationId, created.body.id],
    );
    expect(events.map(({ action }) => action)).toEqual(["record-training", "change-training"]);
  });

  test("a worker reads the own trainings and what was shown there; a supervisor the crew's", async () => {
    const site = await buildSite();
    const [worker, other] = [await buildWorker({ site }), await buildWorker({ site })];
    const fileId = await buildFile(site, "slides.pdf");
    await buildTraining(site, [worker], { fileId });
    await buildTraining(site, [other]);
    const own = await signInAs(
      await buildUser({
        organizationId: site.organizationId,
        roles: ["worker"],
        workerId: worker.id,
      }),
    );
    const view = await own.get(`/workers/${worker.id}/training`);
    expect(view.body).toMatchObject({ rows: [{ fileName: "slides.pdf" }], due: null });
    expect((await own.get(`/workers/${other.id}/training`)).status).toBe(404);
    const stranger = await signInAs(
      await buildUser({
        organizationId: site.organizationId,
        roles: ["worker"],
        workerId: other.id,
      }),
    );
    expect((await stranger.get(`/files/${fileId}`)).status).toBe(404);
    const supervisor = await signInAs(await buildSupervisorOf(site, worker));
    expect((await supervisor.get(`/workers/${worker.id}/training`)).body.rows).toHaveLength(1);
  });
});
