import { existsSync } from "node:fs";
import { describe, expect, test } from "vitest";
import { lookAfter } from "../../server/jobs/look-after";
import { fileStore } from "../../server/lib/file-store";
import {
  buildDay,
  buildInstrument,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  nobody,
  type Site,
  select,
  signInAs,
} from "../factories";
import {
  historyMapping,
  historyText,
  importHistory,
  sendHistory,
  workOn,
} from "../factories/history";
import { describeEndpoint } from "./five-cases";

const day = daysFromToday(-3);
const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

async function buildPlace() {
  const site = await buildSite({ timeZone: "UTC" });
  const [instrument, worker] = [await buildInstrument({ site }), await buildWorker({ site })];
  const client = await officerAt(site);
  const send = (
    content: string | Buffer = historyText(),
    more: { name?: string; runId?: string } = {},
  ) => sendHistory(client, { instrumentId: instrument.id, workerId: worker.id, content, ...more });
  return { site, instrument, worker, client, send };
}

const read = async (
  client: Client,
  site: Site,
  id: string,
  body: object = { mapping: historyMapping() },
) => {
  const ordered = await client.post(`/history-imports/${id}/read`, body);
  if (ordered.status === 202) await workOn(site, id);
  return client.get(`/history-imports/${id}`);
};
const codes = (answer: { body: { report: { issues: { severity: string; code: string }[] } } }) =>
  answer.body.report.issues.map(({ severity, code }) => `${severity} ${code}`);

const importOf = async (site: Site) => {
  const client = await officerAt(site);
  const instrument = await buildInstrument({ site });
  const worker = await buildWorker({ site });
  const sent = await sendHistory(client, {
    instrumentId: instrument.id,
    workerId: worker.id,
    content: historyText({ levelDb: () => 80 + Math.round(Math.random() * 1000) / 100 }),
  });
  return { client, id: sent.body.id as string };
};

describe("who may send a file in", () => {
  test("an officer of the instrument's site, and nobody else", async () => {
    const { site, instrument, worker, send } = await buildPlace();
    const sent = { instrumentId: instrument.id, workerId: worker.id, content: historyText() };
    expect((await sendHistory(nobody, sent)).status).toBe(401);
    const auditor = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["auditor"] }),
    );
    expect((await sendHistory(auditor, sent)).status).toBe(403);
    expect((await sendHistory(await officerAt(await buildSite()), sent)).status).toBe(404);
    expect(
      await select("SELECT 1 FROM files WHERE organization_id = $1", [site.organizationId]),
    ).toEqual([]);
    const answer = await send();
    expect(answer.status).toBe(201);
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1",
      [site.organizationId],
    );
    expect(events).toEqual([{ action: "start-history-import" }]);
  });

  test("422 without a run or a worker, for a picture, for a broken workbook; nothing is kept", async () => {
    const { site, client, instrument, send } = await buildPlace();
    const alone = await sendHistory(client, {
      instrumentId: instrument.id,
      content: historyText(),
    });
    expect(alone.body.issues).toMatchObject([{ path: ["workerId"], code: "run-or-worker-needed" }]);
    const picture = await send(Buffer.from("\x89PNG\r\n\x1a\n____", "latin1"));
    expect(picture.body.issues).toMatchObject([{ path: ["file"], code: "file-kind" }]);
    const book = await send(Buffer.concat([Buffer.from("PK\x03\x04"), Buffer.alloc(200)]), {
      name: "x.xlsx",
    });
    expect(book.body.issues).toMatchObject([{ path: ["file"], code: "workbook-broken" }]);
    expect(
      await select("SELECT 1 FROM files WHERE organization_id = $1", [site.organizationId]),
    ).toEqual([]);
  });
});

describeEndpoint({
  route: "GET /history-imports",
  as: "auditor",
  not: "supervisor",
  call: async () => ({ method: "get", path: "/history-imports" }),
  bad: { path: "?limit=0" },
  badField: "limit",
  event: null,
  namesNothing: true,
});

describe.each([
  ["get", "", undefined, 200],
  ["post", "/read", { mapping: historyMapping() }, 202],
  ["post", "/cancel", {}, 200],
] as const)("%s /history-imports/:id%s", (method, path, body, status) => {
  const callOf = (id: string) => ({ method, path: `/history-imports/${id}${path}`, body });

  test("401, another organization 404, a role that may not 403", async () => {
    const site = await buildSite();
    const { id } = await importOf(site);
    expect((await nobody.send(callOf(id))).status).toBe(401);
    expect((await (await officerAt(await buildSite())).send(callOf(id))).status).toBe(404);
    const role = method === "get" ? "supervisor" : "auditor";
    const other = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: [role] }),
    );
    expect((await other.send(callOf(id))).status).toBe(403);
  });

  test("does it", async () => {
    const { client, id } = await importOf(await buildSite());
    expect((await client.send(callOf(id))).status).toBe(status);
  });
});

