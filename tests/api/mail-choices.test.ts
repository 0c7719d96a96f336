import { describe, expect, test } from "vitest";
import {
  buildCrew,
  buildDay,
  buildJob,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

describeEndpoint({
  route: "GET /me/mails",
  as: "supervisor",
  not: "auditor",
  event: null,
  bad: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/me/mails" }),
});
describeEndpoint({
  route: "PUT /me/mails",
  as: "worker",
  not: "administrator",
  event: "choose-mails",
  bad: { body: { off: ["own-results"] } },
  badField: "off.0",
  namesNothing: true,
  call: async () => ({
    method: "put",
    path: "/me/mails",
    revision: 0,
    body: { off: ["own-limit"] },
  }),
});
describeEndpoint({
  route: "GET /me/sent",
  as: "officer",
  not: "auditor",
  event: null,
  bad: { path: "?limit=0" },
  badField: "limit",
  namesNothing: true,
  call: async () => ({ method: "get", path: "/me/sent" }),
});

describe("mails", () => {
  test("what the rules ask for can't be switched off, and says by what", async () => {
    const site = await buildSite({ governingRuleSet: "uk-2005" });
    const { organizationId } = site;
    const worker = await buildWorker({ site });
    const user = await buildUser({ organizationId, roles: ["worker"], workerId: worker.id });
    const client = await signInAs(user);
    expect((await client.get("/me/mails")).body).toMatchObject({
      revision: 0,
      email: user.email,
      rows: [
        {
          kind: "own-results",
          isOn: true,
          isOptional: false,
          citation: "Control of Noise at Work Regulations 2005, regulation 10",
        },
        { kind: "own-limit", isOn: true, isOptional: true },
      ],
    });
    const refused = await client.put("/me/mails", { off: ["own-results"] }, 0);
    expect([refused.status, refused.body.issues[0].code]).toEqual([422, "mail-required"]);
    expect((await client.put("/me/mails", { off: ["own-limit"] }, 0)).status).toBe(200);
    expect((await client.put("/me/mails", { off: [] }, 0)).status).toBe(412);
  });

  test("who does without it gets none of a limit passed; whoever has to act does", async () => {
    const site = await buildSite({ governingRuleSet: "uk-2005" });
    const { organizationId } = site;
    const task = await buildTask({ site, levelDb: 98, metric: { kind: "steady" } });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const worker = await buildWorker({ site, jobId: job.id });
    const user = await buildUser({ organizationId, roles: ["worker"], workerId: worker.id });
    const supervisor = await buildUser({ organizationId, roles: ["supervisor"] });
    const crew = await buildCrew({ site, members: [worker], supervisors: [supervisor] });
    await (await signInAs(user)).put("/me/mails", { off: ["own-limit"] }, 0);
    const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    await officer.post(`/crews/${crew.id}/day`, {
      date: daysFromToday(-1),
      rows: [
        {
          kind: "worked",
          workerId: worker.id,
          localStart: "06:00",
          lengthMin: 480,
          tasks: [{ taskId: task.id, durationMin: 480 }],
        },
      ],
    });
    const told = await select<{ audience: string }>(
      "SELECT audience FROM notices WHERE organization_id = $1 ORDER BY audience",
      [organizationId],
    );
    expect(told.map(({ audience }) => audience)).toEqual(["officer", "supervisor"]);
  });

  test("what was sent is read again as it was sent, on paper too, by its reader alone", async () => {
    const site = await buildSite({ governingRuleSet: "uk-2005" });
    const { organizationId } = site;
    const worker = await buildWorker({ site });
    const user = await buildUser({ organizationId, roles: ["worker"], workerId: worker.id });
    const notice = (recipientId: string, subject: string, sentAt: string) =>
      insert("notices", {
        organizationId,
        siteId: site.id,
        recipientId,
        entryId: crypto.randomUUID(),
        audience: "worker",
        state: "sent",
        notBefore: sentAt,
        sentAt,
        messageId: `<${crypto.randomUUID()}@dinward>`,
        subject,
        bodyText: `Text of ${subject}`,
      });
    await notice(user.id, "First", "2026-03-01T08:00:00Z");
    await notice(user.id, "Second", "2026-03-02T08:00:00Z");
    const other = await buildUser({ organizationId, roles: ["worker"] });
    await notice(other.id, "Not mine", "2026-03-03T08:00:00Z");
    await buildDay(worker, "2026-03-03");
    await insert("result_letters", {
      organizationId,
      siteId: site.id,
      workerId: worker.id,
      ruleSet: "uk-2005",
      ruleSetVersion: 1,
      dueOn: "2026-03-20",
      language: "en",
      subject: "On paper",
      bodyText: "The letter",
      writtenAt: "2026-03-04T08:00:00Z",
    });
    const client = await signInAs(user);
    const first = await client.get("/me/sent?limit=2");
    expect(first.body.rows).toMatchObject([
      { subject: "On paper", text: "The letter", state: null },
      { subject: "Second", text: "Text of Second", state: "sent" },
    ]);
    const next = await client.get(`/me/sent?limit=2&cursor=${first.body.next}`);
    expect(next.body.rows.map(({ subject }: { subject: string }) => subject)).toEqual(["First"]);
    expect(next.body.next).toBeNull();
  });
});
