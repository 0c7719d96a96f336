import { describe, expect, test } from "vitest";
import { inTransaction } from "../../server/lib/db";
import { levelsBetween } from "../../server/queries/history-levels";
import { MISSING } from "../../shared/acoustics/history";
import {
  buildDay,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  nobody,
  type Site,
  select,
  signInAs,
} from "../factories";
import { historyText, importHistory } from "../factories/history";

const day = daysFromToday(-3);
const officerAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["officer"] }));

/** Ten minutes at 80 dB with one minute of knocks at 110 dB from the fifth on. */
const knocked = (index: number) => (index >= 300 && index < 360 ? 110 : 80);

async function buildHistory(
  content = historyText({ levelDb: knocked }),
  lengthMin = 60,
  covers: "shift" | "projected" | "part" = "projected",
  { taskDb, ...more }: { taskDb?: number; answers?: string[] } = {},
) {
  const site = await buildSite({ timeZone: "UTC" });
  const client = await officerAt(site);
  const worker = await buildWorker({ site });
  await buildDay(worker, day);
  const task = await buildTask({ site, name: "Grinding", levelDb: taskDb });
  await buildShift(worker, {
    date: day,
    lengthMin,
    tasks: [{ taskId: task.id, durationMin: lengthMin }],
  });
  const { historyId } = await importHistory(client, { site, worker, content, covers, ...more });
  return { site, client, worker, task, historyId, path: `/histories/${historyId}` };
}

describe.each([
  ["get", ""],
  ["get", "/envelope"],
  ["get", "/analysis"],
  ["get", "/levels.csv"],
  ["put", "/stretches"],
] as const)("%s /histories/:id%s", (method, part) => {
  test("401, another organization 404, a role that may not 403, and an answer", async () => {
    const { path, client, site } = await buildHistory();
    const call = { method, path: `${path}${part}`, revision: 1, body: { stretches: [] } };
    expect((await nobody.send(call)).status).toBe(401);
    const other = await (await officerAt(await buildSite())).send(call);
    expect([other.status, other.body.code]).toEqual([404, "not-found"]);
    const role = method === "get" ? "supervisor" : "auditor";
    const barred = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: [role] }),
    );
    expect((await barred.send(call)).status).toBe(403);
    expect((await client.send(call)).status).toBe(200);
  });
});

describe("what a history says", () => {
  test("itself, with the tasks of the worker's shift to draw", async () => {
    const { client, path, task } = await buildHistory();
    const { body } = await client.get(path);
    expect(body).toMatchObject({
      startsAt: `${day}T06:00:00.000Z`,
      intervalMs: 1000,
      valuesCount: 600,
      channels: ["laeq", "las", "lcpeak"],
      stretches: [],
      tasks: [{ id: task.id, name: "Grinding", durationMin: 60 }],
      revision: 1,
      can: { change: true },
    });
  });

  test("its envelope holds the lowest and highest of each bucket, and its range can be cut out", async () => {
    const { client, path } = await buildHistory();
    const whole = await client.get(`${path}/envelope?buckets=10`);
    expect(whole.body).toMatchObject({ fromS: 0, bucketS: 60 });
    expect(whole.body.channels.laeq.high).toEqual([
      8000, 8000, 8000, 8000, 8000, 11_000, 8000, 8000, 8000, 8000,
    ]);
    const part = await client.get(`${path}/envelope?fromS=290&toS=310&buckets=20`);
    expect(part.body).toMatchObject({ fromS: 290, bucketS: 1 });
    expect(part.body.channels.las.low).toEqual([
      ...Array(10).fill(8000),
      ...Array(10).fill(11_000),
    ]);
    const bad = await client.get(`${path}/envelope?buckets=1`);
    expect([bad.status, bad.body.issues[0].path]).toEqual([422, ["buckets"]]);
  });

  test("its levels as a file, a hole where a value is missing", async () => {
    const { client, path } = await buildHistory(
      historyText({ count: 60, levelDb: (index) => (index === 2 ? "" : 80.05) }),
    );
    const { text, headers } = await client.get(`${path}/levels.csv`);
    const lines = text.trim().split("\r\n");
    expect(lines.slice(0, 4)).toEqual([
      "time,laeq_db,las_db,lcpeak_db",
      `${day}T06:00:00.000Z,80.05,80.05,100.05`,
      `${day}T06:00:01.000Z,80.05,80.05,100.05`,
      `${day}T06:00:02.000Z,,,`,
    ]);
    expect(lines).toHaveLength(61);
    expect(headers["content-disposition"]).toContain("attachment");
  });

  test("what it comes to, by hand sums", async () => {
    const { client, path } = await buildHistory();
    const { body } = await client.get(`${path}/analysis`);
    // 540 s at 80 dB and 60 s at 110 dB.
    expect(body.counted.laeqDb).toBeCloseTo(
      10 * Math.log10((540 * 10 ** 8 + 60 * 10 ** 11) / 600),
      9,
    );
    expect(body.counted.lasMaxDb).toBe(110);
    expect(body.counted.peak).toEqual({ levelDb: 130, weighting: "C" });
    expect(body.counted.percentilesDb["50"]).toBe(80);
    expect(body.runningDose[0].dosePct).toHaveLength(300);
  });
});

