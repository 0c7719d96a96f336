import { describe, expect, inject, test, vi } from "vitest";
import { escalateOverdue } from "../../server/commands/escalate-overdue";
import { readConfig } from "../../server/config";
import { sendEscalation } from "../../server/jobs/send-escalation";
import { inTransaction } from "../../server/lib/db";
import { Mailer } from "../../server/lib/mailer";
import {
  buildDay,
  buildFile,
  buildFinding,
  buildJob,
  buildRun,
  buildSite,
  buildSupervisorOf,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  type Site,
  select,
  signInAs,
} from "../factories";
import { Mailbox } from "../setup/services";
import { describeEndpoint } from "./five-cases";

const buildMeasure = async (site: Site, findingId: string) =>
  insert("finding_measures", {
    organizationId: site.organizationId,
    findingId,
    control: "engineer",
    what: "Enclose the pump",
    plannedOn: daysFromToday(20),
  });

const attach = async (site: Site, findingId: string, fileId: string) =>
  insert("finding_files", {
    organizationId: site.organizationId,
    findingId,
    fileId,
    title: "Offer of the enclosure",
  });

const measureBody = {
  control: "engineer",
  what: "Enclose the pump, door with seal",
  ownerId: null,
  plannedOn: daysFromToday(30),
  doneOn: null,
};

describeEndpoint({
  route: "GET /findings/:id/follow-up",
  as: "auditor",
  not: "administrator",
  event: null,
  bad: { path: "-none" },
  call: async (site) => ({
    method: "get",
    path: `/findings/${await buildFinding({ site })}/follow-up`,
  }),
});
describeEndpoint({
  route: "POST /findings/:id/measures",
  as: "officer",
  not: "auditor",
  event: "record-measure",
  bad: { body: { plannedOn: null } },
  badField: "plannedOn",
  call: async (site) => ({
    method: "post",
    path: `/findings/${await buildFinding({ site })}/measures`,
    body: measureBody,
  }),
});
describeEndpoint({
  route: "PUT /findings/:id/measures/:measureId",
  as: "officer",
  not: "supervisor",
  event: "change-measure",
  bad: { body: { doneOn: daysFromToday(2) } },
  badField: "doneOn",
  call: async (site) => {
    const findingId = await buildFinding({ site });
    return {
      method: "put",
      path: `/findings/${findingId}/measures/${await buildMeasure(site, findingId)}`,
      revision: 1,
      body: measureBody,
    };
  },
});
describeEndpoint({
  route: "POST /findings/:id/measures/:measureId/strike",
  as: "officer",
  not: "supervisor",
  event: "strike-measure",
  bad: { body: { reason: "" } },
  badField: "reason",
  status: 200,
  call: async (site) => {
    const findingId = await buildFinding({ site });
    return {
      method: "post",
      path: `/findings/${findingId}/measures/${await buildMeasure(site, findingId)}/strike`,
      revision: 1,
      body: { reason: "Entered twice" },
    };
  },
});
describeEndpoint({
  route: "POST /findings/:id/files",
  as: "officer",
  not: "auditor",
  event: "attach-finding-file",
  bad: { body: { title: "" } },
  badField: "title",
  call: async (site) => {
    const fileId = await buildFile(site);
    await attach(site, await buildFinding({ site }), fileId);
    return {
      method: "post",
      path: `/findings/${await buildFinding({ site, kind: "no-protector" })}/files`,
      body: { fileId, title: "Offer of the enclosure" },
    };
  },
});
describeEndpoint({
  route: "POST /findings/:id/files/:attachmentId/removal",
  as: "officer",
  not: "auditor",
  event: "remove-finding-file",
  bad: { body: { reason: "" } },
  badField: "reason",
  status: 200,
  call: async (site) => {
    const findingId = await buildFinding({ site });
    const attachmentId = await attach(site, findingId, await buildFile(site));
    return {
      method: "post",
      path: `/findings/${findingId}/files/${attachmentId}/removal`,
      body: { reason: "Of another machine" },
    };
  },
});
describeEndpoint({
  route: "GET /escalations",
  as: "officer",
  not: "auditor",
  event: null,
  namesNothing: true,
  bad: null,
  call: async () => ({ method: "get", path: "/escalations" }),
});
describeEndpoint({
  route: "PUT /sites/:id/escalation",
  as: "officer",
  not: "administrator",
  event: "set-escalation",
  bad: { body: { userId: "00000000-0000-4000-8000-000000000001" } },
  badField: "userId",
  call: async (site) => {
    const { organizationId } = site;
    const named = await buildUser({ organizationId, roles: ["officer"] });
    return {
      method: "put",
      path: `/sites/${site.id}/escalation`,
      revision: 1,
      body: { userId: named.id },
    };
  },
});

