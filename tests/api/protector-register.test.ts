import { randomUUID } from "node:crypto";
import request from "supertest";
import { describe, expect, test } from "vitest";
import { dropUnusedFile } from "../../server/commands/drop-unused-file";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import { inTransaction } from "../../server/lib/db";
import {
  buildAssignment,
  buildCrew,
  buildDay,
  buildJob,
  buildProtector,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  insert,
  select,
  signInAs,
  testApp,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const same = (value: number) => Array<number>(8).fill(value);
const bands = { meanDb: same(35), sdDb: same(3) };

/** A file of the organization that every reader of its register has: another model's data sheet. */
async function buildSheet(organizationId: string) {
  const model = await buildProtector({ organizationId });
  const sha256 = Buffer.from(randomUUID().replaceAll("-", "").repeat(2), "hex");
  const facts = { sizeBytes: 3000, mediaType: "application/pdf", name: "certificate.pdf" };
  const fileId = await insert("files", { organizationId, sha256, ...facts });
  const id = await insert("protector_files", {
    organizationId,
    modelId: model.id,
    fileId,
    title: "Certificate",
  });
  return { id, fileId, modelId: model.id };
}

const buildPair = async (organizationId: string) => ({
  inner: await buildProtector({ organizationId, kind: "foam-plug" }),
  outer: await buildProtector({ organizationId }),
});

describeEndpoint({
  route: "GET /protectors/:id/files",
  as: "supervisor",
  not: "worker",
  event: null,
  bad: null,
  call: async ({ organizationId }) => ({
    method: "get",
    path: `/protectors/${(await buildSheet(organizationId)).modelId}/files`,
  }),
});
describeEndpoint({
  route: "POST /protectors/:id/files",
  as: "officer",
  not: "supervisor",
  event: "attach-protector-file",
  bad: { body: { title: "" } },
  badField: "title",
  call: async ({ organizationId }) => ({
    method: "post",
    path: `/protectors/${(await buildProtector({ organizationId })).id}/files`,
    body: { fileId: (await buildSheet(organizationId)).fileId, title: "Test report 2024" },
  }),
});
describeEndpoint({
  route: "POST /protectors/:id/files/:attachmentId/removal",
  as: "officer",
  not: "auditor",
  event: "remove-protector-file",
  status: 200,
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async ({ organizationId }) => {
    const { id, modelId } = await buildSheet(organizationId);
    return {
      method: "post",
      path: `/protectors/${modelId}/files/${id}/removal`,
      body: { reason: "it was another model's" },
    };
  },
});
describeEndpoint({
  route: "GET /protector-combinations",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "x" },
  badField: "modelId",
  call: async ({ organizationId }) => ({
    method: "get",
    path: `/protector-combinations?modelId=${(await buildProtector({ organizationId })).id}`,
  }),
});
describeEndpoint({
  route: "POST /protector-combinations",
  as: "officer",
  not: "supervisor",
  event: "add-protector-combination",
  bad: { body: { bands: { ...bands, sdDb: same(-3) } } },
  badField: "bands.sdDb.1",
  call: async ({ organizationId }) => {
    const { inner, outer } = await buildPair(organizationId);
    return {
      method: "post",
      path: "/protector-combinations",
      body: {
        innerModelId: inner.id,
        outerModelId: outer.id,
        effectiveFrom: daysFromToday(-9),
        bands,
      },
    };
  },
});
describeEndpoint({
  route: "POST /protector-combinations/preview",
  as: "officer",
  not: "auditor",
  event: null,
  status: 200,
  bad: { body: { effectiveFrom: "yesterday" } },
  badField: "effectiveFrom",
  call: async ({ organizationId }) => {
    const { inner, outer } = await buildPair(organizationId);
    return {
      method: "post",
      path: "/protector-combinations/preview",
      body: {
        innerModelId: inner.id,
        outerModelId: outer.id,
        effectiveFrom: daysFromToday(-9),
        bands,
      },
    };
  },
});

const lay = async () => {
  const site = await buildSite();
  const { organizationId } = site;
  const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  return { site, client, organizationId };
};

const send = ({ headers }: Client, content: string, name: string) =>
  request(testApp())
    .post("/api/files")
    .set(headers)
    .set("Idempotency-Key", randomUUID())
    .attach("file", Buffer.from(`%PDF-1.7\n${content}`), name);

