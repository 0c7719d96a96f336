import { randomUUID } from "node:crypto";
import { afterEach, describe, expect, inject, test } from "vitest";
import { readConfig } from "../../server/config";
import { lookAfter } from "../../server/jobs/look-after";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import { sendNotice } from "../../server/jobs/send-notice";
import { Mailer } from "../../server/lib/mailer";
import { formatDay } from "../../shared/format/date";
import { localDate } from "../../shared/time/zone";
import {
  buildCrew,
  buildJob,
  buildOrganization,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  select,
  signInAs,
} from "../factories";
import { Mailbox } from "../setup/services";

const mailbox = new Mailbox(inject("services").mailsUrl);
const { SMTP_URL, MAIL_FROM, PUBLIC_URL } = readConfig("work");
const mailer = new Mailer(SMTP_URL, MAIL_FROM);
afterEach(() => mailbox.behave("accept"));

interface Row {
  id: string;
  entry_id: string;
  audience: string;
  state: string;
  tries: number;
  message_id: string;
  unknown_outcomes: number;
}

/** A worker in noise without a protector, saved by the officer: three people are to be told. */
async function buildNotices(level: { peakDb?: number; peakWeighting?: string } = {}) {
  const { id: organizationId } = await buildOrganization();
  const site = await buildSite({
    organizationId,
    governingRuleSet: "uk-2005",
    timeZone: "Europe/London",
  });
  const task = await buildTask({
    site,
    name: "Run-up",
    levelDb: 98,
    metric: { kind: "steady" },
    ...level,
  });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const workers = [
    await buildWorker({ site, jobId: job.id, name: "R. Szabó" }),
    await buildWorker({ site, jobId: job.id, name: "D. Tavernor" }),
  ];
  const officer = await buildUser({ organizationId, roles: ["officer"], name: "S. Ferrand" });
  const supervisor = await buildUser({ organizationId, roles: ["supervisor"], language: "de" });
  const told = await buildUser({ organizationId, roles: ["worker"], workerId: workers[0]!.id });
  const crew = await buildCrew({ site, members: workers, supervisors: [supervisor] });
  const client = await signInAs(officer);
  const row = (workerId: string, more: object = {}) => ({
    kind: "worked",
    workerId,
    localStart: "06:00",
    lengthMin: 480,
    tasks: [{ taskId: task.id, durationMin: 480 }],
    ...more,
  });
  const save = (rows: object[]) =>
    client.post(`/crews/${crew.id}/day`, { date: daysFromToday(-1), rows });
  const saved = await save(workers.map(({ id }) => row(id)));
  const { entryId } = saved.body;
  const notices = () =>
    select<Row>(
      "SELECT * FROM notices WHERE organization_id = $1 AND state <> 'withdrawn' ORDER BY created_at, audience",
      [organizationId],
    );
  const send = ({ id }: Row) => sendNotice({ organizationId, noticeId: id }, mailer, PUBLIC_URL);
  return {
    organizationId,
    client,
    entryId,
    saved,
    save,
    row,
    workers,
    officer,
    supervisor,
    task,
    told,
    notices,
    send,
  };
}

