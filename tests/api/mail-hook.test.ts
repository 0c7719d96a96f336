import { randomUUID } from "node:crypto";
import request from "supertest";
import { describe, expect, inject, test } from "vitest";
import { readConfig } from "../../server/config";
import { sendNotice } from "../../server/jobs/send-notice";
import { hookSignature } from "../../server/lib/mail-hook";
import { Mailer } from "../../server/lib/mailer";
import {
  buildDay,
  buildFinding,
  buildSite,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  nobody,
  select,
  signInAs,
  testApp,
} from "../factories";
import { Mailbox } from "../setup/services";

testApp();
const { secrets, mailsUrl } = inject("services");
const mailbox = new Mailbox(mailsUrl);
const { SMTP_URL, MAIL_FROM, PUBLIC_URL, MAIL_RETURN_TO } = readConfig("work");
const mailer = new Mailer(SMTP_URL, MAIL_FROM, MAIL_RETURN_TO);

interface Report {
  headers: Record<string, string>;
  body: string;
}

function signed(
  body: string,
  { type = "application/json", secret = secrets.hook, at = Date.now() } = {},
): Report {
  const time = String(Math.floor(at / 1000));
  return {
    headers: {
      "content-type": type,
      "x-dinward-time": time,
      "x-dinward-signature": hookSignature(secret, time, Buffer.from(body)),
    },
    body,
  };
}
const report = ({ headers, body }: Report) =>
  request(testApp()).post("/api/hooks/mail").set(headers).send(body);

/** A notice to an address, as it waits, with whom it is about and the site's officer. */
async function buildNotice(email = `person-${randomUUID()}@bounce.example`) {
  const site = await buildSite({ noticeDelayMin: 0, governingRuleSet: "uk-2005" });
  const { organizationId } = site;
  const officer = await buildUser({ organizationId, roles: ["officer"] });
  const user = await buildUser({ organizationId, roles: ["supervisor"], email });
  const worker = await buildWorker({ site });
  const date = daysFromToday(-1);
  const resultId = await buildDay(worker, date, { governingRuleSet: "uk-2005" });
  const findingId = await buildFinding({
    site,
    workerId: worker.id,
    kind: "over-limit-at-ear",
  });
  const noticeId = randomUUID();
  const entryId = randomUUID();
  await insert("notices", {
    id: noticeId,
    organizationId,
    siteId: site.id,
    recipientId: user.id,
    entryId,
    audience: "supervisor",
    state: "waiting",
    notBefore: new Date(),
    messageId: `<${noticeId}@dinward>`,
  });
  await insert("notice_items", {
    organizationId,
    noticeId,
    findingId,
    workerId: worker.id,
    date,
    resultId,
  });
  const state = async () =>
    (
      await select<{ state: string; last_error: string | null; message_id: string; tries: number }>(
        "SELECT state, last_error, message_id, tries FROM notices WHERE id = $1",
        [noticeId],
      )
    )[0]!;
  const send = () => sendNotice({ organizationId, noticeId }, mailer, PUBLIC_URL);
  const events = () =>
    select<{ kind: string; way: string; status: string | null }>(
      "SELECT kind, way, status FROM mail_events WHERE notice_id = $1 ORDER BY received_at",
      [noticeId],
    );
  return { site, organizationId, officer, user, noticeId, entryId, state, send, events };
}

const bounceOf = (messageId: string, more: object = {}) =>
  JSON.stringify({ id: randomUUID(), kind: "bounced", messageId, status: "5.1.1", ...more });

