import { describe, expect, inject, test } from "vitest";
import { orderDigests } from "../../server/commands/order-digests";
import { readConfig } from "../../server/config";
import { sendDigest } from "../../server/jobs/send-digest";
import { inTransaction } from "../../server/lib/db";
import { Mailer } from "../../server/lib/mailer";
import {
  buildCrew,
  buildFinding,
  buildSite,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  select,
  signInAs,
} from "../factories";
import { Mailbox } from "../setup/services";
import { describeEndpoint } from "./five-cases";

describeEndpoint({
  route: "GET /me/digest",
  as: "supervisor",
  not: "worker",
  event: null,
  bad: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/me/digest" }),
});
describeEndpoint({
  route: "PUT /me/digest",
  as: "supervisor",
  not: "auditor",
  event: "choose-digest",
  bad: { body: { hour: 24 } },
  badField: "hour",
  namesNothing: true,
  call: async () => ({ method: "put", path: "/me/digest", revision: 0, body: { hour: 5 } }),
});

interface Digest {
  id: string;
  date: string;
  state: string;
}

async function lay({ timeZone = "UTC", hour = 5, language = "en" } = {}) {
  const site = await buildSite({ timeZone });
  const { organizationId } = site;
  const user = await buildUser({ organizationId, roles: ["supervisor"], language });
  const worker = await buildWorker({ site, name: "A. Worker" });
  const away = await buildWorker({ site, name: "B. Away" });
  const crew = await buildCrew({
    site,
    name: "Early",
    members: [worker, away],
    supervisors: [user],
  });
  await insert("digest_choices", {
    userId: user.id,
    organizationId,
    hour,
    chosenAt: new Date("2026-01-01T00:00:00Z"),
  });
  const order = (now: string) =>
    inTransaction({ organizationId }, () => orderDigests(organizationId, new Date(now)));
  const ordered = () =>
    select<Digest>(
      "SELECT id, date::text AS date, state FROM digests WHERE organization_id = $1 ORDER BY date",
      [organizationId],
    );
  return { site, organizationId, user, worker, away, crew, order, ordered };
}
const dates = (found: readonly Digest[]) => found.map(({ date }) => date);

describe("the hour", () => {
  test("comes by the clock of the site, once a day, and not hours late", async () => {
    const { order, ordered } = await lay({ timeZone: "America/Chicago" });
    await order("2026-06-02T09:59:00Z");
    expect(await ordered()).toEqual([]);
    await order("2026-06-02T10:00:30Z");
    await order("2026-06-02T10:01:30Z");
    expect(dates(await ordered())).toEqual(["2026-06-02"]);
    await order("2026-06-03T13:01:00Z");
    expect(dates(await ordered())).toEqual(["2026-06-02"]);
  });

  test("that does not come in spring goes at the next instant there is", async () => {
    // In London 01:00 to 02:00 is left out on 29 March 2026: the clock goes from 00:59 to 02:00, 01:00 in UTC.
    const { order, ordered } = await lay({ timeZone: "Europe/London", hour: 1 });
    await order("2026-03-29T00:59:30Z");
    expect(dates(await ordered())).toEqual([]);
    await order("2026-03-29T01:00:10Z");
    expect(dates(await ordered())).toEqual(["2026-03-29"]);
    await order("2026-03-29T02:00:10Z");
    expect(dates(await ordered())).toEqual(["2026-03-29"]);
  });

  test("that comes twice in autumn goes once, the first time", async () => {
    const { order, ordered } = await lay({ timeZone: "Europe/London", hour: 1 });
    await order("2026-10-24T23:59:30Z");
    expect(dates(await ordered())).toEqual([]);
    await order("2026-10-25T00:00:30Z");
    await order("2026-10-25T01:00:30Z");
    expect(dates(await ordered())).toEqual(["2026-10-25"]);
  });

  test("just before midnight is caught up after it", async () => {
    const { order, ordered } = await lay({ timeZone: "Europe/London", hour: 23 });
    await order("2026-12-02T00:30:00Z");
    expect(dates(await ordered())).toEqual(["2026-12-01"]);
  });

  test("chosen after it is past begins the day after; none is none", async () => {
    const { order, ordered, user } = await lay();
    await select(
      "UPDATE digest_choices SET chosen_at = '2026-06-02T05:30:00Z' WHERE user_id = $1",
      [user.id],
    );
    await order("2026-06-02T06:00:00Z");
    expect(await ordered()).toEqual([]);
    await order("2026-06-03T05:00:00Z");
    expect(dates(await ordered())).toEqual(["2026-06-03"]);
    await select("UPDATE digest_choices SET hour = NULL WHERE user_id = $1", [user.id]);
    await order("2026-06-04T05:00:00Z");
    expect(dates(await ordered())).toEqual(["2026-06-03"]);
  });
});

