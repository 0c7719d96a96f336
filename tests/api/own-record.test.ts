import type { Readable } from "node:stream";
import { buffer } from "node:stream/consumers";
import { parse } from "csv-parse/sync";
import request from "supertest";
import { describe, expect, test } from "vitest";
import { readZip } from "../../shared/year-file/read-zip";
import {
  buildAssignment,
  buildCrew,
  buildDay,
  buildFinding,
  buildFitTest,
  buildJob,
  buildProtector,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  insert,
  nobody,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";
import { describeEndpoint } from "./five-cases";

describeEndpoint({
  route: "GET /workers/:id/task-times",
  as: "officer",
  not: "supervisor",
  event: null,
  bad: { path: "x" },
  call: async (site) => {
    const worker = await buildWorker({ site });
    return { method: "get", path: `/workers/${worker.id}/task-times` };
  },
});

async function take(client: Client) {
  return request(testApp())
    .get("/api/me/record.zip")
    .set(client.headers)
    .buffer(true)
    .parse((stream, done) => {
      buffer(stream as unknown as Readable).then(
        (bytes) => done(null, bytes),
        (error) => done(error, null),
      );
    });
}

async function workerWithSignIn(site: Site, name = "Quill Amberley-Voß") {
  const worker = await buildWorker({ site, name });
  const user = await buildUser({
    organizationId: site.organizationId,
    roles: ["worker"],
    workerId: worker.id,
  });
  return { worker, user, client: await signInAs(user) };
}

describe("GET /me/record.zip", () => {
  test("is nobody's without a session, no office's, and nobody's without a worker", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    expect((await nobody.get("/me/record.zip")).status).toBe(401);
    for (const role of ["officer", "supervisor", "auditor", "administrator"] as const) {
      const client = await signInAs(await buildUser({ organizationId, roles: [role] }));
      expect((await client.get("/me/record.zip")).status).toBe(403);
    }
    const unlinked = await signInAs(await buildUser({ organizationId, roles: ["worker"] }));
    expect((await unlinked.get("/me/record.zip")).status).toBe(404);
  });

  test("has the own records and nobody else's, as JSON and CSV, and leaves its event", async () => {
    const site = await buildSite({ governingRuleSet: "uk-2005" });
    const { worker, user, client } = await workerWithSignIn(site);
    const other = await workerWithSignIn(site, "Somebody Else");
    for (const one of [worker, other.worker]) {
      await buildDay(one, daysFromToday(-1), {
        governingRuleSet: "uk-2005",
        outsideDb: 91.25,
        origin: "imported",
      });
      await buildAssignment({ worker: one });
      await buildFitTest({ worker: one });
    }
    const task = await buildTask({ site, name: "=1+1" });
    await buildShift(worker, {
      date: daysFromToday(-1),
      tasks: [{ taskId: task.id, durationMin: 300 }],
    });

    const answer = await take(client);
    expect(answer.status).toBe(200);
    expect(answer.headers["content-disposition"]).toMatch(/filename="?my-record-\d+\.zip"?$/);
    const files = new Map<string, string>();
    for (const entry of await readZip(new Blob([answer.body as Uint8Array<ArrayBuffer>])))
      files.set(entry.path, await new Response(entry.stream()).text());
    const whole = JSON.parse(files.get("record.json")!);
    expect(whole.worker).toMatchObject({ id: worker.id, name: "Quill Amberley-Voß" });
    expect(whole.days).toHaveLength(1);
    expect(whole.days[0]).toMatchObject({ date: daysFromToday(-1), outsideDb: 91.25 });
    expect(whole["fit-tests"]).toHaveLength(1);
    expect(whole.protectors).toHaveLength(1);
    for (const content of files.values()) {
      expect(content).not.toContain("Somebody Else");
      expect(content).not.toContain(other.worker.id);
    }
    const [day] = parse(files.get("days.csv")!, { columns: true, bom: true }) as {
      outside_db: string;
    }[];
    expect(day?.outside_db).toBe("91.25");
    expect(files.get("shifts.csv")).toContain("'=1+1");
    const events = await select<{ action: string; actor_id: string }>(
      "SELECT action, actor_id FROM audit_events WHERE organization_id = $1",
      [site.organizationId],
    );
    expect(events).toEqual([{ action: "take-own-record", actor_id: user.id }]);
  });
});