describe("a mail server that accepts and then bounces", () => {
  test("by delivery-status mail and by event: bounced once, with its reason; sent again it is another mail", async () => {
    const { officer, user, noticeId, entryId, state, send, events } = await buildNotice();
    await send();
    expect((await state()).state).toBe("sent");
    const ours = async () =>
      (await mailbox.reports()).filter(({ body }) => body.includes(noticeId));
    await expect.poll(async () => (await ours()).length).toBe(2);
    const reports = await ours();
    // What came back stands in the return address's mailbox too.
    const returned = await mailbox.mails({ to: "returned@dinward.example" });
    expect(returned.some(({ subject }) => subject === "Undelivered mail")).toBe(true);

    const [first, second] = [await report(reports[0]!), await report(reports[1]!)];
    expect([first.status, first.body]).toEqual([200, { isKnown: true, isNew: true }]);
    expect(second.body).toEqual({ isKnown: true, isNew: true });
    expect((await report(reports[0]!)).body).toEqual({ isKnown: true, isNew: false });
    expect((await report(reports[1]!)).body).toEqual({ isKnown: true, isNew: false });
    expect(await state()).toMatchObject({ state: "bounced", last_error: "5.1.1" });
    expect((await events()).map(({ way }) => way).toSorted()).toEqual(["hook", "report"]);

    const client = await signInAs(officer);
    const waiting = await client.get("/waiting");
    expect(waiting.body.troubled).toMatchObject([
      { id: noticeId, state: "bounced", lastError: "5.1.1" },
    ]);

    // The address is put right, and the same words go under another Message-ID.
    const email = `person-${randomUUID()}@dinward.example`;
    await select("UPDATE users SET email = $2 WHERE id = $1", [user.id, email]);
    const again = await client.post(`/entries/${entryId}/notices/actions`, {
      action: "send-again",
    });
    expect(again.status).toBe(201);
    await send();
    expect((await state()).state).toBe("sent");
    const [before] = await mailbox.mails({ to: user.email });
    const [after] = await mailbox.mails({ to: email });
    expect(after?.text).toBe(before?.text);
    expect(after?.messageId).not.toBe(before?.messageId);
    // A late report of the first mail says nothing of the second.
    const late = await report(signed(bounceOf(before!.messageId!)));
    expect(late.body).toEqual({ isKnown: false, isNew: false });
    expect((await state()).state).toBe("sent");
  });

  test("before it has answered, and with the mail whole in the report", async () => {
    const { noticeId, state, send } = await buildNotice();
    await select("UPDATE notices SET state = 'sending' WHERE id = $1", [noticeId]);
    const { message_id: messageId } = await state();
    const mail = [
      "From: postmaster@mail.example",
      "Message-ID: <1@mail.example>",
      "MIME-Version: 1.0",
      'Content-Type: multipart/report; report-type=delivery-status; boundary="b"',
      "",
      "--b",
      "Content-Type: message/delivery-status",
      "",
      "Reporting-MTA: dns; mail.example",
      "",
      "Final-Recipient: rfc822; somebody@bounce.example",
      "Action: failed",
      "Status: 5.2.2 (mailbox full)",
      "Diagnostic-Code: smtp; 552 5.2.2",
      " over quota",
      "",
      "--b",
      "Content-Type: message/rfc822",
      "",
      `Message-ID: ${messageId}`,
      "Subject: hello",
      "",
      "Text",
      "--b--",
      "",
    ].join("\r\n");
    const taken = await report(signed(mail, { type: "message/rfc822" }));
    expect(taken.body).toEqual({ isKnown: true, isNew: true });
    expect(await state()).toMatchObject({ state: "bounced", last_error: "5.2.2" });
    const [event] = await select<{ said: string }>(
      "SELECT said FROM mail_events WHERE notice_id = $1",
      [noticeId],
    );
    expect(event?.said).toBe("smtp; 552 5.2.2 over quota");
    // Nothing is sent that was found bounced.
    await send();
    expect((await state()).state).toBe("bounced");
  });

  test("is told on paper, and waits for nobody any more", async () => {
    const { officer, noticeId, entryId, state } = await buildNotice();
    await select("UPDATE notices SET state = 'sent' WHERE id = $1", [noticeId]);
    await report(signed(bounceOf((await state()).message_id)));
    const client = await signInAs(officer);
    await client.post(`/entries/${entryId}/notices/actions`, {
      action: "give-on-paper",
      noticeId,
    });
    expect((await state()).state).toBe("on-paper");
    expect((await client.get("/waiting")).body.troubled).toEqual([]);
    const actions = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE subject_id = $1 ORDER BY id",
      [noticeId],
    );
    expect(actions.map(({ action }) => action)).toEqual(["bounce-notice", "give-on-paper-notice"]);
  });
});

