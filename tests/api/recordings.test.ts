import { existsSync, readdirSync, statSync } from "node:fs";
import { dirname, join } from "node:path";
import { describe, expect, test } from "vitest";
import { lookAfter } from "../../server/jobs/look-after";
import { fileStore } from "../../server/lib/file-store";
import { wavHeader } from "../../server/recordings/test-wav";
import {
  buildDay,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  nobody,
  owner,
  type Site,
  select,
  signInAs,
} from "../factories";
import {
  analyse,
  buildRecording,
  flatAnalysis,
  sendRecording,
  sendTone,
  sine,
  soundFile,
} from "../factories/recording";
import { describeEndpoint } from "./five-cases";

const userAt = async ({ organizationId }: Site, role: "officer" | "auditor" | "supervisor") =>
  signInAs(await buildUser({ organizationId, roles: [role] }));

async function buildPlace() {
  const site = await buildSite({ timeZone: "UTC" });
  const task = await buildTask({ site });
  return { site, task, client: await userAt(site, "officer") };
}

/** Every file below the data folder that belongs to this organization, and those still on their way in. */
function filesOf({ organizationId }: Site): string[] {
  const kept = dirname(dirname(fileStore().pathOf(organizationId, "0".repeat(64))));
  const staging = join(dirname(dirname(kept)), "staging");
  return [kept, staging].flatMap((folder) =>
    existsSync(folder)
      ? readdirSync(folder, { recursive: true, encoding: "utf8" })
          .map((name) => join(folder, name))
          .filter((path) => statSync(path).isFile())
      : [],
  );
}

/** What is dropped on the way in goes just after the answer. */
const expectNoFile = (site: Site) => expect.poll(() => filesOf(site)).toEqual([]);

// An amplitude of 0.1 at 20 Pa full scale is a crest of 2 Pa: 20 lg(2/√2/20 µPa).
const TONE_DB = 20 * Math.log10(2 / Math.SQRT2 / 20e-6);

const adoption = { how: "level", channel: 1, effectiveFrom: daysFromToday(-5), reason: "measured" };

describeEndpoint({
  route: "GET /recordings",
  as: "auditor",
  not: "supervisor",
  call: async () => ({ method: "get", path: "/recordings" }),
  bad: { path: "?limit=0" },
  badField: "limit",
  event: null,
  namesNothing: true,
});

describeEndpoint({
  route: "GET /recordings/:id",
  as: "auditor",
  not: "supervisor",
  call: async (site) => ({
    method: "get",
    path: `/recordings/${(await buildRecording({ site })).id}`,
  }),
  bad: null,
  event: null,
});

describeEndpoint({
  route: "POST /recordings/:id/cancel",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/recordings/${(await buildRecording({ site, state: "uploaded" })).id}/cancel`,
    body: {},
  }),
  bad: null,
  status: 200,
  event: "cancel-recording",
});

describeEndpoint({
  route: "POST /recordings/:id/faults",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/recordings/${(await buildRecording({ site, state: "asked" })).id}/faults`,
    body: { accept: ["recording-clipped"], reason: "two clicks of a relay" },
  }),
  bad: { body: { accept: ["recording-silent"] } },
  status: 202,
  event: "accept-recording-faults",
});

describeEndpoint({
  route: "POST /recordings/:id/keeping",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/recordings/${(await buildRecording({ site, deleteOn: daysFromToday(10) })).id}/keeping`,
    body: { keepReason: "the maker of the blower listens to it", deleteOn: daysFromToday(20) },
  }),
  bad: { body: { deleteOn: daysFromToday(-1) } },
  badField: "deleteOn",
  status: 200,
  event: "keep-recording",
});

describeEndpoint({
  route: "POST /recordings/:id/audio-deletion",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/recordings/${(await buildRecording({ site, deleteOn: daysFromToday(10) })).id}/audio-deletion`,
    body: {},
  }),
  bad: null,
  status: 200,
  event: "delete-audio",
});

describeEndpoint({
  route: "POST /recordings/:id/adoption",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/recordings/${(await buildRecording({ site })).id}/adoption`,
    body: adoption,
  }),
  bad: { body: { channel: 2 } },
  badField: "channel",
  event: "adopt-recording",
});

describeEndpoint({
  route: "POST /recordings/:id/adoption/preview",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/recordings/${(await buildRecording({ site })).id}/adoption/preview`,
    body: adoption,
  }),
  bad: { body: { channel: 2 } },
  badField: "channel",
  status: 200,
  event: null,
});