const signIn = async (site: Site, role: "officer" | "supervisor" | "auditor") =>
  signInAs(await buildUser({ organizationId: site.organizationId, roles: [role] }));

describe("whether a finding can be trusted", () => {
  test("the day's own run, and the last five of the task that decides, with checks and what was unusual", async () => {
    const site = await buildSite();
    const task = await buildTask({ site, name: "Run-up" });
    const other = await buildTask({ site, name: "Teardown" });
    const worker = await buildWorker({ site });
    const date = daysFromToday(-3);
    const lastResultId = await buildDay(worker, date, {
      decidingTaskId: task.id,
      grade: "measured-worker",
    });
    const own = await buildRun({
      site,
      workerId: worker.id,
      date,
      doubts: ["clipped"],
      keptReason: "One knock",
    });
    const ofTask: string[] = [];
    for (let day = 4; day <= 10; day += 1)
      ofTask.push((await buildRun({ site, taskId: task.id, date: daysFromToday(-day) })).id);
    await buildRun({ site, taskId: other.id });
    const id = await buildFinding({ site, workerId: worker.id, lastDate: date, lastResultId });
    const view = await (await signIn(site, "officer")).get(`/findings/${id}/follow-up`);
    expect(view.body.grade).toBe("measured-worker");
    expect(view.body.runs.map((run: { runId: string }) => run.runId)).toEqual([
      own.id,
      ...ofTask.slice(0, 5),
    ]);
    expect(view.body.runs[0]).toMatchObject({
      isOfTheDay: true,
      workerName: worker.name,
      averageDb: 90,
      exchangeRateDb: 3,
      checkBeforeDb: null,
      doubts: ["clipped"],
      keptReason: "One knock",
    });
  });

  test("a worker sees the own run and no paper; nobody to hand it to", async () => {
    const site = await buildSite();
    const task = await buildTask({ site });
    const [worker, colleague] = [await buildWorker({ site }), await buildWorker({ site })];
    const date = daysFromToday(-3);
    const lastResultId = await buildDay(worker, date, { decidingTaskId: task.id });
    const own = await buildRun({ site, workerId: worker.id, date });
    await buildRun({ site, workerId: colleague.id, taskId: task.id });
    const id = await buildFinding({ site, workerId: worker.id, lastDate: date, lastResultId });
    const fileId = await buildFile(site);
    await attach(site, id, fileId);
    const client = await signInAs(
      await buildUser({
        organizationId: site.organizationId,
        roles: ["worker"],
        workerId: worker.id,
      }),
    );
    const view = await client.get(`/findings/${id}/follow-up`);
    expect(view.body.runs.map((run: { runId: string }) => run.runId)).toEqual([own.id]);
    expect(view.body).toMatchObject({ files: [], owners: [] });
    expect((await client.get(`/files/${fileId}`)).status).toBe(404);
    const supervisor = await signInAs(await buildSupervisorOf(site, worker));
    expect((await supervisor.get(`/findings/${id}/follow-up`)).body.files).toHaveLength(1);
  });
});

