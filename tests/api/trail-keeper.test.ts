import { randomUUID } from "node:crypto";
import { describe, expect, inject, test } from "vitest";
import { orderTrailHeads } from "../../server/commands/order-trail-heads";
import { readConfig } from "../../server/config";
import { sendTrailMail } from "../../server/jobs/send-trail-mail";
import { sealTrail } from "../../server/lib/audit";
import { inTransaction } from "../../server/lib/db";
import { Mailer } from "../../server/lib/mailer";
import { trailHead } from "../../server/queries/trail-check";
import { buildSite, buildUser, insert, select, signInAs } from "../factories";
import { Mailbox } from "../setup/services";
import { describeEndpoint } from "./five-cases";

const named = (more: object = {}) => ({
  name: "C. Outsider",
  email: `${randomUUID()}@outside.example`,
  language: "en",
  timeZone: "Europe/Berlin",
  ...more,
});

describeEndpoint({
  route: "GET /trail-keeper",
  as: "auditor",
  not: "officer",
  event: null,
  bad: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/trail-keeper" }),
});
describeEndpoint({
  route: "PUT /trail-keeper",
  as: "administrator",
  not: "auditor",
  event: "name-trail-keeper",
  bad: { body: { keeper: named({ email: "nobody" }) } },
  badField: "keeper.email",
  namesNothing: true,
  call: async () => ({
    method: "put",
    path: "/trail-keeper",
    revision: 0,
    body: { keeper: named() },
  }),
});

interface MailRow {
  id: string;
  kind: string;
  week: string | null;
  email: string;
  state: string;
}

async function lay({ timeZone = "Europe/Berlin" } = {}) {
  const site = await buildSite({ timeZone });
  const { organizationId } = site;
  const user = await buildUser({ organizationId, roles: ["administrator"] });
  const keeper = named({ timeZone });
  await insert("trail_keepers", { organizationId, number: 1, ...keeper, namedBy: user.id });
  const seal = () => inTransaction({ organizationId }, () => sealTrail(organizationId));
  const order = (now: string) =>
    inTransaction({ organizationId }, () => orderTrailHeads(organizationId, new Date(now)));
  const mails = () =>
    select<MailRow>(
      "SELECT id, kind, week::text AS week, email, state FROM trail_mails WHERE organization_id = $1 ORDER BY created_at, week",
      [organizationId],
    );
  const weeks = async () => (await mails()).map(({ week }) => week);
  return { site, organizationId, user, keeper, seal, order, mails, weeks };
}

describe("the week's mail", () => {
  test("goes on Monday at seven by the chosen clock, once, and late rather than not at all", async () => {
    const { seal, order, weeks } = await lay({ timeZone: "America/Chicago" });
    await order("2026-06-01T12:00:30Z");
    expect(await weeks()).toEqual([]);
    await seal();
    // 1 June 2026 is a Monday; seven in Chicago is 12:00 in UTC.
    await order("2026-06-01T11:59:00Z");
    expect(await weeks()).toEqual(["2026-05-25"]);
    await order("2026-06-01T12:00:30Z");
    await order("2026-06-01T12:01:30Z");
    await order("2026-06-06T23:00:00Z");
    expect(await weeks()).toEqual(["2026-05-25", "2026-06-01"]);
    await order("2026-06-11T03:00:00Z");
    expect(await weeks()).toEqual(["2026-05-25", "2026-06-01", "2026-06-08"]);
  });

  test("keeps its hour where the clock was changed the day before", async () => {
    // In Berlin the clock goes forward on Sunday, 29 March, and back on Sunday, 25 October 2026.
    const { seal, order, weeks } = await lay();
    await seal();
    for (const [before, after] of [
      ["2026-03-30T04:59:00Z", "2026-03-30T05:00:30Z"],
      ["2026-10-26T05:59:00Z", "2026-10-26T06:00:30Z"],
    ]) {
      await order(before!);
      const count = (await weeks()).length;
      await order(after!);
      expect(await weeks()).toHaveLength(count + 1);
    }
    expect(await weeks()).toEqual(["2026-03-23", "2026-03-30", "2026-10-19", "2026-10-26"]);
  });
});