describe("who may send a recording or a tone in", () => {
  test("an officer of the task's site, and nobody else; nothing of theirs stays", async () => {
    const { site, task } = await buildPlace();
    const tone = { taskId: task.id, toneDb: "94" };
    for (const send of [
      (client: Parameters<typeof sendRecording>[0]) => sendRecording(client, { taskId: task.id }),
      (client: Parameters<typeof sendRecording>[0]) => sendTone(client, tone, soundFile()),
    ]) {
      expect((await send(nobody)).status).toBe(401);
      expect((await send(await userAt(site, "auditor"))).status).toBe(403);
      expect((await send(await userAt(await buildSite(), "officer"))).status).toBe(404);
    }
    await expectNoFile(site);
  });

  test("422 for what is no WAV, for a date without a reason, for a date that has been", async () => {
    const { site, task, client } = await buildPlace();
    const send = async (more: Partial<Parameters<typeof sendRecording>[1]>) =>
      (await sendRecording(client, { taskId: task.id, ...more })).body.issues;
    expect(await send({ content: Buffer.from("no sound at all") })).toMatchObject([
      { path: ["file"], code: "recording-not-wav" },
    ]);
    expect(await send({ deleteOn: daysFromToday(5) })).toMatchObject([
      { path: ["deleteOn"], code: "keep-reason-and-date" },
    ]);
    expect(await send({ keepReason: "to listen", deleteOn: daysFromToday(0) })).toMatchObject([
      { path: ["deleteOn"], code: "date-not-ahead" },
    ]);
    expect(await send({ calibration: { kind: "tone", toneId: task.id } })).toMatchObject([
      { path: ["calibration"], code: "tone-unknown" },
    ]);
    expect(await send({ calibration: { kind: "guess" } })).toMatchObject([
      { path: ["calibration", "kind"] },
    ]);
    await expectNoFile(site);
    expect(await select("SELECT 1 FROM recordings WHERE site_id = $1", [site.id])).toEqual([]);
  });
});