describe("a protector's data sheets", () => {
  test("are sent, attached, read by whoever reads the register, and taken off with a reason", async () => {
    const { client, organizationId } = await lay();
    const model = await buildProtector({ organizationId });
    const { body: file } = await send(client, randomUUID(), "Prüfbericht 7.pdf");
    const sheet = { fileId: file.id, title: "Test report 7" };
    const attached = await client.post(`/protectors/${model.id}/files`, sheet);
    expect(attached.body.rows).toMatchObject([
      { ...sheet, fileName: "Prüfbericht 7.pdf", sizeBytes: file.sizeBytes },
    ]);
    const twice = await client.post(`/protectors/${model.id}/files`, sheet);
    expect([twice.status, twice.body.issues]).toMatchObject([
      422,
      [{ path: ["fileId"], code: "file-attached-already" }],
    ]);
    const supervisor = await signInAs(await buildUser({ organizationId, roles: ["supervisor"] }));
    const get = ({ headers }: Client) =>
      request(testApp()).get(`/api/files/${file.id}`).set(headers);
    expect((await get(supervisor)).status).toBe(200);
    const removal = `/protectors/${model.id}/files/${attached.body.rows[0].id}/removal`;
    const taken = await client.post(removal, { reason: "of an older edition" });
    expect(taken.body.rows).toEqual([]);
    expect((await client.post(removal, { reason: "of an older edition" })).status).toBe(404);
    expect((await get(supervisor)).status).toBe(404);
    const events = await select<{ action: string; recorded: string | object }>(
      `SELECT e.action, v.recorded FROM audit_events e JOIN audit_values v ON v.event_id = e.id
       WHERE e.organization_id = $1 ORDER BY e.id`,
      [organizationId],
    );
    expect(events.map(({ action }) => action)).toEqual([
      "upload-file",
      "attach-protector-file",
      "remove-protector-file",
    ]);
    expect(JSON.stringify(events[2]!.recorded)).toContain("of an older edition");
  });

  test("of another organization can't be attached", async () => {
    const [ours, theirs] = [await lay(), await lay()];
    const model = await buildProtector({ organizationId: ours.organizationId });
    const { fileId } = await buildSheet(theirs.organizationId);
    const answer = await ours.client.post(`/protectors/${model.id}/files`, {
      fileId,
      title: "Certificate",
    });
    expect(answer.status).toBe(404);
  });

  test("stay where something else drops the same file", async () => {
    const { organizationId } = await lay();
    const { fileId } = await buildSheet(organizationId);
    await inTransaction({ organizationId }, () => dropUnusedFile(organizationId, fileId));
    expect(await select("SELECT 1 FROM files WHERE id = $1", [fileId])).toHaveLength(1);
  });
});

describe("two protectors worn together", () => {
  test("their data are revisions; the latest that holds today is in force", async () => {
    const { client, organizationId } = await lay();
    const { inner, outer } = await buildPair(organizationId);
    const pair = { innerModelId: inner.id, outerModelId: outer.id, bands };
    const add = (more: object) => client.post("/protector-combinations", { ...pair, ...more });
    await add({ effectiveFrom: "2026-01-05" });
    const silent = await add({ effectiveFrom: "2026-02-05" });
    expect([silent.status, silent.body.issues]).toMatchObject([
      422,
      [{ path: ["reason"], code: "reason-needed" }],
    ]);
    await add({ effectiveFrom: daysFromToday(20), reason: "new cushions" });
    const later = { ...bands, meanDb: same(33) };
    const corrected = await add({
      effectiveFrom: "2026-01-05",
      bands: later,
      reason: "read wrongly",
    });
    const seen = corrected.body.rows.map(
      ({ number, isInForce }: { number: number; isInForce: boolean }) => [number, isInForce],
    );
    expect(seen).toEqual([
      [2, false],
      [3, true],
      [1, false],
    ]);
    const ofOuter = await client.get(`/protector-combinations?modelId=${outer.id}`);
    expect(ofOuter.body.rows).toHaveLength(3);
    expect(ofOuter.body.rows[0]).toMatchObject({ innerName: inner.name, outerName: outer.name });
    await expect(
      select("UPDATE protector_combinations SET number = 9 WHERE inner_model_id = $1", [inner.id]),
    ).rejects.toThrow();
  });

  test("one model is no pair", async () => {
    const { client, organizationId } = await lay();
    const { id } = await buildProtector({ organizationId });
    const answer = await client.post("/protector-combinations", {
      innerModelId: id,
      outerModelId: id,
      effectiveFrom: "2026-01-05",
      bands,
    });
    expect(answer.body.issues).toMatchObject([
      { path: ["outerModelId"], code: "same-protector-twice" },
    ]);
  });

  test("their data move the days of whoever wore both so, and of nobody else", async () => {
    const { site, client, organizationId } = await lay();
    const { inner, outer } = await buildPair(organizationId);
    const [both, one, swapped] = [
      await buildWorker({ site }),
      await buildWorker({ site }),
      await buildWorker({ site }),
    ];
    await buildAssignment({ worker: both, inner, outer });
    await buildAssignment({ worker: one, inner });
    await buildAssignment({ worker: swapped, inner: outer, outer: inner });
    for (const worker of [both, one, swapped])
      for (const date of ["2026-02-01", "2026-03-01"]) await buildDay(worker, date);
    await client.post("/protector-combinations", {
      innerModelId: inner.id,
      outerModelId: outer.id,
      effectiveFrom: "2026-02-15",
      bands,
    });
    const stale = await select(
      "SELECT worker_id, date::text FROM days WHERE organization_id = $1 AND is_stale",
      [organizationId],
    );
    expect(stale).toEqual([{ worker_id: both.id, date: "2026-03-01" }]);
  });

  test("the preview says what the data then do to verdicts, and keeps nothing", async () => {
    const { site, client, organizationId } = await lay();
    const task = await buildTask({
      site,
      name: "Run-up",
      levelDb: 100,
      octaveBandsDb: [80, 85, 90, 95, 94, 92, 88, 82],
    });
    const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
    const worker = await buildWorker({ site, jobId: job.id });
    const { inner, outer } = await buildPair(organizationId);
    await buildAssignment({ worker, inner, outer });
    const crew = await buildCrew({ site, members: [worker] });
    const date = daysFromToday(-8);
    const entered = await client.post(`/crews/${crew.id}/day`, {
      date,
      rows: [
        {
          kind: "worked",
          workerId: worker.id,
          localStart: "06:00",
          lengthMin: 480,
          tasks: [{ taskId: task.id, durationMin: 480, wornPct: 100 }],
        },
      ],
    });
    expect(entered.body.refused).toEqual([]);
    const body = {
      innerModelId: inner.id,
      outerModelId: outer.id,
      effectiveFrom: daysFromToday(-9),
      bands,
    };
    const preview = await client.post("/protector-combinations/preview", body);
    expect(preview.body).toMatchObject({ days: 1, workers: 1, changedDays: 1 });
    // Without test data of the two: Not assessed. 100 dB less more than 30 dB by band is far under 87.
    expect(preview.body.changes).toContainEqual(
      expect.objectContaining({ line: "at-the-ear", before: "not-assessed", after: "under" }),
    );
    expect((await client.get(`/protector-combinations?modelId=${inner.id}`)).body.rows).toEqual([]);
    await client.post("/protector-combinations", body);
    await recomputeStaleDays(organizationId);
    const [stored] = await select<{ verdict: string }>(
      `SELECT r.verdict_at_ear AS verdict FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.worker_id = $1`,
      [worker.id],
    );
    expect(stored!.verdict).toBe("under");
  });
});