describe("how long a task may last today", () => {
  /** Two tasks, half an hour a sample, measured some weeks ago; limit 87 dB at the ear. */
  async function layOut({ parDb = 20 as number | null, isSampled = true } = {}) {
    const site = await buildSite({ governingRuleSet: "uk-2005", timeZone: "UTC" });
    const { organizationId } = site;
    const [loud, quiet] = [
      await buildTask({ site, name: "Riveting", levelDb: null }),
      await buildTask({ site, name: "Sorting", levelDb: null }),
    ];
    for (const [task, levelDb] of [
      [loud, 111],
      [quiet, 72],
    ] as const)
      await insert("task_levels", {
        organizationId,
        taskId: task.id,
        number: 1,
        metric: JSON.stringify({ kind: "laeq" }),
        levelDb,
        samplesDb: isSampled ? [levelDb, levelDb, levelDb] : [],
        instrumentClass: "class-1-meter",
        grade: "measured-group",
        effectiveFrom: daysFromToday(-30),
      });
    const job = await buildJob({
      site,
      tasks: [
        { taskId: loud.id, durationMin: 60 },
        { taskId: quiet.id, durationMin: 420 },
      ],
    });
    const worker = await buildWorker({ site, jobId: job.id });
    const inner = await buildProtector({ organizationId });
    await buildAssignment({ worker, inner });
    if (parDb !== null) await buildFitTest({ worker, model: inner, parDb });
    await buildCrew({ site, members: [worker] });
    await buildShift(worker, {
      date: daysFromToday(-1),
      tasks: [{ taskId: loud.id, durationMin: 60, wornPct: 100 }],
    });
    const user = await buildUser({ organizationId, roles: ["worker"], workerId: worker.id });
    const client = await signInAs(user);
    const rows = async () => (await client.get(`/workers/${worker.id}/task-times`)).body.rows;
    return { site, organizationId, worker, loud, rows };
  }

  test("is told where level, fit and wearing are known", async () => {
    const { loud, rows } = await layOut();
    const found = (await rows()) as { taskId: string; allowedMin: number }[];
    expect(found.find(({ taskId }) => taskId === loud.id)).toMatchObject({
      taskName: "Riveting",
      isWorn: true,
      measuredOn: daysFromToday(-30),
    });
    const { allowedMin } = found.find(({ taskId }) => taskId === loud.id)!;
    // 111 − 20 = 91 at the ear: 191 min up to 87 dB by the level alone, less with its uncertainty.
    expect(allowedMin % 5).toBe(0);
    expect(allowedMin).toBeGreaterThan(60);
    expect(allowedMin).toBeLessThan(190);
  });

  test("is not told where the fit or the level is not measured, or the workplace has changed", async () => {
    expect(await (await layOut({ parDb: null })).rows()).toEqual([]);
    expect(await (await layOut({ isSampled: false })).rows()).toEqual([]);
    const { site, organizationId, loud, rows } = await layOut();
    await insert("workplace_changes", {
      organizationId,
      siteId: site.id,
      taskId: loud.id,
      kind: "machine",
      happenedOn: daysFromToday(-3),
      what: "Another riveter",
    });
    expect(await rows()).toEqual([]);
  });

  test("is not told while it is open where a bang came from", async () => {
    const { site, worker, rows } = await layOut();
    const findingId = await buildFinding({ site, workerId: worker.id, kind: "peak-or-ceiling" });
    expect(await rows()).toEqual([]);
    await select("UPDATE findings SET state = 'done' WHERE id = $1", [findingId]);
    expect(await rows()).not.toEqual([]);
  });
});