describe("a recording is analysed and its audio goes", { timeout: 60_000 }, () => {
  test("levels by channel, octaves and third-octaves; no file is left", async () => {
    const { site, task, client } = await buildPlace();
    const content = soundFile([sine(3, 0.1), sine(3, 0.05)]);
    const sent = await sendRecording(client, { taskId: task.id, content });
    expect(sent.body).toMatchObject({ state: "uploaded", fileName: "saw.wav", analysis: null });
    expect(filesOf(site)).toHaveLength(1);
    await analyse(site, sent.body.id);
    const { body } = await client.get(`/recordings/${sent.body.id}`);
    expect(body).toMatchObject({ state: "analysed", progressPct: 100, fileId: null });
    const [first, second] = body.analysis.channels;
    expect(first.laeqDb).toBeCloseTo(TONE_DB, 1);
    expect(first.laeqDb - second.laeqDb).toBeCloseTo(6.02, 2);
    const octave = first.octaveBandsDb.find(
      ({ frequencyHz }: { frequencyHz: number }) => frequencyHz === 1000,
    );
    expect(octave.levelDb).toBeCloseTo(TONE_DB, 0);
    expect(first.thirdOctavesDb.length).toBeGreaterThan(27);
    await expectNoFile(site);
    expect(
      await select("SELECT 1 FROM files WHERE organization_id = $1", [site.organizationId]),
    ).toEqual([]);
  });

  test("a job that runs twice ends the same", async () => {
    const { site, task, client } = await buildPlace();
    const sent = await sendRecording(client, { taskId: task.id });
    // The first process was lost in the middle.
    await owner().query(
      "UPDATE recordings SET state = 'analysing', tries = 1, progress_pct = 40 WHERE id = $1",
      [sent.body.id],
    );
    await analyse(site, sent.body.id);
    const once = await client.get(`/recordings/${sent.body.id}`);
    await analyse(site, sent.body.id);
    expect((await client.get(`/recordings/${sent.body.id}`)).body).toEqual(once.body);
    expect(once.body.state).toBe("analysed");
  });

  test("kept for a reason it stays until its day, is the officer's to hear, and goes on that day", async () => {
    const { site, task, client } = await buildPlace();
    const sent = await sendRecording(client, {
      taskId: task.id,
      keepReason: "the maker of the blower listens to it",
      deleteOn: daysFromToday(3),
    });
    await analyse(site, sent.body.id);
    const { body } = await client.get(`/recordings/${sent.body.id}`);
    expect(body).toMatchObject({ state: "analysed", deleteOn: daysFromToday(3) });
    expect((await client.get(`/files/${body.fileId}`)).status).toBe(200);
    const auditor = await userAt(site, "auditor");
    expect((await auditor.get(`/files/${body.fileId}`)).status).toBe(404);
    expect((await client.get("/recordings?isKept=yes")).body.rows).toHaveLength(1);
    await lookAfter();
    expect(filesOf(site)).toHaveLength(1);
    await owner().query("UPDATE recordings SET delete_on = current_date WHERE id = $1", [body.id]);
    await lookAfter();
    await expectNoFile(site);
    const after = await client.get(`/recordings/${body.id}`);
    expect(after.body).toMatchObject({ fileId: null, state: "analysed" });
    expect(after.body.analysis).toEqual(body.analysis);
    expect((await client.get("/recordings?isKept=yes")).body.rows).toEqual([]);
  });

  test("kept while it is being analysed it stays, and the analysis goes on", {
    timeout: 60_000,
  }, async () => {
    const { site, task, client } = await buildPlace();
    const content = soundFile([sine(60, 0.1), sine(60, 0.1)]);
    const { body } = await sendRecording(client, { taskId: task.id, content });
    const work = analyse(site, body.id);
    const path = `/recordings/${body.id}`;
    await expect.poll(async () => (await client.get(path)).body.state).toBe("analysing");
    const keeping = { keepReason: "to listen to it again", deleteOn: daysFromToday(3) };
    expect((await client.post(`${path}/keeping`, keeping)).status).toBe(200);
    await work;
    const kept = (await client.get(path)).body;
    expect([kept.state, kept.fileId === null]).toEqual(["analysed", false]);
    expect(filesOf(site)).toHaveLength(1);
  });

  test("the same sound sent twice: the one that is kept stays when the other goes", async () => {
    const { site, task, client } = await buildPlace();
    const kept = await sendRecording(client, {
      taskId: task.id,
      keepReason: "to listen to it again",
      deleteOn: daysFromToday(3),
    });
    const other = await sendRecording(client, { taskId: task.id });
    await analyse(site, kept.body.id);
    await analyse(site, other.body.id);
    expect(filesOf(site)).toHaveLength(1);
    await client.post(`/recordings/${kept.body.id}/audio-deletion`, {});
    await expectNoFile(site);
  });

  test.each([
    ["silent", soundFile([sine(1, 0)]), "recording-silent"],
    ["compressed", soundFile(undefined, { formatTag: 0x55 }), "recording-compressed"],
    [
      "without samples",
      Buffer.from(wavHeader({ sampleFormat: "int16", rateHz: 48_000 }, 1, 0)),
      "recording-empty",
    ],
  ])("%s: it is refused by name, and its audio goes", async (_, content, code) => {
    const { site, task, client } = await buildPlace();
    const sent = await sendRecording(client, { taskId: task.id, content });
    await analyse(site, sent.body.id);
    const { body } = await client.get(`/recordings/${sent.body.id}`);
    expect(body).toMatchObject({ state: "failed", failure: { code }, fileId: null });
    await expectNoFile(site);
  });

  test.each([
    ["clipped", soundFile([sine(1, 1.5)]), "recording-clipped"],
    ["truncated", soundFile([sine(2, 0.1)]).subarray(0, 144_044), "recording-truncated"],
  ])("%s: it is asked about, and used with the reason", async (_, content, code) => {
    const { site, task, client } = await buildPlace();
    const sent = await sendRecording(client, { taskId: task.id, content });
    await analyse(site, sent.body.id);
    const path = `/recordings/${sent.body.id}`;
    const asked = await client.get(path);
    expect(asked.body).toMatchObject({ state: "asked", failure: { code } });
    expect(filesOf(site)).toHaveLength(1);
    const reason = "only the last second is lost";
    expect((await client.post(`${path}/faults`, { accept: [code], reason })).status).toBe(202);
    await analyse(site, sent.body.id);
    const { body } = await client.get(path);
    expect(body).toMatchObject({ state: "analysed", accepted: [{ code, reason }] });
    expect(body.analysis.faults).toMatchObject([{ code }]);
    await expectNoFile(site);
    // Whatever uses it says so.
    await client.post(`${path}/adoption`, { ...adoption, how: "level" });
    const level = (await client.get(`/tasks/${task.id}`)).body.levels[0];
    expect(level.keptReasons).toEqual([reason]);
  });

  test("what nobody answers is cancelled after a week, with its audio", async () => {
    const site = await buildSite();
    const { id, path } = await buildRecording({ site, state: "asked" });
    await lookAfter();
    expect(existsSync(path!)).toBe(true);
    await owner().query(
      "UPDATE recordings SET updated_at = now() - interval '8 days' WHERE id = $1",
      [id],
    );
    await lookAfter();
    expect(existsSync(path!)).toBe(false);
    const client = await userAt(site, "officer");
    expect((await client.get(`/recordings/${id}`)).body.state).toBe("cancelled");
  });
});