describe("measures and their proof", () => {
  test("measured days before and after the first measure that was done, under the same rules", async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const measured = { grade: "measured-worker" };
    const lastResultId = await buildDay(worker, daysFromToday(-20), { ...measured, outsideDb: 98 });
    await buildDay(worker, daysFromToday(-19), { ...measured, outsideDb: 96 });
    await buildDay(worker, daysFromToday(-18), { ...measured, outsideDb: 97 });
    // Promised, judged by other rules, or of the day itself: none of them proves anything.
    await buildDay(worker, daysFromToday(-17), { grade: "task-level", outsideDb: 70 });
    await buildDay(worker, daysFromToday(-16), {
      ...measured,
      outsideDb: 60,
      governingRuleSet: "us-general-industry",
    });
    await buildDay(worker, daysFromToday(-10), { ...measured, outsideDb: 50 });
    await buildDay(worker, daysFromToday(-5), { ...measured, outsideDb: 86, atEarDb: 71.2 });
    const id = await buildFinding({
      site,
      workerId: worker.id,
      lastDate: daysFromToday(-20),
      lastResultId,
    });
    const client = await signIn(site, "officer");
    const enter = (body: object) =>
      client.post(`/findings/${id}/measures`, { ...measureBody, ...body });
    const planned = await enter({});
    expect((await client.get(`/findings/${id}/follow-up`)).body.proof).toBeNull();
    await enter({ what: "Oil the guide", doneOn: daysFromToday(-4) });
    const done = await client.send({
      method: "put",
      path: `/findings/${id}/measures/${planned.body.id}`,
      revision: 1,
      body: { ...measureBody, doneOn: daysFromToday(-10) },
    });
    expect(done.body).toMatchObject({ revision: 2, doneOn: daysFromToday(-10) });
    const { proof } = (await client.get(`/findings/${id}/follow-up`)).body;
    expect(proof).toMatchObject({
      doneOn: daysFromToday(-10),
      before: { days: 3, medianOutsideDb: 97, lowestOutsideDb: 96, highestOutsideDb: 98 },
      after: { days: 1, medianOutsideDb: 86, lowestAtEarDb: 71.2, highestAtEarDb: 71.2 },
    });
    expect(proof.after.latest).toMatchObject([{ outsideDb: 86, worker: { id: worker.id } }]);
  });

  test("a stale change names what stands; a struck one takes no change and proves nothing", async () => {
    const site = await buildSite();
    const id = await buildFinding({ site });
    const measureId = await buildMeasure(site, id);
    const client = await signIn(site, "officer");
    const path = `/findings/${id}/measures/${measureId}`;
    const change = (revision: number) =>
      client.send({ method: "put", path, revision, body: measureBody });
    expect((await change(7)).body).toMatchObject({ code: "stale", current: { revision: 1 } });
    const struck = await client.send({
      method: "post",
      path: `${path}/strike`,
      revision: 1,
      body: { reason: "Entered twice" },
    });
    expect(struck.body).toMatchObject({ struckReason: "Entered twice", revision: 2 });
    expect((await change(2)).status).toBe(409);
  });

  test("a measure is in the hands of an officer or a supervisor of the site, nobody else", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const id = await buildFinding({ site });
    const client = await signIn(site, "officer");
    const auditor = await buildUser({ organizationId, roles: ["auditor"] });
    const elsewhere = await buildUser({
      organizationId,
      roles: ["supervisor"],
      siteId: (await buildSite({ organizationId })).id,
    });
    for (const { id: ownerId } of [auditor, elsewhere]) {
      const refused = await client.post(`/findings/${id}/measures`, { ...measureBody, ownerId });
      expect(refused.status).toBe(422);
      expect(refused.body.issues).toMatchObject([{ path: ["ownerId"], code: "not-of-this-site" }]);
    }
    const supervisor = await buildUser({ organizationId, roles: ["supervisor"], siteId: site.id });
    const entered = await client.post(`/findings/${id}/measures`, {
      ...measureBody,
      ownerId: supervisor.id,
    });
    expect(entered.body).toMatchObject({ ownerName: supervisor.name });
  });
});