describe("the outbox", () => {
  test("one mail a person and entry; nothing before its time; held; sent now in the reader's language", async () => {
    const { client, entryId, notices, send, supervisor, told } = await buildNotices();
    expect((await notices()).map(({ audience, state }) => [audience, state])).toEqual([
      ["officer", "waiting"],
      ["supervisor", "waiting"],
      ["worker", "waiting"],
    ]);
    for (const notice of await notices()) await send(notice);
    expect((await notices()).map(({ state }) => state)).toEqual(["waiting", "waiting", "waiting"]);

    const held = await client.post(`/entries/${entryId}/notices/actions`, { action: "hold" });
    expect(held.body).toMatchObject({ state: "held", people: 3 });
    for (const notice of await notices()) await send(notice);
    expect((await notices()).every(({ state }) => state === "held")).toBe(true);

    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    for (const notice of await notices()) await send(notice);
    expect((await notices()).every(({ state }) => state === "sent")).toBe(true);
    const [toSupervisor] = await mailbox.mails({ to: supervisor.email });
    expect(toSupervisor?.subject).toContain("2");
    expect(toSupervisor?.text).toContain("R. Szabó");
    expect(toSupervisor?.text).toContain("D. Tavernor");
    const [toWorker] = await mailbox.mails({ to: told.email });
    expect(toWorker?.subject).not.toMatch(/\d+\s*(dB|decibel)|hearing|noise/i);
    expect(toWorker?.text).not.toContain("D. Tavernor");
    // A second run of the job finds nothing to do.
    for (const notice of await notices()) await send(notice);
    expect(await mailbox.mails({ to: told.email })).toHaveLength(1);
    const again = await client.post(`/entries/${entryId}/notices/actions`, { action: "hold" });
    expect(again.status).toBe(409);
    expect(again.body.code).toBe("notice-sent-already");
  });

  test("what is done for one person of an entry is done for nobody else of it", async () => {
    const { client, entryId, notices } = await buildNotices();
    await select("UPDATE notices SET state = 'bounced' WHERE entry_id = $1", [entryId]);
    const [one, ...others] = await notices();
    const act = (body: object) => client.post(`/entries/${entryId}/notices/actions`, body);
    expect((await act({ action: "give-on-paper" })).status).toBe(422);
    expect((await act({ action: "give-on-paper", noticeId: randomUUID() })).status).toBe(404);
    expect((await act({ action: "give-on-paper", noticeId: one!.id })).status).toBe(201);
    const now = await notices();
    expect(now.find(({ id }) => id === one!.id)?.state).toBe("on-paper");
    expect(others.map(({ id }) => now.find((row) => row.id === id)?.state)).toEqual(
      others.map(() => "bounced"),
    );
    await act({ action: "send-again", noticeId: others[0]!.id });
    expect((await notices()).map(({ state }) => state).toSorted()).toEqual([
      "bounced",
      "on-paper",
      "waiting",
    ]);
  });

  test("an address that the server refuses for good is a failure that shows, and nothing is tried again", async () => {
    const { client, entryId, notices, send } = await buildNotices();
    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    await mailbox.behave("refuse");
    const [first] = await notices();
    await send(first!);
    expect((await notices()).find(({ id }) => id === first!.id)).toMatchObject({
      state: "failed",
      tries: 1,
    });
    const waiting = await client.get("/waiting");
    expect(waiting.body.troubled.map(({ id }: { id: string }) => id)).toEqual([first!.id]);
  });

  test("the mail server is busy: the notice waits and the queue tries again", async () => {
    const { client, entryId, notices, send } = await buildNotices();
    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    await mailbox.behave("fail-once");
    const [first] = await notices();
    await expect(send(first!)).rejects.toThrow();
    expect((await notices()).find(({ id }) => id === first!.id)).toMatchObject({
      state: "waiting",
      tries: 1,
    });
    await mailbox.behave("accept");
    await send(first!);
    expect((await notices()).find(({ id }) => id === first!.id)).toMatchObject({
      state: "sent",
      tries: 2,
    });
  });

  test("an outcome nobody knows shows as possibly sent, is tried once more under the same Message-ID, and rests", async () => {
    const { client, entryId, notices, send, told } = await buildNotices();
    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    await mailbox.behave("drop-after-data");
    const toWorker = (await notices()).find(({ audience }) => audience === "worker")!;
    await expect(send(toWorker)).rejects.toThrow();
    const state = async () => (await notices()).find(({ id }) => id === toWorker.id);
    expect(await state()).toMatchObject({ state: "possibly-sent", unknown_outcomes: 1 });
    await send(toWorker);
    expect(await state()).toMatchObject({ state: "possibly-sent", unknown_outcomes: 2, tries: 2 });
    await send(toWorker);
    expect(await state()).toMatchObject({ tries: 2 });
    const ids = new Set(
      (await mailbox.mails({ to: told.email })).map(({ messageId }) => messageId),
    );
    expect([...ids].every((id) => id === toWorker.message_id)).toBe(true);
  });

  test("a process that died while sending: found again, retried once under the same Message-ID", async () => {
    const { organizationId, client, entryId, notices, send } = await buildNotices();
    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    const [first] = await notices();
    await select(
      "UPDATE notices SET state = 'sending', tries = 1, attempted_at = now() - interval '10 minutes' WHERE id = $1",
      [first!.id],
    );
    await select("DELETE FROM graphile_worker._private_jobs");
    await lookAfter();
    const jobs = await select<{ key: string }>(
      "SELECT key FROM graphile_worker.jobs WHERE key = $1",
      [`notice:${first!.id}`],
    );
    expect(jobs).toHaveLength(1);
    await send(first!);
    expect((await notices()).find(({ id }) => id === first!.id)).toMatchObject({
      state: "sent",
      unknown_outcomes: 1,
      tries: 2,
    });
    expect(organizationId).toBeTruthy();
  });

  test("a correction after sending tells the same people that it replaces the earlier", async () => {
    const { client, entryId, notices, send, save, row, workers, told, saved } =
      await buildNotices();
    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    for (const notice of await notices()) await send(notice);
    const { shiftId, revision } = saved.body.saved[0].shift;
    await save([
      row(workers[0]!.id, {
        shiftId,
        revision,
        reason: "was in the control room",
        tasks: [],
        unaccounted: { how: "quiet", levelDb: 60 },
      }),
    ]);
    const correction = (await notices()).filter(({ state }) => state === "waiting");
    expect(correction.map(({ audience }) => audience)).toEqual(["officer", "supervisor", "worker"]);
    await select("UPDATE notices SET not_before = now() WHERE state = 'waiting'");
    const entry = async (id: string) => (await client.get(`/entries/${id}/notices`)).body;
    expect((await entry(entryId)).correctedAt).toBeNull();
    for (const notice of correction) await send(notice);
    expect(Date.parse((await entry(entryId)).correctedAt)).toBeGreaterThan(0);
    expect((await entry(correction[0]!.entry_id)).correctedAt).toBeNull();
    const mails = await mailbox.mails({ to: told.email });
    expect(mails).toHaveLength(2);
    expect(mails[1]?.text).toMatch(/This replaces/);
    expect(mails[1]?.text).toMatch(/not over the limit after all/);
  });

  test("a correction names the mail that it corrects, and orders nothing for what is closed", async () => {
    const {
      organizationId,
      client,
      entryId,
      notices,
      send,
      save,
      row,
      workers,
      officer,
      saved,
      task,
    } = await buildNotices();
    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    for (const notice of await notices()) await send(notice);
    const closedOn = daysFromToday(-1);
    await select(
      "UPDATE findings SET state = 'closed', closing_reason = 'left the cell', closed_on = $2 WHERE organization_id = $1 AND worker_id = $3",
      [organizationId, closedOn, workers[0]!.id],
    );
    const { shiftId, revision } = saved.body.saved[0].shift;
    // Still over, by another figure.
    const tasks = [{ taskId: task.id, durationMin: 300 }];
    await save([
      row(workers[0]!.id, { shiftId, revision, reason: "went home", lengthMin: 300, tasks }),
    ]);
    const toOfficer = (await notices()).find(
      ({ audience, state }) => audience === "officer" && state === "waiting",
    );
    await select("UPDATE notices SET not_before = now() WHERE id = $1", [toOfficer?.id]);
    await send(toOfficer!);
    const [, correction] = await mailbox.mails({ to: officer.email });
    expect(correction?.subject).toBe(
      `Correction to our mail of ${formatDay(localDate(new Date(), "Europe/London"), "en")}`,
    );
    expect(correction?.text).toContain(`already dealt with on ${formatDay(closedOn, "en")}`);
    expect(correction?.text).not.toMatch(/Give |protector before/);
  });

  test("a correction and news of one saving are one mail to each", async () => {
    const { client, entryId, notices, send, save, row, workers, officer, saved, task } =
      await buildNotices();
    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    for (const notice of await notices()) await send(notice);
    // The first worker's findings are forgotten, as if that day had been quiet: for them the next saving is news.
    await select(
      "DELETE FROM notice_items WHERE worker_id = $1 AND finding_id IN (SELECT id FROM findings WHERE kind = 'no-protector')",
      [workers[0]!.id],
    );
    const tasks = [{ taskId: task.id, durationMin: 300 }];
    const corrected = await save(
      workers.map(({ id }, place) => {
        const { shiftId, revision } = saved.body.saved[place].shift;
        return row(id, { shiftId, revision, reason: "went home", lengthMin: 300, tasks });
      }),
    );
    expect(corrected.body).toMatchObject({ refused: [], notices: { people: 3 } });
    const waiting = (await notices()).filter(({ state }) => state === "waiting");
    expect(waiting.map(({ audience }) => audience)).toEqual(["officer", "supervisor", "worker"]);
    await select("UPDATE notices SET not_before = now() WHERE state = 'waiting'");
    for (const notice of waiting) await send(notice);
    const [, correction, ...more] = await mailbox.mails({ to: officer.email });
    expect(more).toEqual([]);
    expect(correction?.text).toContain("R. Szabó");
    expect(correction?.text).toContain("D. Tavernor");
  });

  test("a peak corrected after sending is told too, though no 8-hour level moved", async () => {
    const { client, entryId, organizationId, notices, send, task } = await buildNotices({
      peakDb: 136,
      peakWeighting: "C",
    });
    await client.post(`/entries/${entryId}/notices/actions`, { action: "send-now" });
    for (const notice of await notices()) await send(notice);
    const corrected = await client.post(`/tasks/${task.id}/levels`, {
      metric: { kind: "steady" },
      levelDb: 98,
      peak: { levelDb: 130, weighting: "C" },
      grade: "task-level",
      effectiveFrom: daysFromToday(-1),
      reason: "a knock on the microphone",
    });
    expect(corrected.status).toBe(201);
    await recomputeStaleDays(organizationId);
    const replacing = await select<{ audience: string }>(
      "SELECT audience FROM notices WHERE organization_id = $1 AND state = 'waiting' AND replaces_id IS NOT NULL ORDER BY audience",
      [organizationId],
    );
    expect(replacing.map(({ audience }) => audience)).toEqual(["officer", "supervisor", "worker"]);
  });

  test("a notice can be read before it goes; a foreign organization's is not there", async () => {
    const { client, entryId, notices } = await buildNotices();
    const [first] = await notices();
    const text = await client.get(`/notices/${first!.id}`);
    expect(text.body).toMatchObject({ isSent: false });
    expect(text.body.text).toContain("R. Szabó");
    const stranger = await signInAs(await buildUser({ roles: ["officer"] }));
    expect((await stranger.get(`/notices/${first!.id}`)).status).toBe(404);
    expect(
      (await stranger.post(`/entries/${entryId}/notices/actions`, { action: "hold" })).status,
    ).toBe(404);
  });
});