describe("a mail that is no notice comes back", () => {
  /** The same report twice is news once. */
  async function bounce(id: string): Promise<void> {
    const body = bounceOf(`<${id}@dinward>`);
    expect((await report(signed(body))).body).toEqual({ isKnown: true, isNew: true });
    expect((await report(signed(body))).body).toEqual({ isKnown: true, isNew: false });
  }
  const actionsOf = async (subjectId: string) =>
    (
      await select<{ action: string }>(
        "SELECT action FROM audit_events WHERE subject_id = $1 AND action LIKE 'bounce%'",
        [subjectId],
      )
    ).map(({ action }) => action);

  test("the trail's head: its page says so", async () => {
    const admin = await buildUser({ roles: ["administrator"] });
    const { organizationId } = admin;
    await buildSite({ organizationId });
    const id = randomUUID();
    await insert("trail_mails", {
      id,
      organizationId,
      kind: "head",
      week: "2026-11-30",
      name: "K. Outside",
      email: "k@outside.example",
      language: "en",
      timeZone: "UTC",
      state: "sent",
    });
    await bounce(id);
    const { body } = await (await signInAs(admin)).get("/trail-keeper");
    expect(body.mails).toMatchObject([{ id, state: "bounced", error: "5.1.1" }]);
    expect(await actionsOf(organizationId)).toEqual(["bounce-trail-head"]);
  });

  test("a daily mail: whoever chose it sees it", async () => {
    const site = await buildSite({});
    const { organizationId } = site;
    const user = await buildUser({ organizationId, roles: ["supervisor"] });
    const id = randomUUID();
    await insert("digests", {
      id,
      organizationId,
      userId: user.id,
      siteId: site.id,
      date: daysFromToday(0),
      state: "sent",
    });
    await bounce(id);
    expect((await (await signInAs(user)).get("/me/digest")).body).toMatchObject({
      bounced: "5.1.1",
    });
  });

  test("word of what is overdue: the finding says that nobody was told", async () => {
    const site = await buildSite({});
    const { organizationId } = site;
    const officer = await buildUser({ organizationId, roles: ["officer"] });
    const worker = await buildWorker({ site });
    const findingId = await buildFinding({
      site,
      workerId: worker.id,
      kind: "over-limit-at-ear",
    });
    const id = randomUUID();
    await insert("escalations", {
      id,
      organizationId,
      siteId: site.id,
      recipientId: officer.id,
      sentAt: new Date(),
    });
    await select(
      "UPDATE findings SET escalation_id = $2, escalated_on = current_date WHERE id = $1",
      [findingId, id],
    );
    await bounce(id);
    const { body } = await (await signInAs(officer)).get(`/findings/${findingId}`);
    expect(body.wentUp).toMatchObject({ hasBounced: true });
    expect(await actionsOf(site.id)).toEqual(["bounce-escalation"]);
  });
});

describe("POST /hooks/mail", () => {
  test("takes what any secret of the list signed, and nothing else", async () => {
    const { state, noticeId } = await buildNotice();
    await select("UPDATE notices SET state = 'sent' WHERE id = $1", [noticeId]);
    const body = bounceOf((await state()).message_id, { kind: "delayed", status: "4.4.1" });
    expect((await nobody.post("/hooks/mail", JSON.parse(body))).status).toBe(401);
    const foreign = await report(signed(body, { secret: "a secret of somebody else's, not ours" }));
    expect([foreign.status, foreign.body.code]).toEqual([401, "hook-unsigned"]);
    const changed = signed(body);
    expect((await report({ ...changed, body: body.replace("4.4.1", "4.4.2") })).status).toBe(401);
    for (const at of [Date.now() - 301_000, Date.now() + 302_000]) {
      const stale = await report(signed(body, { at }));
      expect([stale.status, stale.body.code]).toEqual([401, "hook-stale"]);
    }
    const newer = await report(signed(body, { secret: "newer-secret-".repeat(3) }));
    expect(newer.body).toEqual({ isKnown: true, isNew: true });
    // A delay changes nothing: it may still arrive.
    expect((await state()).state).toBe("sent");
  });

  test("refuses what is no event, and knows no mail of another's", async () => {
    expect((await report(signed("{"))).status).toBe(422);
    const bad = await report(signed(JSON.stringify({ id: "1", kind: "lost", messageId: "<a@b>" })));
    expect(bad.status).toBe(422);
    expect(bad.body.issues.map(({ path }: { path: string[] }) => path.join("."))).toEqual(["kind"]);
    const unknown = await report(signed(bounceOf("<somebody@else.example>")));
    expect(unknown.body).toEqual({ isKnown: false, isNew: false });
    const person = await report(
      signed("From: a@b.example\r\nSubject: thanks\r\n\r\nThank you", { type: "message/rfc822" }),
    );
    expect(person.body).toEqual({ isKnown: false, isNew: false });
  });
});