describe("what is worn beside a protector", () => {
  test("stands with the worker and with the task", async () => {
    const { site, client } = await lay();
    const made = await client.post("/workers", {
      siteId: site.id,
      employeeNumber: "G-100",
      name: "R. Ainsdale",
      hiredOn: "2024-01-01",
      wornGear: ["glasses"],
    });
    expect(made.body.wornGear).toEqual(["glasses"]);
    const wrong = await client.post("/workers", {
      siteId: site.id,
      employeeNumber: "G-101",
      name: "R. Ainsdale",
      hiredOn: "2024-01-01",
      wornGear: ["hat"],
    });
    expect([wrong.status, wrong.body.issues[0]?.path]).toEqual([422, ["wornGear", 0]]);
    const task = await client.post("/tasks", {
      siteId: site.id,
      name: "Shot blasting",
      requiredGear: ["helmet"],
      level: {
        metric: { kind: "laeq" },
        levelDb: 96,
        grade: "estimate",
        impulseType: 2,
        effectiveFrom: "2026-01-05",
      },
    });
    expect(task.body).toMatchObject({ requiredGear: ["helmet"], level: { impulseType: 2 } });
    const changed = await client.put(
      `/tasks/${task.body.id}`,
      { siteId: site.id, name: "Shot blasting", requiredGear: ["helmet", "respirator"] },
      1,
    );
    expect(changed.body.requiredGear).toEqual(["helmet", "respirator"]);
  });
});

test("a model's whole data come back as they were given", async () => {
  const { client } = await lay();
  const data = {
    percentile: { mostDb: 22, fewDb: 30 },
    usLabel: { meanDb: Array(9).fill(28), sdDb: Array(9).fill(2.4) },
    bands: { meanDb: same(25), sdDb: same(2) },
    subjectsDb: [same(24), same(27), [null, 25, 25, 26, 27, 30, 31, 30]],
    sizes: ["S", "M", "L"],
    worksWith: { helmet: true, glasses: false, respirator: null },
    cushionsEveryDays: 180,
    auClass: 4,
    effectiveFrom: "2026-01-05",
  };
  const made = await client.post("/protectors", {
    name: `Ridgeline ${randomUUID()}`,
    kind: "earmuff",
    data,
  });
  expect(made.status).toBe(201);
  const read = await client.get(`/protectors/${made.body.id}`);
  expect(read.body.data).toMatchObject({ ...data, tipsEveryDays: null });
});
