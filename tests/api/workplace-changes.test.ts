import { expect, test } from "vitest";
import {
  buildArea,
  buildAssignment,
  buildJob,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  type Site,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const buildChange = async (site: Site) =>
  insert("workplace_changes", {
    organizationId: site.organizationId,
    siteId: site.id,
    taskId: (await buildTask({ site })).id,
    kind: "machine",
    happenedOn: daysFromToday(-3),
    what: "new grinding wheel",
  });

describeEndpoint({
  route: "GET /workplace-changes",
  as: "auditor",
  not: "supervisor",
  event: null,
  namesNothing: true,
  bad: { path: "?limit=0" },
  call: async (site) => {
    await buildChange(site);
    return { method: "get", path: "/workplace-changes" };
  },
});
describeEndpoint({
  route: "POST /workplace-changes",
  as: "officer",
  not: "auditor",
  event: "record-workplace-change",
  bad: { body: { happenedOn: daysFromToday(3) } },
  badField: "happenedOn",
  call: async (site) => ({
    method: "post",
    path: "/workplace-changes",
    body: {
      siteId: site.id,
      areaId: (await buildArea({ site })).id,
      kind: "control",
      happenedOn: daysFromToday(-1),
      what: "the enclosure was taken away",
    },
  }),
});
describeEndpoint({
  route: "POST /workplace-changes/:id/strike",
  as: "officer",
  not: "auditor",
  event: "strike-workplace-change",
  status: 200,
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async (site) => ({
    method: "post",
    path: `/workplace-changes/${await buildChange(site)}/strike`,
    revision: 1,
    body: { reason: "entered twice" },
  }),
});

describeEndpoint({
  route: "GET /workplace-changes/:id/protectors",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/workplace-changes/${await buildChange(site)}/protectors`,
  }),
});

/** A protector chosen for a task before the task was changed. */
async function buildChosen(site: Site) {
  const task = await buildTask({ site });
  const worker = await buildWorker({ site });
  const { id: assignmentId } = await buildAssignment({
    worker,
    taskId: task.id,
    fromDate: daysFromToday(-50),
  });
  const changeId = await insert("workplace_changes", {
    organizationId: site.organizationId,
    siteId: site.id,
    taskId: task.id,
    kind: "machine",
    happenedOn: daysFromToday(-3),
    what: "new grinding wheel",
  });
  return { task, worker, assignmentId, changeId };
}

describeEndpoint({
  route: "POST /workplace-changes/:id/protectors",
  as: "officer",
  not: "auditor",
  event: "look-at-protectors",
  status: 200,
  bad: { body: { assignmentIds: [] } },
  badField: "assignmentIds",
  call: async (site) => {
    const { changeId, assignmentId } = await buildChosen(site);
    return {
      method: "post",
      path: `/workplace-changes/${changeId}/protectors`,
      body: { assignmentIds: [assignmentId] },
    };
  },
});

test("protectors chosen before a change wait until each is looked at, whatever is measured meanwhile", async () => {
  const site = await buildSite();
  const client = await officerAt(site);
  const { task, worker, changeId, assignmentId } = await buildChosen(site);
  const everywhere = await buildWorker({
    site,
    jobId: (await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 60 }] })).id,
  });
  await buildAssignment({ worker: everywhere, fromDate: daysFromToday(-50) });
  const elsewhere = await buildWorker({ site });
  await buildAssignment({ worker: elsewhere, fromDate: daysFromToday(-50) });
  const chosenSince = await buildWorker({ site });
  await buildAssignment({ worker: chosenSince, taskId: task.id, fromDate: daysFromToday(-1) });

  const path = `/workplace-changes/${changeId}/protectors`;
  const { body } = await client.get(path);
  expect(body.rows.map(({ workerId }: { workerId: string }) => workerId).toSorted()).toEqual(
    [worker.id, everywhere.id].toSorted(),
  );
  const needs = await client.get("/measuring-needs");
  expect(needs.body.protectors).toMatchObject([{ changeId, assignmentsCount: 2 }]);
  const looked = await client.post(path, { assignmentIds: [assignmentId] });
  expect(looked.body.rows).toMatchObject([{ workerId: everywhere.id }]);
  expect((await client.post(path, { assignmentIds: [assignmentId] })).status).toBe(404);
  await client.post(path, { assignmentIds: [looked.body.rows[0].id] });
  expect((await client.get("/measuring-needs")).body.protectors).toEqual([]);
});

const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

test("a change names one thing, and one of its own site", async () => {
  const site = await buildSite();
  const other = await buildSite({ organizationId: site.organizationId });
  const client = await officerAt(site);
  const body = {
    siteId: site.id,
    kind: "process",
    happenedOn: daysFromToday(-1),
    what: "another alloy",
  };
  const none = await client.post("/workplace-changes", body);
  expect(none.body.issues[0]).toMatchObject({ path: ["taskId"], code: "one-of-area-task-job" });
  const elsewhere = await client.post("/workplace-changes", {
    ...body,
    taskId: (await buildTask({ site: other })).id,
  });
  expect(elsewhere.body.issues[0]).toMatchObject({ path: ["taskId"], code: "task-of-other-site" });
});

test("a change re-opens what was measured before it and the protectors chosen on it, until it is struck", async () => {
  const site = await buildSite();
  const client = await officerAt(site);
  const task = await buildTask({ site, levelDb: null });
  await insert("task_levels", {
    organizationId: site.organizationId,
    taskId: task.id,
    number: 1,
    effectiveFrom: daysFromToday(-60),
    metric: JSON.stringify({ kind: "laeq" }),
    levelDb: 91,
    samplesDb: [90, 91, 92],
    grade: "measured-group",
  });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const worker = await buildWorker({ site, jobId: job.id });
  await buildAssignment({ worker, taskId: task.id, fromDate: daysFromToday(-50) });
  expect((await client.get("/measuring-needs")).body).toMatchObject({ rows: [], groupsCount: 1 });

  const made = await client.post("/workplace-changes", {
    siteId: site.id,
    taskId: task.id,
    kind: "machine",
    happenedOn: daysFromToday(-10),
    what: "twice the pressure",
  });
  expect(made.status).toBe(201);
  const needs = await client.get("/measuring-needs");
  expect(needs.body.rows).toEqual([
    expect.objectContaining({
      jobId: job.id,
      reasons: [
        {
          code: "changed-since",
          changeId: made.body.id,
          kind: "machine",
          what: "twice the pressure",
          happenedOn: daysFromToday(-10),
          taskIds: [task.id],
          assignmentsCount: 1,
        },
      ],
    }),
  ]);

  const struck = await client.send({
    method: "post",
    path: `/workplace-changes/${made.body.id}/strike`,
    revision: 1,
    body: { reason: "it was another machine" },
  });
  expect(struck.body).toMatchObject({ struckReason: "it was another machine", revision: 2 });
  expect((await client.get("/measuring-needs")).body.rows).toEqual([]);
});