describe("stretches", () => {
  const leaveOut = { kind: "left-out", fromS: 300, toS: 360, reason: "the microphone was knocked" };

  test("leave out what is left out, and the run's readings and the day follow", async () => {
    const { client, path, worker, task, historyId } = await buildHistory();
    const level = async () =>
      (
        await select<{ outside_db: number }>(
          "SELECT r.outside_db FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.worker_id = $1 AND d.date = $2",
          [worker.id, day],
        )
      )[0]?.outside_db;
    const before = await level();
    const stretches = [leaveOut, { kind: "task", taskId: task.id, fromS: 0, toS: 300 }];
    const changed = await client.put(
      `${path}/stretches`,
      { stretches, leftOut: { how: "like-the-rest" } },
      1,
    );
    expect(changed.body).toMatchObject({ revision: 2, taskNames: { [task.id]: "Grinding" } });
    // A shift of one hour at 80 dB: LEX,8h is 80 less ten times the logarithm of eight.
    expect(await level()).toBeCloseTo(80 - 10 * Math.log10(8), 9);
    expect(before).toBeGreaterThan(90);
    const { body } = await client.get(`${path}/analysis`);
    expect([body.counted.laeqDb, body.everything.lasMaxDb, body.tasks[0].taskName]).toEqual([
      expect.closeTo(80, 9),
      110,
      "Grinding",
    ]);
    const [run] = await select<{ revision: number; duration_min: number }>(
      `SELECT r.revision, v.duration_min FROM time_histories h JOIN runs r ON r.id = h.run_id JOIN run_revisions v ON v.id = r.current_revision_id WHERE h.id = $1`,
      [historyId],
    );
    expect(run).toEqual({ revision: 2, duration_min: 9 });
    expect(
      await select(
        "SELECT 1 FROM audit_events WHERE action = 'change-history-stretches' AND subject_id = $1",
        [historyId],
      ),
    ).toHaveLength(1);
  });

  test("brackets alone make no revision of the run", async () => {
    const { client, path, task, historyId } = await buildHistory();
    await client.put(
      `${path}/stretches`,
      { stretches: [{ kind: "task", taskId: task.id, fromS: 0, toS: 300 }] },
      1,
    );
    const [run] = await select(
      "SELECT r.revision FROM time_histories h JOIN runs r ON r.id = h.run_id WHERE h.id = $1",
      [historyId],
    );
    expect(run).toEqual({ revision: 1 });
  });

  test.each([
    ["beyond the history", [{ ...leaveOut, toS: 601 }], "beyond-the-history"],
    ["over another", [leaveOut, { ...leaveOut, fromS: 350, toS: 400 }], "stretches-overlap"],
    ["of everything", [{ ...leaveOut, fromS: 0, toS: 600 }], "everything-left-out"],
    ["backwards", [{ ...leaveOut, fromS: 360, toS: 300 }], "ends-before-it-starts"],
    [
      "of another site's task",
      [{ kind: "task", taskId: "7b0d5f4e-5a3c-4c1e-9f0a-0d6f1b1c2d3e", fromS: 0, toS: 9 }],
      "task-of-other-site",
    ],
  ])("one %s is refused", async (_, stretches, code) => {
    const { client, path } = await buildHistory();
    const answer = await client.put(`${path}/stretches`, { stretches }, 1);
    expect([
      answer.status,
      answer.body.issues.map((found: { code: string }) => found.code),
    ]).toEqual([422, expect.arrayContaining([code])]);
    expect((await client.get(path)).body.revision).toBe(1);
  });

  test("from a revision that is no longer current are refused with what stands", async () => {
    const { client, path } = await buildHistory();
    await client.put(`${path}/stretches`, { stretches: [leaveOut] }, 1);
    const late = await client.put(`${path}/stretches`, { stretches: [] }, 1);
    expect([late.status, late.body.code, late.body.current.revision]).toEqual([412, "stale", 2]);
  });

  test("a run that is struck strikes its history, and its file can come in again", async () => {
    const { client, path, historyId, site } = await buildHistory();
    const { body } = await client.get(path);
    const run = await client.get(`/runs/${body.runId}`);
    const { durationMin, covers, readings } = run.body;
    const facts = readings.map(
      ({ settings, dosePct, averageDb, lasMaxDb, peak }: Record<string, unknown>) => ({
        settings,
        dosePct,
        averageDb,
        lasMaxDb,
        peak,
      }),
    );
    const struck = await client.put(
      `/runs/${body.runId}`,
      { durationMin, covers, readings: facts, reason: "another worker's", isVoid: true },
      run.body.revision,
    );
    expect(struck.status).toBe(200);
    expect((await client.get(path)).body.isVoid).toBe(true);
    expect((await client.put(`${path}/stretches`, { stretches: [] }, 1)).body.code).toBe(
      "wrong-state",
    );
    await importHistory(client, { site, content: historyText({ levelDb: knocked }) });
    expect(
      await select("SELECT 1 FROM time_histories WHERE site_id = $1 AND id <> $2", [
        site.id,
        historyId,
      ]),
    ).toHaveLength(1);
  });
});