describe("what comes", () => {
  const { SMTP_URL, MAIL_FROM, PUBLIC_URL } = readConfig("work");
  const mailer = new Mailer(SMTP_URL, MAIL_FROM);
  const mailbox = new Mailbox(inject("services").mailsUrl);

  test("is the head with its number and how to compare it, in text and HTML, and the trail says so", async () => {
    const { organizationId, user, keeper, seal, order, mails } = await lay();
    await seal();
    const head = (await inTransaction({ organizationId }, () => trailHead(organizationId)))!;
    await order("2026-06-02T12:00:00Z");
    const [mail] = await mails();
    const payload = { organizationId, mailId: mail!.id };
    await sendTrailMail(payload, mailer, PUBLIC_URL);
    await sendTrailMail(payload, mailer, PUBLIC_URL);
    const came = await mailbox.mails({ to: keeper.email });
    expect(came).toHaveLength(1);
    expect(came[0]?.subject).toContain(`seal ${head.number}`);
    for (const words of [
      `Hash (SHA-256): ${head.hash}`,
      `Seal: ${head.number}`,
      `npm run verify:trail -- --seal=${head.number}`,
    ])
      expect(came[0]?.text).toContain(words);
    expect(came[0]?.html).toContain(head.hash);
    const client = await signInAs(user);
    expect((await client.get("/trail-keeper")).body.mails).toMatchObject([
      { state: "sent", seal: { number: head.number, hash: head.hash }, email: keeper.email },
    ]);
    expect(
      await select("SELECT action FROM audit_events WHERE organization_id = $1", [organizationId]),
    ).toEqual([{ action: "send-trail-head" }]);
  });

  test("what the server does not take now comes later, word for word, with the head that it named", async () => {
    const { organizationId, keeper, seal, order, mails } = await lay();
    await seal();
    await order("2026-06-02T12:00:00Z");
    const [mail] = await mails();
    const payload = { organizationId, mailId: mail!.id };
    await mailbox.behave("drop-after-data");
    try {
      await expect(sendTrailMail(payload, mailer, PUBLIC_URL)).rejects.toThrow("did not take");
    } finally {
      await mailbox.behave("accept");
    }
    await buildUser({ organizationId });
    await seal();
    await sendTrailMail(payload, mailer, PUBLIC_URL);
    const texts = (await mailbox.mails({ to: keeper.email })).map(({ text }) => text);
    expect(new Set(texts).size).toBe(1);
  });

  test("whoever kept it until now is told that it goes elsewhere, and gets none any more", async () => {
    const { organizationId, user, keeper, seal, order, mails } = await lay();
    await seal();
    const client = await signInAs(user);
    const put = (body: object, revision: number) =>
      client.send({ method: "put", path: "/trail-keeper", revision, body });
    const other = named({ name: "N. Ewer" });
    expect((await put({ keeper: other }, 0)).body.code).toBe("stale");
    const changed = await put({ keeper: other }, 1);
    expect(changed.status).toBe(200);
    expect(changed.body).toMatchObject({ revision: 2, keeper: other });
    const [told] = await mails();
    expect(told).toMatchObject({ kind: "no-longer", email: keeper.email });
    await sendTrailMail({ organizationId, mailId: told!.id }, mailer, PUBLIC_URL);
    const [mail] = await mailbox.mails({ to: keeper.email });
    expect(mail?.subject).toContain("goes elsewhere");
    expect(mail?.text).not.toContain("N. Ewer");
    await order("2026-06-02T12:00:00Z");
    expect((await mails()).at(-1)).toMatchObject({ kind: "head", email: other.email });
    expect((await put({ keeper: null }, 2)).body).toMatchObject({ keeper: null, revision: 3 });
    await order("2026-06-09T12:00:00Z");
    expect((await mails()).filter(({ kind }) => kind === "head")).toHaveLength(1);
  });

  test("only who administers all sites names them, and a clock is one of the sites'", async () => {
    const { site, organizationId, user } = await lay();
    const atOne = await signInAs(
      await buildUser({ organizationId, roles: ["administrator"], siteId: site.id }),
    );
    const call = { method: "put", path: "/trail-keeper", revision: 1 } as const;
    expect((await atOne.send({ ...call, body: { keeper: null } })).status).toBe(403);
    const client = await signInAs(user);
    const wrong = await client.send({
      ...call,
      body: { keeper: named({ timeZone: "Asia/Tokyo" }) },
    });
    expect(wrong.status).toBe(422);
  });
});