describe("cancelling", () => {
  test.each(["uploaded", "analysing", "asked"] as const)(
    "while it is %s leaves no file, and the line says so",
    async (state) => {
      const site = await buildSite();
      const client = await userAt(site, "officer");
      const { id } = await buildRecording({ site, state });
      const answer = await client.post(`/recordings/${id}/cancel`, {});
      expect(answer.body).toMatchObject({ state: "cancelled", fileId: null, analysis: null });
      await expectNoFile(site);
      await analyse(site, id);
      expect((await client.get(`/recordings/${id}`)).body.state).toBe("cancelled");
      expect((await client.post(`/recordings/${id}/cancel`, {})).body.code).toBe("wrong-state");
    },
  );

  test("in the middle of the work ends it without a trace", { timeout: 60_000 }, async () => {
    const { site, task, client } = await buildPlace();
    const content = soundFile([sine(60, 0.1), sine(60, 0.1)]);
    const sent = await sendRecording(client, { taskId: task.id, content });
    const work = analyse(site, sent.body.id);
    const state = async () => (await client.get(`/recordings/${sent.body.id}`)).body.state;
    await expect.poll(state).toBe("analysing");
    await client.post(`/recordings/${sent.body.id}/cancel`, {});
    await work;
    expect(await state()).toBe("cancelled");
    await expectNoFile(site);
  });
});

describe("a calibrator's tone", () => {
  test("is measured, kept as what was measured, and gives a recording its level", async () => {
    const { site, task, client } = await buildPlace();
    const fields = { taskId: task.id, toneDb: "94" };
    const tone = await sendTone(client, fields, soundFile([sine(4, 0.2)]));
    expect(tone.status).toBe(201);
    // 94 dB are 1.0024 Pa; at an amplitude of 0.2 full scale is at 1.0024·√2/0.2.
    const expected = (20e-6 * 10 ** (94 / 20) * Math.SQRT2) / 0.2;
    expect(tone.body.channels[0].pascalPerFullScale).toBeCloseTo(expected, 2);
    await expectNoFile(site);
    const sent = await sendRecording(client, {
      taskId: task.id,
      content: soundFile([sine(2, 0.02)]),
      calibration: { kind: "tone", toneId: tone.body.id },
    });
    await analyse(site, sent.body.id);
    const { body } = await client.get(`/recordings/${sent.body.id}`);
    expect(body.calibration.tone).toEqual(tone.body);
    // A tenth of the amplitude is 20 dB less.
    expect(body.analysis.channels[0].laeqDb).toBeCloseTo(74, 1);
  });

  test("one channel of tone leaves the other relative", async () => {
    const { site, task, client } = await buildPlace();
    const tone = await sendTone(
      client,
      { taskId: task.id, toneDb: "94" },
      soundFile([sine(4, 0.2)]),
    );
    const sent = await sendRecording(client, {
      taskId: task.id,
      content: soundFile([sine(2, 0.2), sine(2, 0.2)]),
      calibration: { kind: "tone", toneId: tone.body.id },
    });
    await analyse(site, sent.body.id);
    const { channels } = (await client.get(`/recordings/${sent.body.id}`)).body.analysis;
    expect(channels.map(({ isAbsolute }: { isAbsolute: boolean }) => isAbsolute)).toEqual([
      true,
      false,
    ]);
  });

  test.each([
    ["at another frequency", sine(4, 0.2, 1500), "tone-frequency-off"],
    ["that is none", sine(4, 0), "tone-not-found"],
    ["overloaded", sine(4, 1.5), "recording-clipped"],
  ])("%s is refused by name", async (_, samples, code) => {
    const { site, task, client } = await buildPlace();
    const answer = await sendTone(client, { taskId: task.id, toneDb: "94" }, soundFile([samples]));
    expect([answer.status, answer.body.issues]).toMatchObject([422, [{ path: ["file"], code }]]);
    await expectNoFile(site);
  });
});