describe("time that is left out is no silence", () => {
  /** Eight hours at 76.8 dB for 115 min and 96 dB for the rest; LEX without the rest: 76.8 − 6.2 = 70.6. */
  const loud = (index: number) => (index < 115 ? 76.8 : 96);
  const rest = { kind: "left-out", fromS: 115 * 60, toS: 480 * 60, reason: "somebody shouted" };
  const whole = () =>
    buildHistory(historyText({ count: 480, intervalS: 60, levelDb: loud }), 480, "shift", {
      taskDb: 60,
    });
  const verdictOf = async (worker: { id: string }) =>
    (
      await select<{ verdict: string; level: number | null; projected: boolean }>(
        `SELECT r.verdict_outside AS verdict, r.outside_db AS level, r.is_projected AS projected
         FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.worker_id = $1 AND d.date = $2`,
        [worker.id, day],
      )
    )[0];
  const why = { keptReason: "the rest of the file is of no use" };

  test("unless somebody says how it was, the day is not assessed, and the run is asked about", async () => {
    const { client, path, worker } = await whole();
    expect((await verdictOf(worker))?.verdict).toBe("over");
    const asked = await client.put(`${path}/stretches`, { stretches: [rest] }, 1);
    expect([asked.status, asked.body.issues]).toEqual([
      422,
      [
        expect.objectContaining({
          path: ["keptReason"],
          code: "shorter-than-shift",
          params: { coveredMin: 115, shiftMin: 480 },
        }),
      ],
    ]);
    const kept = await client.put(`${path}/stretches`, { stretches: [rest], ...why }, 1);
    expect(kept.body).toMatchObject({
      leftOut: { how: "unknown" },
      covers: "shift",
      keptReason: why.keptReason,
    });
    expect(await verdictOf(worker)).toMatchObject({ verdict: "not-assessed", level: null });
    const run = await client.get(`/runs/${kept.body.runId}`);
    expect(run.body.doubts).toEqual(["shorter-than-shift"]);
    // Counted again, nothing speaks against the run any more.
    const again = await client.put(`${path}/stretches`, { stretches: [] }, 2);
    expect(again.body).toMatchObject({ leftOut: null, keptReason: null });
    expect((await verdictOf(worker))?.verdict).toBe("over");
  });

  test("ten minutes of it are asked about as well", async () => {
    const { client, path, worker } = await buildHistory(
      historyText({ count: 480, intervalS: 60, levelDb: () => 70 }),
      480,
      "shift",
      { taskDb: 60 },
    );
    expect((await verdictOf(worker))?.verdict).toBe("under");
    const ten = { ...rest, fromS: 0, toS: 600 };
    const changed = await client.put(`${path}/stretches`, { stretches: [ten] }, 1);
    expect([changed.status, changed.body.leftOut]).toEqual([200, { how: "unknown" }]);
    expect((await verdictOf(worker))?.verdict).toBe("not-assessed");
    // Only how it was is said: the day follows that alone.
    const leftOut = { how: "quiet", levelDb: 60 };
    await client.put(`${path}/stretches`, { stretches: [ten], leftOut }, 2);
    expect(await verdictOf(worker)).toMatchObject({
      verdict: "under",
      level: expect.closeTo(10 * Math.log10((470 * 10 ** 7 + 10 * 10 ** 6) / 480), 6),
    });
  });

  test("like the rest, what is kept stands for it, and the result is marked as projected", async () => {
    const { client, path, worker } = await whole();
    const leftOut = { how: "like-the-rest" };
    const changed = await client.put(`${path}/stretches`, { stretches: [rest], leftOut }, 1);
    expect([changed.status, changed.body.leftOut]).toEqual([200, leftOut]);
    expect(await verdictOf(worker)).toMatchObject({
      verdict: "under",
      level: expect.closeTo(76.8, 6),
      projected: true,
    });
  });

  test("what lies outside the shift was none of it", async () => {
    const { client, path, worker } = await buildHistory(
      historyText({ time: "05:00:00", count: 540, intervalS: 60, levelDb: () => 70 }),
      480,
      "shift",
      { answers: ["beyond-shift"] },
    );
    const before = { ...rest, fromS: 0, toS: 3600 };
    const changed = await client.put(`${path}/stretches`, { stretches: [before] }, 1);
    expect(changed.status).toBe(200);
    expect(await verdictOf(worker)).toMatchObject({
      verdict: "under",
      level: expect.closeTo(70, 6),
    });
  });

  test("what is kept proves Over by itself", async () => {
    const { client, path, worker } = await whole();
    const some = { ...rest, fromS: 0, toS: 115 * 60 };
    await client.put(`${path}/stretches`, { stretches: [some], ...why }, 1);
    expect(await verdictOf(worker)).toMatchObject({
      verdict: "over",
      level: expect.closeTo(96 + 10 * Math.log10(365 / 480), 6),
    });
  });

  test("a correction of the run leaves it as it was said", async () => {
    const { client, path, worker } = await whole();
    const { body } = await client.put(`${path}/stretches`, { stretches: [rest], ...why }, 1);
    const run = await client.get(`/runs/${body.runId}`);
    const { durationMin, covers, readings } = run.body;
    const facts = readings.map(
      ({ octaveBandsDb: _, source: __, ...reading }: Record<string, unknown>) => reading,
    );
    const corrected = await client.put(
      `/runs/${body.runId}`,
      { durationMin, covers, readings: facts, unusual: "rain", ...why, reason: "it rained" },
      run.body.revision,
    );
    expect([corrected.status, corrected.body.unusual]).toEqual([200, "rain"]);
    expect((await verdictOf(worker))?.verdict).toBe("not-assessed");
  });

  test("a quiet level is needed, and a sensible one", async () => {
    const { client, path } = await whole();
    for (const leftOut of [{ how: "quiet" }, { how: "quiet", levelDb: 300 }]) {
      const answer = await client.put(`${path}/stretches`, { stretches: [rest], leftOut }, 1);
      expect([answer.status, answer.body.issues[0].path]).toEqual([422, ["leftOut", "levelDb"]]);
    }
  });
});

test("levels are read chunk by chunk, as they were stored", async () => {
  const { site, historyId } = await buildHistory(
    historyText({ count: 8000, levelDb: (index) => 60 + (index % 400) / 10 }),
    480,
  );
  const found = await inTransaction({ organizationId: site.organizationId }, () =>
    levelsBetween({ historyId, channels: ["laeq", "lceq"], fromIndex: 3598, toIndex: 7203 }),
  );
  const [laeq, lceq] = found;
  expect(laeq!.levels).toHaveLength(3605);
  expect(Array.from(laeq!.levels.subarray(0, 4))).toEqual(
    [3598, 3599, 3600, 3601].map((index) => 6000 + (index % 400) * 10),
  );
  expect(lceq!.levels.every((level) => level === MISSING)).toBe(true);
});