describe("the mail", () => {
  const { SMTP_URL, MAIL_FROM, PUBLIC_URL } = readConfig("work");
  const mailer = new Mailer(SMTP_URL, MAIL_FROM);
  const mailbox = new Mailbox(inject("services").mailsUrl);

  test("says what stands on the sheet, once, and how it is stopped", async () => {
    const { site, organizationId, user, worker, away, crew, order, ordered } = await lay();
    const today = daysFromToday(0);
    await buildFinding({ site, workerId: worker.id, kind: "no-protector", lastDate: today });
    const client = await signInAs(user);
    await client.post(`/crews/${crew.id}/absences`, { workerId: away.id, fromDate: today });
    await order(`${today}T05:00:30Z`);
    const [digest] = await ordered();
    const payload = { organizationId, digestId: digest!.id };
    await sendDigest(payload, mailer, PUBLIC_URL);
    await sendDigest(payload, mailer, PUBLIC_URL);
    const mails = await mailbox.mails({ to: user.email });
    expect(mails).toHaveLength(1);
    const [mail] = mails;
    expect(mail?.subject).toContain("one order is open");
    expect(mail?.subject).not.toContain("Worker");
    for (const words of ["A. Worker: ", "Expected: 1.", "Not in: B. Away.", "/account#digest"])
      expect(mail?.text).toContain(words);
    expect(mail?.html).toContain(`href="${PUBLIC_URL}/account#digest"`);
    expect((await ordered())[0]?.state).toBe("sent");
  });

  test("does not go once it was stopped, or to whom has no crew any more", async () => {
    for (const stop of [
      "UPDATE digest_choices SET hour = NULL WHERE user_id = $1",
      "UPDATE crew_supervisors SET valid = daterange('2020-01-01', '2021-01-01') WHERE user_id = $1",
      "UPDATE users SET revoked_at = now() WHERE id = $1",
    ]) {
      const { organizationId, user, order, ordered } = await lay();
      await order(`${daysFromToday(0)}T05:00:30Z`);
      await select(stop, [user.id]);
      const [digest] = await ordered();
      await sendDigest({ organizationId, digestId: digest!.id }, mailer, PUBLIC_URL);
      expect((await ordered())[0]?.state).toBe("nothing");
      expect(await mailbox.mails({ to: user.email })).toEqual([]);
    }
  });

  test("a server that does not take it now has it later, word for word", async () => {
    const { organizationId, user, order, ordered } = await lay();
    await order(`${daysFromToday(0)}T05:00:30Z`);
    const [digest] = await ordered();
    const payload = { organizationId, digestId: digest!.id };
    await mailbox.behave("drop-after-data");
    try {
      await expect(sendDigest(payload, mailer, PUBLIC_URL)).rejects.toThrow("did not take");
    } finally {
      await mailbox.behave("accept");
    }
    await sendDigest(payload, mailer, PUBLIC_URL);
    const texts = (await mailbox.mails({ to: user.email })).map(({ text }) => text);
    expect(new Set(texts).size).toBe(1);
    expect((await ordered())[0]?.state).toBe("sent");
  });

  test("refused for good it is not tried again", async () => {
    const { organizationId, user, order, ordered } = await lay();
    await order(`${daysFromToday(0)}T05:00:30Z`);
    const [digest] = await ordered();
    const payload = { organizationId, digestId: digest!.id };
    await mailbox.behave("refuse");
    try {
      await sendDigest(payload, mailer, PUBLIC_URL);
    } finally {
      await mailbox.behave("accept");
    }
    expect((await ordered())[0]?.state).toBe("refused");
    await sendDigest(payload, mailer, PUBLIC_URL);
    expect(await mailbox.mails({ to: user.email })).toEqual([]);
  });
});
