import { existsSync, readdirSync, statSync } from "node:fs";
import { dirname, join } from "node:path";
import { describe, expect, test } from "vitest";
import { lookAfter } from "../../server/jobs/look-after";
import { fileStore } from "../../server/lib/file-store";
import {
  buildDay,
  buildFitTest,
  buildJob,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  daysFromToday,
  insert,
  nobody,
  owner,
  type Site,
  select,
  signInAs,
} from "../factories";
import {
  ACTIVE_DB,
  analyseCheck,
  behind,
  buildActiveMuff,
  buildCheckable,
  cancelled,
  checkInput,
  gaussianNoise,
  pairFile,
  sendCheck,
  typedInput,
} from "../factories/microphone-check";
import { sendTone, sine, soundFile } from "../factories/recording";
import { describeEndpoint } from "./five-cases";

const userAt = async ({ organizationId }: Site, role: "officer" | "auditor" | "supervisor") =>
  signInAs(await buildUser({ organizationId, roles: [role] }));

async function buildPlace() {
  const site = await buildSite({ timeZone: "UTC" });
  return { site, client: await userAt(site, "officer"), ...(await buildCheckable(site)) };
}

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

const SECONDS = 8;
const outside = gaussianNoise(SECONDS, 11);
const inside = behind(outside, 25);
const stereo = pairFile([outside, inside]);

/** A check as it was typed: 25 dB in every band, analysed and not kept. */
async function typedAt(site: Site, insideDb = 75) {
  const client = await userAt(site, "officer");
  const { worker, model } = await buildCheckable(site);
  const path = `/workers/${worker.id}/microphone-checks/typed`;
  const { body } = await client.post(path, typedInput(model, insideDb));
  // What the set-up did is not what the test is about.
  await owner().query(
    "ALTER TABLE audit_events DISABLE TRIGGER USER; ALTER TABLE audit_values DISABLE TRIGGER USER",
  );
  await owner().query("DELETE FROM audit_values WHERE organization_id = $1", [site.organizationId]);
  await owner().query("DELETE FROM audit_events WHERE organization_id = $1", [site.organizationId]);
  await owner().query(
    "ALTER TABLE audit_events ENABLE TRIGGER USER; ALTER TABLE audit_values ENABLE TRIGGER USER",
  );
  return { id: body.id as string, worker, model };
}

async function rowOf(site: Site, state: string): Promise<string> {
  const { worker, model } = await buildCheckable(site);
  const { organizationId, id: siteId } = site;
  const json = (value: unknown) => JSON.stringify(value);
  const { parts, calibration, correction } = checkInput(model);
  const said = { ear: "left", parts: json(parts), calibration: json(calibration) };
  const whose = { organizationId, siteId, workerId: worker.id, modelId: model.id };
  return insert("microphone_checks", { ...whose, ...said, correction: json(correction), state });
}

describeEndpoint({
  route: "GET /workers/:id/microphone-checks",
  as: "auditor",
  not: "supervisor",
  call: async (site) => ({
    method: "get",
    path: `/workers/${(await buildCheckable(site)).worker.id}/microphone-checks`,
  }),
  bad: { path: "?limit=0" },
  badField: "limit",
  event: null,
});

describeEndpoint({
  route: "GET /microphone-checks/:id",
  as: "auditor",
  not: "supervisor",
  call: async (site) => ({
    method: "get",
    path: `/microphone-checks/${await rowOf(site, "analysing")}`,
  }),
  bad: null,
  event: null,
});

describeEndpoint({
  route: "POST /workers/:id/microphone-checks/typed",
  as: "officer",
  not: "auditor",
  call: async (site) => {
    const { worker, model } = await buildCheckable(site);
    return {
      method: "post",
      path: `/workers/${worker.id}/microphone-checks/typed`,
      body: { ...typedInput(model) },
    };
  },
  bad: { body: { correction: { kind: "own", bandsDb: Array(8).fill(1), source: "" } } },
  badField: "correction.source",
  event: "type-microphone-check",
});