describe("a finding that is handed over, and one that is overdue", () => {
  test("is in the new owner's hands, with a step that says so", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const id = await buildFinding({ site, dueOn: daysFromToday(3) });
    const client = await signIn(site, "officer");
    const owner = await buildUser({ organizationId, roles: ["supervisor"] });
    const handed = await client.send({
      method: "post",
      path: `/findings/${id}/steps`,
      revision: 1,
      body: { kind: "hand-over", ownerId: owner.id },
    });
    expect(handed.body).toMatchObject({
      state: "in-hand",
      ownerName: owner.name,
      dueOn: daysFromToday(3),
      steps: [{ kind: "handed-over", text: owner.name }],
    });
  });

  test("goes up once to the person whom the site names, with one mail, and comes down with a later date", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const worker = await buildWorker({ site, name: "R. Szabó" });
    const named = await buildUser({ organizationId, roles: ["officer"], language: "en" });
    const late = await buildFinding({ site, workerId: worker.id, dueOn: daysFromToday(-3) });
    const job = await buildJob({ site });
    const done = await buildFinding({
      site,
      jobId: job.id,
      state: "done",
      dueOn: daysFromToday(-3),
    });
    const escalate = () => inTransaction({ organizationId }, () => escalateOverdue(organizationId));
    const client = await signIn(site, "officer");
    await escalate();
    expect((await client.get(`/findings/${late}`)).body).toMatchObject({
      wentUp: null,
      goesUp: false,
    });

    await client.send({
      method: "put",
      path: `/sites/${site.id}/escalation`,
      revision: 1,
      body: { userId: named.id },
    });
    await escalate();
    await escalate();
    const view = await client.get(`/findings/${late}`);
    expect(view.body).toMatchObject({
      wentUp: { name: named.name },
      goesUp: true,
      revision: 1,
    });
    expect(view.body.steps).toMatchObject([{ kind: "escalated", text: named.name }]);
    expect((await client.get(`/findings/${done}`)).body.wentUp).toBeNull();

    const { SMTP_URL, MAIL_FROM, PUBLIC_URL } = readConfig("work");
    const mailer = new Mailer(SMTP_URL, MAIL_FROM);
    const [escalation, ...more] = await select<{ id: string }>(
      "SELECT id FROM escalations WHERE organization_id = $1",
      [organizationId],
    );
    expect(more).toEqual([]);
    const payload = { organizationId, escalationId: escalation!.id };
    await sendEscalation(payload, mailer, PUBLIC_URL);
    await sendEscalation(payload, mailer, PUBLIC_URL);
    const mails = await new Mailbox(inject("services").mailsUrl).mails({ to: named.email });
    expect(mails).toHaveLength(1);
    expect(mails[0]).toMatchObject({ subject: expect.stringContaining("One finding is overdue") });
    expect(mails[0]?.text).toContain("R. Szabó");

    const later = await client.send({
      method: "post",
      path: `/findings/${late}/steps`,
      revision: 1,
      body: { kind: "take-in-hand", dueOn: daysFromToday(5) },
    });
    expect(later.body.wentUp).toBeNull();
  });

  // In London the clock is an hour ahead from 29 March 2026 on; in Los Angeles it is set back on 1 November.
  test.each([
    ["Europe/London", "2026-03-28", "2026-03-28T23:59:00Z", false],
    ["Europe/London", "2026-03-28", "2026-03-29T00:01:00Z", true],
    ["Europe/London", "2026-03-29", "2026-03-29T22:59:00Z", false],
    ["Europe/London", "2026-03-29", "2026-03-29T23:01:00Z", true],
    ["America/Los_Angeles", "2026-10-31", "2026-11-01T06:59:00Z", false],
    ["America/Los_Angeles", "2026-10-31", "2026-11-01T07:01:00Z", true],
    ["America/Los_Angeles", "2026-11-01", "2026-11-02T07:59:00Z", false],
    ["America/Los_Angeles", "2026-11-01", "2026-11-02T08:01:00Z", true],
  ])("in %s what is due on %s has at %s gone up: %s", async (timeZone, dueOn, at, isUp) => {
    const site = await buildSite({ timeZone });
    const { organizationId } = site;
    const named = await buildUser({ organizationId, roles: ["officer"] });
    await select("UPDATE sites SET escalation_user_id = $2 WHERE id = $1", [site.id, named.id]);
    const id = await buildFinding({ site, dueOn });
    vi.useFakeTimers({ toFake: ["Date"], now: new Date(at) });
    try {
      await inTransaction({ organizationId }, () => escalateOverdue(organizationId));
    } finally {
      vi.useRealTimers();
    }
    const [finding] = await select<{ escalation_id: string | null }>(
      "SELECT escalation_id FROM findings WHERE id = $1",
      [id],
    );
    expect(finding!.escalation_id !== null).toBe(isUp);
  });
});
