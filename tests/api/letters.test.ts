import { randomUUID } from "node:crypto";
import { afterEach, describe, expect, inject, test } from "vitest";
import { writeResultLetters } from "../../server/commands/write-result-letters";
import { readConfig } from "../../server/config";
import { sendNotice } from "../../server/jobs/send-notice";
import { inTransaction } from "../../server/lib/db";
import { Mailer } from "../../server/lib/mailer";
import {
  buildDay,
  buildSite,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  daysFromTodayAtSite,
  insert,
  nobody,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";
import { Mailbox } from "../setup/services";
import { describeEndpoint } from "./five-cases";

testApp();
const mailbox = new Mailbox(inject("services").mailsUrl);
const { SMTP_URL, MAIL_FROM, PUBLIC_URL } = readConfig("work");
const mailer = new Mailer(SMTP_URL, MAIL_FROM);
afterEach(() => mailbox.behave("accept"));

const overAction = (levelDb: number) => ({
  ruleSetKey: "uk-2005",
  criterionId: "upper-action",
  verdict: levelDb >= 85 ? "over" : "under",
  levelDb,
  dosePct: null,
  bound: "exact",
});

async function measure(
  worker: Awaited<ReturnType<typeof buildWorker>>,
  date: string,
  levelDb: number,
) {
  return buildDay(worker, date, {
    grade: "measured-worker",
    governingRuleSet: "uk-2005",
    outsideDb: levelDb,
    criteria: [overAction(levelDb)],
  });
}

const write = ({ organizationId }: { organizationId: string }, inDays = 0) =>
  inTransaction({ organizationId }, () =>
    writeResultLetters(organizationId, new Date(Date.now() + inDays * 86_400_000)),
  );

interface LetterRow {
  id: string;
  notice_id: string | null;
  body_text: string;
  subject: string;
  due_on: string;
  replaces_id: string | null;
}
const letters = ({ organizationId }: { organizationId: string }) =>
  select<LetterRow>(
    "SELECT *, due_on::text AS due_on FROM result_letters WHERE organization_id = $1 ORDER BY written_at",
    [organizationId],
  );

const ukSite = () =>
  buildSite({ governingRuleSet: "uk-2005", timeZone: "Europe/London", noticeDelayMin: 0 });

/** A worker with a mail address, measured over the action value yesterday, and their letter. */
async function buildLetter({
  site,
  language = "en",
  hasMail = true,
}: {
  site?: Site;
  language?: string;
  hasMail?: boolean;
} = {}) {
  const at = site ?? (await ukSite());
  const worker = await buildWorker({ site: at, language, name: "R. Szabó" });
  const user = hasMail
    ? await buildUser({
        organizationId: at.organizationId,
        roles: ["worker"],
        workerId: worker.id,
        language,
      })
    : null;
  await measure(worker, daysFromToday(-1), 91.3);
  await write(at);
  const letter = (await letters(at)).at(-1)!;
  return { site: at, worker, user, letter };
}

async function send({ site, letter }: { site: Site; letter: LetterRow }) {
  await sendNotice(
    { organizationId: site.organizationId, noticeId: letter.notice_id! },
    mailer,
    PUBLIC_URL,
  );
}

async function secretTo(email: string): Promise<string> {
  const mails = await mailbox.mails({ to: email });
  const found = /\/acknowledge\/([\w-]+)/.exec(mails.at(-1)?.text ?? "");
  return found?.[1] ?? "";
}

describe("letters of results", () => {
  test("who was measured at or over an action value gets one, in their language, and no second", async () => {
    const { site, worker, user, letter } = await buildLetter({ language: "de" });
    expect(letter.notice_id).not.toBeNull();
    expect(letter.due_on).toBe(daysFromToday(13));
    expect(letter.subject).not.toMatch(/\d|dB/);
    // Under the action value, from a task's level, or too long ago: nothing is told.
    const quiet = await buildWorker({ site });
    await measure(quiet, daysFromToday(-1), 82);
    const reckoned = await buildWorker({ site });
    await buildDay(reckoned, daysFromToday(-1), { criteria: [overAction(92)] });
    const longAgo = await buildWorker({ site });
    await measure(longAgo, daysFromToday(-40), 92);
    // Measured anew within the week: it waits for the next letter, unless it is due.
    await measure(worker, daysFromToday(0), 90);
    await write(site);
    expect(await letters(site)).toHaveLength(1);
    await write(site, 12);
    expect(await letters(site)).toHaveLength(2);

    await send({ site, letter });
    const [mail] = await mailbox.mails({ to: user!.email });
    expect(mail?.text).toContain("Gehörschutz tragen lassen");
    expect(mail?.html).toContain('lang="de"');
    expect(mail?.html).toMatch(/href="[^"]+\/acknowledge\/[\w-]{20,}"/);
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1 ORDER BY id",
      [site.organizationId],
    );
    expect(events.map(({ action }) => action)).toContain("write-result-letter");
  });

  test("what today is, the site's clock says", async () => {
    const told = async (timeZone: string, hourUtc: string) => {
      const site = await buildSite({ governingRuleSet: "uk-2005", timeZone, noticeDelayMin: 0 });
      await measure(await buildWorker({ site }), daysFromToday(-2), 92);
      const now = new Date(`${daysFromToday(-3)}T${hourUtc}:00Z`);
      await inTransaction({ organizationId: site.organizationId }, () =>
        writeResultLetters(site.organizationId, now),
      );
      return (await letters(site)).length;
    };
    expect(await told("Pacific/Auckland", "10:00")).toBe(0);
    expect(await told("Pacific/Auckland", "13:00")).toBe(1);
    expect(await told("America/Los_Angeles", "23:00")).toBe(0);
  });

  test("a result that turns out otherwise: unsent it is withdrawn and written anew, sent it is put right", async () => {
    const { site, worker, letter } = await buildLetter();
    const correct = async (levelDb: number) => {
      const [result] = await select<{ id: string }>(
        `INSERT INTO day_results (organization_id, site_id, worker_id, date, origin, governing_rule_set, governing_version, method_version, inputs_hash, shift_min,
           unaccounted_min, grade, outside_db, outside_bound, verdict_outside, verdict_at_ear, has_protector, criteria, refs)
         SELECT organization_id, site_id, worker_id, date, origin, governing_rule_set, governing_version, method_version, sha256($3::bytea), shift_min,
           unaccounted_min, grade, $2, outside_bound, verdict_outside, verdict_at_ear, has_protector, $4, refs FROM day_results WHERE worker_id = $1 LIMIT 1 RETURNING id`,
        [
          worker.id,
          levelDb,
          Buffer.from(String(levelDb)),
          JSON.stringify({ governing: [overAction(levelDb)] }),
        ],
      );
      await select("UPDATE days SET current_result_id = $2 WHERE worker_id = $1", [
        worker.id,
        result!.id,
      ]);
      await write(site);
      return letters(site);
    };
    const again = await correct(92.4);
    expect(again).toHaveLength(2);
    expect(again[1]).toMatchObject({ replaces_id: null });
    const states = await select<{ state: string }>("SELECT state FROM notices WHERE id = $1", [
      letter.notice_id,
    ]);
    expect(states[0]!.state).toBe("withdrawn");

    await send({ site, letter: again[1]! });
    const right = await correct(81);
    expect(right).toHaveLength(3);
    expect(right[2]).toMatchObject({ replaces_id: again[1]!.id });
    expect(
      await select<{ level_db: number; is_over: boolean }>(
        "SELECT level_db, is_over FROM result_letter_days WHERE letter_id = ANY ($1::uuid[]) ORDER BY level_db",
        [[again[1]!.id, right[2]!.id]],
      ),
    ).toMatchObject([
      { level_db: 81, is_over: false },
      { level_db: 92.4, is_over: true },
    ]);
    expect(await correct(81.01)).toHaveLength(3);
  });

  test("opening the link acknowledges nothing; the button does, once", async () => {
    const { site, user, letter } = await buildLetter();
    await send({ site, letter });
    const secret = await secretTo(user!.email);
    const stored = await select<{ body_text: string; body_html: string }>(
      "SELECT body_text, body_html FROM notices WHERE id = $1",
      [letter.notice_id],
    );
    expect(JSON.stringify(stored)).not.toContain(secret);
    const path = `/acknowledgements/${secret}`;
    for (let times = 0; times < 3; times += 1) {
      const opened = await nobody.get(path);
      expect(opened.body).toMatchObject({ state: "open", acknowledgedOn: null });
      expect(opened.body.text).toBe(letter.body_text);
    }
    const first = await nobody.send({ method: "post", path, body: {} });
    expect(first.status).toBe(200);
    expect(first.body).toMatchObject({ state: "acknowledged", text: null });
    const second = await nobody.send({ method: "post", path, body: {} });
    expect(second.status).toBe(409);
    expect(second.body.code).toBe("link-used");
    expect((await nobody.get(path)).body.state).toBe("acknowledged");
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const view = await officer.get(`/letters/${letter.id}`);
    expect(view.body).toMatchObject({ state: "acknowledged", acknowledged: { way: "link" } });
    const events = await select<{ action: string; actor_id: string | null }>(
      "SELECT action, actor_id FROM audit_events WHERE organization_id = $1 AND action = 'acknowledge-letter'",
      [site.organizationId],
    );
    expect(events).toEqual([{ action: "acknowledge-letter", actor_id: null }]);
  });

  test("two clicks at once count once", async () => {
    const { site, user, letter } = await buildLetter();
    await send({ site, letter });
    const path = `/acknowledgements/${await secretTo(user!.email)}`;
    const answers = await Promise.all([
      nobody.send({ method: "post", path, body: {} }),
      nobody.send({ method: "post", path, body: {} }),
    ]);
    expect(answers.map(({ status }) => status).toSorted()).toEqual([200, 409]);
  });

  test("somebody else's link, one that has run out, and none at all: said in words, and nothing is stored", async () => {
    const { site, user, letter } = await buildLetter();
    await send({ site, letter });
    const path = `/acknowledgements/${await secretTo(user!.email)}`;
    const other = await buildWorker({ site });
    const clients: Client[] = [
      await signInAs(await buildUser({ organizationId: site.organizationId, roles: ["officer"] })),
      await signInAs(
        await buildUser({
          organizationId: site.organizationId,
          roles: ["worker"],
          workerId: other.id,
        }),
      ),
      await signInAs(await buildUser({ roles: ["officer"] })),
    ];
    for (const client of clients) {
      const refused = await client.send({ method: "post", path, body: {} });
      expect(refused.status).toBe(403);
      expect(refused.body.code).toBe("link-not-yours");
      expect((await client.get(path)).status).toBe(403);
    }
    const own = await (await signInAs(user!)).get(path);
    expect(own.body.state).toBe("open");
    await select("ALTER TABLE letter_links DISABLE TRIGGER append_only");
    await select(
      "UPDATE letter_links SET expires_at = now() - interval '1 hour' WHERE letter_id = $1",
      [letter.id],
    );
    await select("ALTER TABLE letter_links ENABLE TRIGGER append_only");
    const late = await nobody.send({ method: "post", path, body: {} });
    expect(late.body.code).toBe("link-expired");
    expect((await nobody.get(path)).body).toMatchObject({ state: "expired", text: null });
    const unknown = await nobody.get(`/acknowledgements/${randomUUID()}`);
    expect(unknown.status).toBe(404);
    expect(
      await select("SELECT 1 FROM notice_acknowledgements WHERE letter_id = $1", [letter.id]),
    ).toEqual([]);
  });

  test("a try that the mail server refused for now is tried again with another link, and both count once together", async () => {
    const { site, user, letter } = await buildLetter();
    await mailbox.behave("drop-after-data");
    await expect(send({ site, letter })).rejects.toThrow();
    await mailbox.behave("accept");
    await send({ site, letter });
    const mails = await mailbox.mails({ to: user!.email });
    const secrets = mails.map(({ text }) => /\/acknowledge\/([\w-]+)/.exec(text)?.[1]);
    const words = new Set(mails.map(({ text }) => text.replace(/\/acknowledge\/[\w-]+/, "")));
    expect(words.size).toBe(1);
    const last = secrets.at(-1);
    expect(
      (await nobody.send({ method: "post", path: `/acknowledgements/${last}`, body: {} })).status,
    ).toBe(200);
    if (secrets.length > 1)
      expect((await nobody.get(`/acknowledgements/${secrets[0]}`)).body.state).toBe("acknowledged");
  });

  test("without a mail address it is printed, counts as waiting, and is signed before the officer", async () => {
    const { site, letter } = await buildLetter({ hasMail: false });
    expect(letter.notice_id).toBeNull();
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    expect((await officer.get("/waiting")).body.letters).toEqual({ toPrint: 1, late: 0 });
    const list = await officer.get("/letters");
    expect(list.body.rows).toMatchObject([{ id: letter.id, state: "to-print", isLate: false }]);
    const post = (signedOn: string) =>
      officer.post(`/letters/${letter.id}/acknowledgement`, { signedOn });
    for (const [signedOn, code] of [
      [daysFromToday(-5), "signed-before-written"],
      [daysFromToday(2), "in-the-future"],
    ] as const) {
      const refused = await post(signedOn);
      expect(refused.status).toBe(422);
      expect(refused.body.issues).toMatchObject([{ path: ["signedOn"], code }]);
    }
    const signed = await post(daysFromToday(0));
    expect(signed.status).toBe(201);
    expect(signed.body).toMatchObject({
      state: "acknowledged",
      acknowledged: { way: "paper", signedOn: daysFromToday(0) },
    });
    expect((await post(daysFromToday(0))).body.code).toBe("letter-acknowledged");
    expect((await officer.get("/letters")).body.rows).toEqual([]);
    expect((await officer.get("/letters?show=acknowledged")).body.rows).toHaveLength(1);
    expect((await officer.get("/waiting")).body.letters).toEqual({ toPrint: 0, late: 0 });
  });
});