describe("a recording becomes the task's level", () => {
  const day = daysFromToday(-3);

  test("with its spectrum, LC − LA, LASmax and peak; its days are computed anew; the preview said so", async () => {
    const { site, task, client } = await buildPlace();
    const worker = await buildWorker({ site });
    await buildDay(worker, day);
    await buildShift(worker, { date: day, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const { id } = await buildRecording({ site, task });
    const preview = await client.post(`/recordings/${id}/adoption/preview`, adoption);
    expect(preview.body.days).toBe(1);
    expect((await client.get(`/tasks/${task.id}`)).body.levels).toHaveLength(1);
    const answer = await client.post(`/recordings/${id}/adoption`, adoption);
    expect(answer.body.usedFrom).toEqual([adoption.effectiveFrom]);
    const level = (await client.get(`/tasks/${task.id}`)).body.levels[0];
    expect(level).toMatchObject({
      levelDb: 87,
      lcMinusLaDb: 1.5,
      octaveBandsDb: [80, 80, 80, 80, 80, 80, 80, 80],
      lasMaxDb: 89,
      peak: { levelDb: 103, weighting: "C" },
      samplesDb: [87],
      strategy: "task",
      recordingId: id,
      recordingName: "saw.wav",
    });
    const [found] = await select<{ is_stale: boolean }>(
      "SELECT is_stale FROM days WHERE worker_id = $1 AND date = $2",
      [worker.id, day],
    );
    expect(found?.is_stale).toBe(true);
  });

  test("the spectrum alone moves to the level that the task has, and the rest stays", async () => {
    const { site, client } = await buildPlace();
    const task = await buildTask({ site, levelDb: 90, peakDb: 120, peakWeighting: "C" });
    const analysis = flatAnalysis();
    analysis.channels[0]!.isAbsolute = false;
    analysis.channels[0]!.laeqDb = -20;
    analysis.channels[0]!.lceqDb = -18.5;
    for (const band of analysis.channels[0]!.octaveBandsDb) band.levelDb = -27;
    const { id } = await buildRecording({ site, task, analysis });
    const refused = await client.post(`/recordings/${id}/adoption`, adoption);
    expect(refused.body.issues).toMatchObject([{ path: ["how"], code: "recording-relative" }]);
    const shape = { ...adoption, how: "shape" };
    expect((await client.post(`/recordings/${id}/adoption`, shape)).status).toBe(201);
    const level = (await client.get(`/tasks/${task.id}`)).body.levels[0];
    // The two LAeq lie 110 dB apart, and so do the bands.
    expect(level).toMatchObject({
      levelDb: 90,
      lcMinusLaDb: 1.5,
      octaveBandsDb: [83, 83, 83, 83, 83, 83, 83, 83],
      peak: { levelDb: 120, weighting: "C" },
      recordingId: id,
    });
  });

  test("not under a mean at another exchange rate, not without a level, not from a sensitivity that can't be", async () => {
    const { site, client } = await buildPlace();
    const settings = {
      criterionLevelDb: 90,
      exchangeRateDb: 5,
      thresholdDb: 80,
      weighting: "A",
      response: "slow",
    };
    const lavg = await buildTask({ site, metric: { kind: "lavg", settings } });
    const bare = await buildTask({ site, levelDb: null });
    const codeOf = async (task: typeof bare, body: object, analysis = flatAnalysis()) => {
      const { id } = await buildRecording({ site, task, analysis });
      return (await client.post(`/recordings/${id}/adoption`, body)).body.issues[0].code;
    };
    expect(await codeOf(lavg, { ...adoption, how: "shape" })).toBe("level-not-laeq");
    expect(await codeOf(bare, { ...adoption, how: "shape" })).toBe("task-has-no-level");
    const loud = flatAnalysis();
    loud.channels[0]!.laeqDb = 190;
    expect(await codeOf(bare, adoption, loud)).toBe("recording-implausible");
  });
});