describeEndpoint({
  route: "POST /microphone-checks/:id/cancel",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/microphone-checks/${await rowOf(site, "analysing")}/cancel`,
    body: {},
  }),
  bad: null,
  status: 200,
  event: "cancel-microphone-check",
});

describe("who may send recordings in", () => {
  test("an officer of the worker's site, and nobody else; nothing of theirs stays", async () => {
    const { site, worker, model } = await buildPlace();
    const send = (client: Parameters<typeof sendCheck>[0]) =>
      sendCheck(client, worker, checkInput(model), [stereo]);
    expect((await send(nobody)).status).toBe(401);
    expect((await send(await userAt(site, "auditor"))).status).toBe(403);
    expect((await send(await userAt(await buildSite(), "officer"))).status).toBe(404);
    await expect.poll(() => filesOf(site)).toEqual([]);
  });

  test("422 for what is no WAV, a pair without one off, one channel twice, a file that did not come", async () => {
    const { site, worker, model, client } = await buildPlace();
    const issuesOf = async (more: object, files = [stereo]) =>
      (await sendCheck(client, worker, { ...checkInput(model), ...more }, files)).body.issues;
    const [part] = checkInput(model).parts;
    expect(await issuesOf({}, [Buffer.from("no sound at all")])).toMatchObject([
      { path: ["files", 0], code: "recording-not-wav" },
    ]);
    expect(await issuesOf({ parts: [{ ...part, active: "on" }] })).toMatchObject([
      { path: ["parts"], code: "one-part-off" },
    ]);
    expect(await issuesOf({ parts: [{ ...part, inside: part!.outside }] })).toMatchObject([
      { path: ["parts"], code: "channel-named-twice" },
    ]);
    const second = { file: 1, channel: 1 };
    expect(await issuesOf({ parts: [{ ...part, inside: second }] })).toMatchObject([
      { path: ["parts"], code: "file-missing" },
    ]);
    const task = await buildTask({ site });
    expect(await issuesOf({ taskId: task.id })).toMatchObject([
      { path: ["taskId"], code: "task-has-no-spectrum" },
    ]);
    const side = { toneId: task.id, channel: 1 };
    expect(
      await issuesOf({ calibration: { kind: "tone", outside: side, inside: side } }),
    ).toMatchObject([{ path: ["calibration", "outside"], code: "tone-unknown" }]);
    await expect.poll(() => filesOf(site)).toEqual([]);
    expect(await select("SELECT 1 FROM microphone_checks WHERE site_id = $1", [site.id])).toEqual(
      [],
    );
  });
});

describe("recordings are analysed and their audio goes", { timeout: 120_000 }, () => {
  test("noise reduction and coherence by octave, the delay, the rating; no file is left", async () => {
    const { site, worker, model, client } = await buildPlace();
    const sent = await sendCheck(client, worker, checkInput(model), [stereo]);
    expect(sent.body.issues ?? []).toEqual([]);
    expect(sent.body).toMatchObject({ state: "analysing", files: ["ear-1.wav"], analysis: null });
    expect(filesOf(site)).toHaveLength(1);
    await analyseCheck(site, sent.body.id);
    const { body } = await client.get(`/microphone-checks/${sent.body.id}`);
    expect(body).toMatchObject({ state: "analysed", progressPct: 100, files: ["ear-1.wav"] });
    const { analysis } = body;
    for (const db of analysis.ear.noiseReductionDb) expect(db).toBeCloseTo(25, 0);
    for (const { coherence } of analysis.parts[0].bands) expect(coherence).toBeGreaterThan(0.99);
    expect(Math.abs(analysis.parts[0].delaySamples - 7)).toBeLessThan(1);
    expect(analysis.parDb).toBeCloseTo(25, 0);
    expect(analysis).toMatchObject({ isAbsolute: false, active: null, warnings: [] });
    await expect.poll(() => filesOf(site)).toEqual([]);
    const list = await client.get(`/workers/${worker.id}/microphone-checks`);
    expect(list.body.rows).toEqual([body]);
    const actions = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE subject_id = $1 ORDER BY id",
      [body.id],
    );
    expect(actions.map(({ action }) => action)).toEqual([
      "start-microphone-check",
      "analyse-microphone-check",
    ]);
  });

  test("two recorders, one channel each; a second pair with the active part on; the model's report is kept to", async () => {
    const { site, worker, client } = await buildPlace();
    const model = await buildActiveMuff(site);
    const louder = gaussianNoise(SECONDS, 12, 0.1);
    const files = [outside, inside, louder, cancelled(behind(louder, 25))];
    const part = (active: "off" | "on", file: number) => ({
      active,
      outside: { file, channel: 1 },
      inside: { file: file + 1, channel: 1 },
    });
    const check = checkInput(model, { parts: [part("off", 0), part("on", 2)] });
    const sent = await sendCheck(
      client,
      worker,
      check,
      files.map((channel) => pairFile([channel])),
    );
    await analyseCheck(site, sent.body.id);
    const { analysis } = (await client.get(`/microphone-checks/${sent.body.id}`)).body;
    for (const [band, db] of analysis.ear.activeDb.entries())
      expect(Math.abs(db - ACTIVE_DB[band]!)).toBeLessThan(1.5);
    expect(analysis.active).toMatchObject({ hasPassed: true, toleranceDb: 3 });
  });

  test("a canceller that does half of what it should fails", async () => {
    const { site, worker, client } = await buildPlace();
    const model = await buildActiveMuff(site);
    const weak = cancelled(inside, 6, 0.5);
    const check = checkInput(model, {
      parts: [
        { active: "off", outside: { file: 0, channel: 1 }, inside: { file: 0, channel: 2 } },
        { active: "on", outside: { file: 1, channel: 1 }, inside: { file: 1, channel: 2 } },
      ],
    });
    const sent = await sendCheck(client, worker, check, [stereo, pairFile([outside, weak])]);
    await analyseCheck(site, sent.body.id);
    const { analysis } = (await client.get(`/microphone-checks/${sent.body.id}`)).body;
    expect(analysis.active.hasPassed).toBe(false);
  });

  test("calibrated by a tone through each microphone it gives levels, and their ratio counts", async () => {
    const { site, worker, model, client } = await buildPlace();
    // The inside microphone is half as sensitive: the same 94 dB come to half the amplitude.
    const tones = await Promise.all(
      [0.2, 0.1].map((amplitude) =>
        sendTone(client, { siteId: site.id, toneDb: "94" }, soundFile([sine(4, amplitude)])),
      ),
    );
    const [outsideTone, insideTone] = tones.map(({ body }) => ({ toneId: body.id, channel: 1 }));
    const sent = await sendCheck(
      client,
      worker,
      checkInput(model, {
        calibration: { kind: "tone", outside: outsideTone!, inside: insideTone! },
      }),
      [stereo],
    );
    await analyseCheck(site, sent.body.id);
    const { analysis, calibration } = (await client.get(`/microphone-checks/${sent.body.id}`)).body;
    expect(calibration.insidePa / calibration.outsidePa).toBeCloseTo(2, 2);
    expect(analysis.isAbsolute).toBe(true);
    expect(analysis.parDb).toBeCloseTo(25 - 6.02, 0);
  });

  test("without calibration it is relative: no rating, and no fit test comes of it", async () => {
    const { site, worker, model, client } = await buildPlace();
    const check = checkInput(model, { calibration: { kind: "none" } });
    const sent = await sendCheck(client, worker, check, [stereo]);
    await analyseCheck(site, sent.body.id);
    const { analysis } = (await client.get(`/microphone-checks/${sent.body.id}`)).body;
    expect(analysis).toMatchObject({ parDb: null, warnings: ["not-calibrated"] });
    const keep = { testedOn: daysFromToday(0), needDb: null };
    const answer = await client.post(`/microphone-checks/${sent.body.id}/keep`, keep);
    expect([answer.status, answer.body.code]).toEqual([409, "wrong-state"]);
  });

  test("channels the other way round are recognised, and turned without recording again", async () => {
    const { site, worker, model, client } = await buildPlace();
    const sent = await sendCheck(client, worker, checkInput(model), [pairFile([inside, outside])]);
    await analyseCheck(site, sent.body.id);
    const path = `/microphone-checks/${sent.body.id}`;
    const found = (await client.get(path)).body.analysis;
    expect(found).toMatchObject({ parDb: null, warnings: ["channels-swapped"] });
    const turned = await client.post(`${path}/swap`, {});
    expect(turned.body.analysis.warnings).toEqual([]);
    expect(turned.body.analysis.parDb).toBeCloseTo(25, 0);
    expect(Math.abs(turned.body.analysis.parts[0].delaySamples - 7)).toBeLessThan(1);
    expect((await client.post(`${path}/swap`, {})).body.code).toBe("wrong-state");
  });

  test.each([
    ["a dead channel", [pairFile([outside, new Float32Array(outside.length)])], "channel-dead"],
    [
      "too short",
      [pairFile([outside.subarray(0, 96_000), inside.subarray(0, 96_000)])],
      "too-short",
    ],
    ["one channel only", [pairFile([outside])], "one-channel-only"],
    [
      "clipped",
      [pairFile([outside.map((value) => Math.max(-1, Math.min(1, 40 * value))), inside])],
      "channel-clipped",
    ],
    [
      "clipped before the converter, below full scale",
      [pairFile([outside.map((value) => Math.max(-0.02, Math.min(0.02, value))), inside])],
      "channel-clipped",
    ],
    ["compressed", [pairFile([outside, inside], { formatTag: 0x55 })], "recording-compressed"],
  ])("%s is refused by name, and the audio goes", async (_, files, code) => {
    const { site, worker, model, client } = await buildPlace();
    const sent = await sendCheck(client, worker, checkInput(model), files);
    await analyseCheck(site, sent.body.id);
    const { body } = await client.get(`/microphone-checks/${sent.body.id}`);
    expect(body).toMatchObject({ state: "failed", failure: { code }, analysis: null });
    await expect.poll(() => filesOf(site)).toEqual([]);
  });

  test("unequal rates are refused with both", async () => {
    const { site, worker, model, client } = await buildPlace();
    const check = checkInput(model, {
      parts: [{ active: "off", outside: { file: 0, channel: 1 }, inside: { file: 1, channel: 1 } }],
    });
    const files = [pairFile([outside]), pairFile([inside], { rateHz: 44_100 })];
    const sent = await sendCheck(client, worker, check, files);
    await analyseCheck(site, sent.body.id);
    const { failure } = (await client.get(`/microphone-checks/${sent.body.id}`)).body;
    expect(failure).toMatchObject({
      code: "rates-differ",
      params: { outsideHz: 48_000, insideHz: 44_100 },
    });
  });

  test("nothing in common, and a model without an active part, are said", async () => {
    const { site, worker, model, client } = await buildPlace();
    const check = checkInput(model, {
      parts: [
        { active: "off", outside: { file: 0, channel: 1 }, inside: { file: 0, channel: 2 } },
        { active: "on", outside: { file: 1, channel: 1 }, inside: { file: 1, channel: 2 } },
      ],
    });
    const others = pairFile([outside, gaussianNoise(SECONDS, 19, 0.005)]);
    const sent = await sendCheck(client, worker, check, [others, stereo]);
    await analyseCheck(site, sent.body.id);
    const { analysis } = (await client.get(`/microphone-checks/${sent.body.id}`)).body;
    expect(analysis.warnings).toEqual(["no-common-noise", "no-active-part"]);
    expect(analysis.parDb).toBeNull();
  });

  test("a job that runs twice ends the same; one that ended three processes is given up", async () => {
    const { site, worker, model, client } = await buildPlace();
    const sent = await sendCheck(client, worker, checkInput(model), [stereo]);
    const path = `/microphone-checks/${sent.body.id}`;
    await owner().query("UPDATE microphone_checks SET tries = 1, progress_pct = 40 WHERE id = $1", [
      sent.body.id,
    ]);
    await analyseCheck(site, sent.body.id);
    const once = await client.get(path);
    await analyseCheck(site, sent.body.id);
    expect((await client.get(path)).body).toEqual(once.body);
    expect(once.body.state).toBe("analysed");
    const other = await sendCheck(client, worker, checkInput(model), [stereo]);
    await owner().query("UPDATE microphone_checks SET tries = 3 WHERE id = $1", [other.body.id]);
    await analyseCheck(site, other.body.id);
    expect((await client.get(`/microphone-checks/${other.body.id}`)).body).toMatchObject({
      state: "failed",
      failure: { code: "check-given-up" },
    });
    await expect.poll(() => filesOf(site)).toEqual([]);
  });

  test("what a lost process left is taken up again", async () => {
    const { worker, model, client } = await buildPlace();
    const sent = await sendCheck(client, worker, checkInput(model), [stereo]);
    const job = () =>
      select("SELECT 1 FROM graphile_worker.jobs WHERE key = $1", [
        `check-microphones:${sent.body.id}`,
      ]);
    expect(await job()).toHaveLength(1);
    await owner().query("SELECT graphile_worker.remove_job($1)", [
      `check-microphones:${sent.body.id}`,
    ]);
    await owner().query(
      "UPDATE microphone_checks SET updated_at = now() - interval '2 minutes' WHERE id = $1",
      [sent.body.id],
    );
    await lookAfter();
    expect(await job()).toHaveLength(1);
  });

  test("cancelling leaves no file, and ends what is at work on it", async () => {
    const { site, worker, model, client } = await buildPlace();
    const long = gaussianNoise(60, 21);
    const file = pairFile([long, behind(long, 20)]);
    const sent = await sendCheck(client, worker, checkInput(model), [file]);
    const path = `/microphone-checks/${sent.body.id}`;
    const work = analyseCheck(site, sent.body.id);
    await expect
      .poll(
        async () =>
          (
            await select<{ tries: number }>("SELECT tries FROM microphone_checks WHERE id = $1", [
              sent.body.id,
            ])
          )[0]?.tries,
      )
      .toBe(1);
    expect((await client.post(`${path}/cancel`, {})).body.state).toBe("cancelled");
    await work;
    expect((await client.get(path)).body).toMatchObject({ state: "cancelled", analysis: null });
    await expect.poll(() => filesOf(site)).toEqual([]);
    expect((await client.post(`${path}/cancel`, {})).body.code).toBe("wrong-state");
  });
});

describe("typed off a meter", () => {
  test("judged at once against the task's own noise; a band that is not known is left out", async () => {
    const { site, worker, model, client } = await buildPlace();
    const octaveBandsDb = [90, 95, 98, 94, 88, 82, 76, 70];
    const task = await buildTask({ site, octaveBandsDb });
    const bands = {
      outsideOffDb: [null, 100, 100, 100, 100, 100, 100, 100],
      insideOffDb: [null, 90, 85, 80, 70, 65, 65, 65],
    };
    const answer = await client.post(`/workers/${worker.id}/microphone-checks/typed`, {
      ...typedInput(model),
      taskId: task.id,
      bands,
    });
    expect(answer.body).toMatchObject({ state: "analysed", files: [], parts: [] });
    // ISO 4869-2, A-weightings as printed there, from 125 Hz on.
    const A = [-16.1, -8.6, -3.2, 0, 1.2, 1, -1.1];
    const losses = [10, 15, 20, 30, 35, 35, 35];
    const sum = (levels: number[]) =>
      10 * Math.log10(levels.reduce((total, db) => total + 10 ** (db / 10), 0));
    const weighted = octaveBandsDb.slice(1).map((db, band) => db + A[band]!);
    const expected = sum(weighted) - sum(weighted.map((db, band) => db - losses[band]!));
    expect(answer.body.analysis.parDb).toBeCloseTo(expected, 6);
    expect(answer.body.analysis.warnings).toEqual(["bands-left-out"]);
    expect(answer.body.spectrum).toMatchObject({ taskId: task.id, taskName: task.name });
    const first = answer.body.analysis.parts[0].bands[0];
    expect(first).toMatchObject({ reason: "not-typed", coherence: null });
  });

  test("the open ear's correction is the program's own, whatever is sent", async () => {
    const { worker, model, client } = await buildPlace();
    const answer = await client.post(`/workers/${worker.id}/microphone-checks/typed`, {
      ...typedInput(model),
      correction: { kind: "open-ear", bandsDb: Array(8).fill(30), source: "" },
    });
    expect(answer.body.correction.bandsDb[5]).toBe(12.4);
    expect(answer.body.analysis.ear.attenuationDb[5]).toBeCloseTo(37.4, 9);
  });

  test("more than the skull lets through is said, and refused as a fit", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { id } = await typedAt(site, 45);
    const client = await userAt(site, "officer");
    const { body } = await client.get(`/microphone-checks/${id}`);
    expect(body.analysis.warnings).toEqual(["above-bone-conduction"]);
    const keep = { testedOn: daysFromToday(0), needDb: null };
    const answer = await client.post(`/microphone-checks/${id}/keep`, keep);
    expect(answer.body.issues).toMatchObject([
      { path: ["facts", "leftDb"], code: "above-bone-conduction" },
    ]);
    expect((await client.get(`/microphone-checks/${id}`)).body.state).toBe("analysed");
  });
});

describeEndpoint({
  route: "POST /microphone-checks/:id/keep",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/microphone-checks/${(await typedAt(site)).id}/keep`,
    body: { testedOn: daysFromToday(-1), needDb: 20 },
  }),
  bad: { body: { testedOn: daysFromToday(3) } },
  badField: "testedOn",
  event: "keep-microphone-check",
});