/** A letter on paper that nobody wrote: laying it out leaves nothing in the trail. */
async function layOutLetter({
  organizationId,
  id: siteId,
  ...site
}: Site): Promise<{ id: string }> {
  const worker = await buildWorker({ site: { organizationId, id: siteId, ...site } });
  const resultId = await measure(worker, daysFromToday(-1), 91.3);
  const id = await insert("result_letters", {
    organizationId,
    siteId,
    workerId: worker.id,
    ruleSet: "uk-2005",
    ruleSetVersion: 1,
    dueOn: daysFromToday(13),
    language: "en",
    subject: "Results",
    bodyText: "91.3 dB",
  });
  await insert("result_letter_days", {
    organizationId,
    letterId: id,
    workerId: worker.id,
    date: daysFromToday(-1),
    resultId,
    criterion: "uk-2005:upper-action",
    isOver: true,
    levelDb: 91.3,
  });
  return { id };
}

describeEndpoint({
  route: "GET /letters",
  as: "officer",
  not: "supervisor",
  call: async (site) => {
    await layOutLetter(site);
    return { method: "get", path: "/letters" };
  },
  bad: { path: "?show=some" },
  event: null,
  namesNothing: true,
});

describeEndpoint({
  route: "GET /letters/:id",
  as: "auditor",
  not: "worker",
  call: async (site) => {
    const letter = await layOutLetter(site);
    return { method: "get", path: `/letters/${letter.id}` };
  },
  bad: { path: "x" },
  event: null,
});

describeEndpoint({
  route: "POST /letters/:id/acknowledgement",
  as: "officer",
  not: "auditor",
  call: async (site) => {
    const letter = await layOutLetter(site);
    return {
      method: "post",
      path: `/letters/${letter.id}/acknowledgement`,
      body: { signedOn: daysFromTodayAtSite(0) },
    };
  },
  bad: { body: { signedOn: "yesterday" } },
  badField: "signedOn",
  event: "acknowledge-letter",
});