describe("from the file to the day", () => {
  test("the head is read, a mapping proposed, and remembered for the next file of the instrument", async () => {
    const { site, client, instrument, worker, send } = await buildPlace();
    const first = await send();
    expect(first.body).toMatchObject({
      state: "uploaded",
      head: { format: "text", proposedFrom: "file" },
    });
    expect(first.body.head.proposed).toEqual(historyMapping());
    await importHistory(client, {
      site,
      instrument,
      worker,
      content: historyText({ time: "09:00:00" }),
    });
    const second = await send(historyText({ time: "12:00:00" }));
    expect(second.body.head).toMatchObject({
      proposedFrom: "instrument",
      proposed: historyMapping(),
    });
  });

  test("is stored with chunks, a first revision and a run whose readings are exact, and moves the day's verdict", async () => {
    const { site, client, worker } = await buildPlace();
    const task = await buildTask({ site, levelDb: 70, metric: { kind: "steady" } });
    await buildDay(worker, day);
    await buildShift(worker, { date: day, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const { historyId } = await importHistory(client, {
      site,
      worker,
      content: historyText({ count: 28_800 }),
    });
    const readings = await select<Record<string, unknown>>(
      `SELECT g.exchange_rate_db AS q, g.threshold_db AS threshold, g.dose_pct AS dose, g.average_db AS average, g.las_max_db AS las_max, g.peak_db AS peak, g.source
       FROM time_histories h JOIN runs r ON r.id = h.run_id JOIN readings g ON g.run_revision_id = r.current_revision_id WHERE h.id = $1 ORDER BY g.position`,
      [historyId],
    );
    expect(readings.length).toBeGreaterThan(0);
    expect(readings[0]).toMatchObject({ las_max: 90, peak: 110, source: "history" });
    const energy = readings.find(({ q, threshold }) => q === 3 && threshold === null);
    expect(energy?.average).toBeCloseTo(90, 9);
    const chunks = await select<{ count: number; bytes: number }>(
      `SELECT count(*)::int AS count, sum(length(packed))::int AS bytes FROM time_history_chunks WHERE history_id = $1`,
      [historyId],
    );
    expect(chunks[0]?.count).toBe(3 * 8);
    const [result] = await select<{ outside_db: number }>(
      `SELECT x.outside_db FROM days d JOIN day_results x ON x.id = d.current_result_id WHERE d.worker_id = $1 AND d.date = $2`,
      [worker.id, day],
    );
    // Eight hours at a steady 90 dB are LEX,8h 90.
    expect(result?.outside_db).toBeCloseTo(90, 6);
  });

  test("a file beside the shift is asked about, and covers it only with a reason", async () => {
    const { site, client, worker, send } = await buildPlace();
    const task = await buildTask({ site, levelDb: 70, metric: { kind: "steady" } });
    await buildDay(worker, day);
    await buildShift(worker, {
      date: day,
      localStart: "14:00",
      tasks: [{ taskId: task.id, durationMin: 480 }],
    });
    const { body } = await send(historyText({ time: "07:00:00", count: 3600 }));
    const asked = await read(client, site, body.id);
    expect(codes(asked)).toEqual(["asked outside-shift"]);
    expect(asked.body.report.issues[0].params).toEqual({ from: "14:00", to: "22:00" });
    const answered = { mapping: historyMapping(), answers: ["outside-shift"] };
    const ready = await read(client, site, body.id, answered);
    expect(ready.body).toMatchObject({
      state: "ready",
      shift: { from: "14:00", to: "22:00", shiftMin: 480, insideMin: 0 },
    });
    const refused = await client.post(`/history-imports/${body.id}/store`, { covers: "shift" });
    expect(refused.body.issues).toMatchObject([{ path: ["keptReason"], code: "outside-shift" }]);
    await client.post(`/history-imports/${body.id}/store`, { covers: "part" });
    await workOn(site, body.id);
    const [run] = await select<{ covers: string; doubts: string[] }>(
      "SELECT v.covers, v.doubts FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id WHERE r.site_id = $1",
      [site.id],
    );
    expect(run).toEqual({ covers: "part", doubts: [] });
    const [result] = await select<{ outside_db: number }>(
      `SELECT x.outside_db FROM days d JOIN day_results x ON x.id = d.current_result_id WHERE d.worker_id = $1 AND d.date = $2`,
      [worker.id, day],
    );
    // The hour at 90 dB is another's: eight hours at a steady 70 dB.
    expect(result?.outside_db ?? 70).toBeCloseTo(70, 6);
  });

  test("an hour of a shift covers it only with a reason", async () => {
    const { site, client, worker, send } = await buildPlace();
    await buildShift(worker, { date: day, tasks: [] });
    const { body } = await send(historyText({ count: 3600 }));
    await read(client, site, body.id);
    const refused = await client.post(`/history-imports/${body.id}/store`, { covers: "shift" });
    expect(refused.body.issues).toMatchObject([
      { code: "shorter-than-shift", params: { coveredMin: 60, shiftMin: 480 } },
    ]);
    const stored = await client.post(`/history-imports/${body.id}/store`, { covers: "projected" });
    expect(stored.status).toBe(202);
  });

  test("the same file is refused with a link: while it waits, and once it is stored", async () => {
    const { site, client, send } = await buildPlace();
    const first = await send();
    const again = await send();
    expect([again.status, again.body.code, again.body.importId]).toEqual([
      409,
      "same-file",
      first.body.id,
    ]);
    await read(client, site, first.body.id);
    await client.post(`/history-imports/${first.body.id}/store`, { covers: "shift" });
    await workOn(site, first.body.id);
    const stored = await client.get(`/history-imports/${first.body.id}`);
    expect(stored.body.state).toBe("stored");
    const third = await send();
    expect(third.body).toMatchObject({ code: "same-file", historyId: stored.body.historyId });
    // In another organization it is nobody's yet.
    expect((await (await buildPlace()).send()).status).toBe(201);
  });

  test("overlapping times on one instrument are refused, and the other history named", async () => {
    const { site, client, instrument, worker, send } = await buildPlace();
    const { historyId } = await importHistory(client, { site, instrument, worker });
    const second = await send(historyText({ time: "06:05:00", levelDb: () => 88 }));
    const answer = await read(client, site, second.body.id);
    expect(answer.body.state).toBe("refused");
    expect(answer.body.report.issues[0]).toMatchObject({
      code: "overlaps-history",
      severity: "refused",
      params: { historyId, fileName: "levels.csv" },
    });
    expect(
      (await client.post(`/history-imports/${second.body.id}/store`, { covers: "shift" })).body
        .code,
    ).toBe("wrong-state");
  });

  test("what is asked holds the file back until it is answered", async () => {
    const { site, client, send } = await buildPlace();
    const lines = historyText({ count: 1200 }).split("\n");
    lines.splice(400, 300);
    const { body } = await send(lines.join("\n"));
    const asked = await read(client, site, body.id);
    expect([asked.body.state, codes(asked)]).toEqual(["refused", ["asked clock-jump"]]);
    expect(asked.body.report.issues[0]).toMatchObject({ line: 401, params: { seconds: 300 } });
    const answered = await read(client, site, body.id, {
      mapping: historyMapping(),
      answers: ["clock-jump"],
    });
    expect(answered.body.state).toBe("ready");
    expect(answered.body.report).toMatchObject({
      valuesCount: 1200,
      channels: [{ missing: 300 }, {}, {}],
    });
  });

  test("a value over the range needs the reason why the run is kept", async () => {
    const { site, client, send } = await buildPlace();
    const { body } = await send(historyText({ levelDb: (index) => (index === 10 ? ">140" : 90) }));
    const answers = { mapping: historyMapping(), answers: ["over-range"] };
    expect((await read(client, site, body.id, answers)).body.state).toBe("ready");
    const refused = await client.post(`/history-imports/${body.id}/store`, { covers: "shift" });
    expect([refused.status, refused.body.issues[0]]).toMatchObject([
      422,
      { path: ["keptReason"], code: "clipped" },
    ]);
    await client.post(`/history-imports/${body.id}/store`, {
      covers: "shift",
      keptReason: "one hammer blow beside it",
    });
    await workOn(site, body.id);
    const [kept] = await select<{ doubts: string[]; kept_reason: string }>(
      "SELECT v.doubts, v.kept_reason FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id WHERE r.site_id = $1",
      [site.id],
    );
    expect(kept).toEqual({ doubts: ["clipped"], kept_reason: "one hammer blow beside it" });
  });

  test("a history of a run becomes that run's next revision; the instrument's own figures under other settings stay", async () => {
    const { site, client, instrument, worker, send } = await buildPlace();
    const own = {
      criterionLevelDb: 90,
      exchangeRateDb: 4,
      thresholdDb: 80,
      weighting: "A",
      response: "slow",
    };
    const run = await client.post("/runs", {
      instrumentId: instrument.id,
      workerId: worker.id,
      date: day,
      durationMin: 10,
      covers: "shift",
      readings: [{ settings: own, dosePct: 3 }],
    });
    expect(run.status).toBe(201);
    const { body } = await send(historyText(), { runId: run.body.id });
    await read(client, site, body.id);
    await client.post(`/history-imports/${body.id}/store`, { covers: "shift" });
    await workOn(site, body.id);
    const after = await client.get(`/runs/${run.body.id}`);
    expect(after.body.revision).toBe(2);
    const sources = after.body.readings.map(({ source }: { source: string }) => source);
    expect(sources).toContain("instrument");
    expect(sources).toContain("history");
  });
});

describe("cancelling", () => {
  test.each(["uploaded", "reading", "ready", "storing"] as const)(
    "while it is %s leaves neither row nor file",
    async (state) => {
      const { site, client, send } = await buildPlace();
      const { body } = await send();
      const [file] = await select<{ sha256: string }>(
        "SELECT encode(sha256, 'hex') AS sha256 FROM files WHERE organization_id = $1",
        [site.organizationId],
      );
      const path = fileStore().pathOf(site.organizationId, file!.sha256);
      expect(existsSync(path)).toBe(true);
      if (state !== "uploaded")
        await client.post(`/history-imports/${body.id}/read`, { mapping: historyMapping() });
      if (state === "ready" || state === "storing") await workOn(site, body.id);
      if (state === "storing")
        await client.post(`/history-imports/${body.id}/store`, { covers: "shift" });
      expect((await client.get(`/history-imports/${body.id}`)).body.state).toBe(state);
      const cancelled = await client.post(`/history-imports/${body.id}/cancel`, {});
      expect(cancelled.body).toMatchObject({
        state: "cancelled",
        fileName: "levels.csv",
        head: null,
        report: null,
      });
      await workOn(site, body.id);
      expect(existsSync(path)).toBe(false);
      for (const table of [
        "files",
        "time_histories",
        "time_history_chunks",
        "runs",
        "history_mappings",
      ])
        expect(
          await select(`SELECT 1 FROM ${table} WHERE organization_id = $1`, [site.organizationId]),
        ).toEqual([]);
      expect((await client.post(`/history-imports/${body.id}/cancel`, {})).body.code).toBe(
        "wrong-state",
      );
      expect((await send()).status).toBe(201);
    },
  );

  test("in the middle of the work stops it", async () => {
    const { site, client, send } = await buildPlace();
    const { body } = await send(
      historyText({ count: 80_000, levelDb: (index) => 80 + (index % 997) / 100 }),
    );
    await client.post(`/history-imports/${body.id}/read`, { mapping: historyMapping() });
    const working = workOn(site, body.id);
    await client.post(`/history-imports/${body.id}/cancel`, {});
    await working;
    expect((await client.get(`/history-imports/${body.id}`)).body.state).toBe("cancelled");
  });
});

describe("when a process dies", () => {
  test("the order is queued again after a minute of silence, and ends whole", async () => {
    const { site, client, send } = await buildPlace();
    const { body } = await send();
    await read(client, site, body.id);
    await client.post(`/history-imports/${body.id}/store`, { covers: "shift" });
    await select(
      "UPDATE history_imports SET tries = 1, progress_pct = 40, updated_at = now() - interval '2 minutes' WHERE id = $1",
      [body.id],
    );
    await select("DELETE FROM graphile_worker._private_jobs WHERE key = $1", [
      `history-import:${body.id}`,
    ]);
    await lookAfter();
    expect(
      await select("SELECT 1 FROM graphile_worker._private_jobs WHERE key = $1", [
        `history-import:${body.id}`,
      ]),
    ).toHaveLength(1);
    await Promise.all([workOn(site, body.id), workOn(site, body.id)]);
    expect((await client.get(`/history-imports/${body.id}`)).body.state).toBe("stored");
    expect(await select("SELECT 1 FROM time_histories WHERE site_id = $1", [site.id])).toHaveLength(
      1,
    );
    expect(
      await select("SELECT 1 FROM run_revisions WHERE organization_id = $1", [site.organizationId]),
    ).toHaveLength(1);
  });

  test("one that ends the process each time is given up", async () => {
    const { site, client, send } = await buildPlace();
    const { body } = await send();
    await client.post(`/history-imports/${body.id}/read`, { mapping: historyMapping() });
    await select("UPDATE history_imports SET tries = 3 WHERE id = $1", [body.id]);
    await workOn(site, body.id);
    expect((await client.get(`/history-imports/${body.id}`)).body.state).toBe("failed");
    expect((await read(client, site, body.id)).body.state).toBe("ready");
  });

  test("a store order while it is read is refused", async () => {
    const { client, send } = await buildPlace();
    const { body } = await send();
    const ordered = await client.post(`/history-imports/${body.id}/read`, {
      mapping: historyMapping(),
    });
    expect(ordered.body.state).toBe("reading");
    const store = await client.post(`/history-imports/${body.id}/store`, { covers: "shift" });
    expect([store.status, store.body.code]).toEqual([409, "wrong-state"]);
  });
});