describeEndpoint({
  route: "POST /microphone-checks/:id/swap",
  as: "officer",
  not: "auditor",
  call: async (site) => ({
    method: "post",
    path: `/microphone-checks/${(await typedAt(site, 120)).id}/swap`,
    body: {},
  }),
  bad: null,
  status: 200,
  event: "swap-microphone-check",
});

describe("a check is kept as a fit test", () => {
  const testedOn = daysFromToday(-2);

  test("of one ear, at the site's confidence; the worker's days from then on are stale", async () => {
    const { site, worker, model, client } = await buildPlace();
    const task = await buildTask({ site });
    const days = [daysFromToday(-3), daysFromToday(-1)];
    for (const day of days) {
      await buildDay(worker, day, { origin: "imported" });
      await buildShift(worker, { date: day, tasks: [{ taskId: task.id, durationMin: 480 }] });
    }
    const path = `/workers/${worker.id}/microphone-checks/typed`;
    const check = (await client.post(path, typedInput(model))).body;
    const answer = await client.post(`/microphone-checks/${check.id}/keep`, {
      testedOn,
      needDb: 15,
    });
    expect(answer.body).toMatchObject({ state: "kept" });
    const fit = await client.get(`/fit-tests?workerId=${worker.id}`);
    const [found] = fit.body.rows;
    expect(found).toMatchObject({
      id: answer.body.fitTestId,
      method: "two-microphones",
      testedOn,
      confidencePct: 84,
      rightDb: null,
      needDb: 15,
      activePassed: null,
    });
    // Typed, without a correction: √(1² + 3²) dB of uncertainty. z of 84 % is 0.9945, from tables.
    expect(found.parDb).toBeCloseTo(25 - 0.9945 * Math.sqrt(10), 2);
    expect(found.facts.bands.left.noiseReductionDb).toEqual(Array(8).fill(25));
    // The right ear may be the weaker one.
    expect(found.hasPassed).toBeNull();
    const stale = await select<{ date: string; is_stale: boolean }>(
      "SELECT date::text, is_stale FROM days WHERE worker_id = $1 ORDER BY date",
      [worker.id],
    );
    expect(stale.map(({ is_stale }) => is_stale)).toEqual([false, true]);
    const again = await client.post(`/microphone-checks/${check.id}/keep`, {
      testedOn,
      needDb: 15,
    });
    expect(again.body.code).toBe("wrong-state");
  });

  test("where no need is stated, it is held against what the desk would ask", async () => {
    const { site, worker, model, client } = await buildPlace();
    const task = await buildTask({ site, levelDb: 97 });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    await select("UPDATE workers SET job_id = $2 WHERE id = $1", [worker.id, job.id]);
    const desk = (await client.get(`/workers/${worker.id}/fitting`)).body;
    const path = `/workers/${worker.id}/microphone-checks/typed`;
    const keep = { testedOn: daysFromToday(0), needDb: null };
    const left = (await client.post(path, typedInput(model, 90))).body;
    const first = await client.post(`/microphone-checks/${left.id}/keep`, keep);
    const fitOf = async () => (await client.get(`/fit-tests?workerId=${worker.id}`)).body.rows[0];
    // 97 − 85 = 12; outside less 90 inside leaves too little at this ear, whatever the other one has.
    expect(desk.need.needDb).toBeCloseTo(12, 9);
    expect(await fitOf()).toMatchObject({ needDb: desk.need.needDb, hasPassed: false });
    const right = (await client.post(path, { ...typedInput(model, 70), ear: "right" })).body;
    await client.post(`/microphone-checks/${right.id}/keep`, {
      ...keep,
      joinFitTestId: first.body.fitTestId,
    });
    expect(await fitOf()).toMatchObject({ needDb: desk.need.needDb, hasPassed: false });
  });

  test("the other ear joins as a new revision, and the weaker one governs", async () => {
    const { worker, model, client } = await buildPlace();
    const path = `/workers/${worker.id}/microphone-checks/typed`;
    const left = (await client.post(path, typedInput(model, 75))).body;
    const right = (await client.post(path, { ...typedInput(model, 80), ear: "right" })).body;
    const kept = await client.post(`/microphone-checks/${left.id}/keep`, { testedOn, needDb: 20 });
    const joinFitTestId = kept.body.fitTestId;
    const join = { testedOn, needDb: null, joinFitTestId };
    const wrong = await client.post(`/microphone-checks/${right.id}/keep`, {
      ...join,
      testedOn: daysFromToday(-1),
    });
    expect(wrong.body.issues).toMatchObject([
      { path: ["joinFitTestId"], code: "not-the-other-ear" },
    ]);
    const joined = await client.post(`/microphone-checks/${right.id}/keep`, join);
    expect(joined.body.fitTestId).toBe(joinFitTestId);
    const [fit] = (await client.get(`/fit-tests?workerId=${worker.id}`)).body.rows;
    expect(fit).toMatchObject({ revision: 2, needDb: 20, hasPassed: false });
    expect(fit.leftDb - fit.rightDb).toBeCloseTo(5, 6);
    expect(fit.parDb).toBe(fit.rightDb);
    // A second check of the same ear is no other ear.
    const more = (await client.post(path, { ...typedInput(model, 70), ear: "right" })).body;
    const refused = await client.post(`/microphone-checks/${more.id}/keep`, join);
    expect(refused.body.issues).toMatchObject([{ code: "not-the-other-ear" }]);
  });

  test("a check of the active part without calibration is kept as what it is: relative, and no rating", async () => {
    const { site, worker, client } = await buildPlace();
    const model = await buildActiveMuff(site);
    await buildFitTest({ worker, model, parDb: 21, testedOn: daysFromToday(-30) });
    const part = (active: "off" | "on", file: number) => ({
      active,
      outside: { file, channel: 1 },
      inside: { file, channel: 2 },
    });
    // A microphone inside that is 30 dB more sensitive: louder than the one outside in every band.
    const hot = (sound: Float32Array) => sound.map((value) => 31.6 * value);
    const check = checkInput(model, {
      parts: [part("off", 0), part("on", 1)],
      calibration: { kind: "none" },
    });
    const checkedEar = async (ear: "left" | "right", strength?: number) => {
      const sent = await sendCheck(client, worker, { ...check, ear }, [
        pairFile([outside, hot(inside)]),
        pairFile([outside, hot(cancelled(inside, 6, strength))]),
      ]);
      await analyseCheck(site, sent.body.id);
      return (await client.get(`/microphone-checks/${sent.body.id}`)).body;
    };
    const left = await checkedEar("left");
    expect(left.analysis).toMatchObject({
      parDb: null,
      active: { hasPassed: true },
      ear: { isRelative: true },
    });
    const keep = (id: string, more: object = {}) =>
      client.post(`/microphone-checks/${id}/keep`, { testedOn, needDb: 20, ...more });
    const kept = await keep(left.id);
    expect(kept.body).toMatchObject({ state: "kept" });
    const fits = async () => (await client.get(`/fit-tests?workerId=${worker.id}`)).body.rows;
    const [found, rated] = await fits();
    expect(found).toMatchObject({
      id: kept.body.fitTestId,
      parDb: null,
      hasPassed: null,
      needDb: null,
      activePassed: true,
      facts: { leftDb: [], rightDb: [], bands: { left: { isRelative: true }, right: null } },
    });
    // The rating that counts, and when it is due, stay those of the earlier test.
    expect(rated).toMatchObject({ parDb: 21 });
    // It joins no test that has a rating, and takes the other ear's check of its own kind.
    const path = `/workers/${worker.id}/microphone-checks/typed`;
    const typed = (await client.post(path, { ...typedInput(model), ear: "right" })).body;
    const joinFitTestId = kept.body.fitTestId;
    expect((await keep(typed.id, { joinFitTestId })).body.issues).toMatchObject([
      { path: ["joinFitTestId"], code: "not-the-other-ear" },
    ]);
    const right = await checkedEar("right", 0.5);
    expect((await keep(right.id, { joinFitTestId })).status).toBe(201);
    expect((await fits())[0]).toMatchObject({ revision: 2, parDb: null, activePassed: false });
    const struck = await client.send({
      method: "post",
      path: `/fit-tests/${joinFitTestId}/void`,
      body: { reason: "wrong worker" },
      revision: 2,
    });
    expect([struck.status, struck.body.isVoid]).toEqual([201, true]);
  });

  test("a passed active check goes with it; of two ears both have to pass", async () => {
    const { site, worker, client } = await buildPlace();
    const model = await buildActiveMuff(site);
    const path = `/workers/${worker.id}/microphone-checks/typed`;
    const { bands } = typedInput(model);
    const withActive = (ear: string, lessDb: number) => ({
      ...typedInput(model),
      ear,
      bands: {
        ...bands,
        outsideOnDb: bands.outsideOffDb,
        insideOnDb: bands.insideOffDb.map((db, band) => db! - ACTIVE_DB[band]! + lessDb),
      },
    });
    const left = (await client.post(path, withActive("left", 1))).body;
    expect(left.analysis.active.hasPassed).toBe(true);
    const kept = await client.post(`/microphone-checks/${left.id}/keep`, {
      testedOn,
      needDb: null,
    });
    const passedOf = async () =>
      (await client.get(`/fit-tests?workerId=${worker.id}`)).body.rows[0].activePassed;
    expect(await passedOf()).toBe(true);
    const right = (await client.post(path, withActive("right", 5))).body;
    expect(right.analysis.active.hasPassed).toBe(false);
    await client.post(`/microphone-checks/${right.id}/keep`, {
      testedOn,
      needDb: null,
      joinFitTestId: kept.body.fitTestId,
    });
    expect(await passedOf()).toBe(false);
  });
});
