import request from "supertest";
import { describe, expect, test } from "vitest";
import {
  buildCrew,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  nobody,
  select,
  signInAs,
  testApp,
} from "../factories";

const yesterday = daysFromToday(-1);

async function buildDesk() {
  const site = await buildSite();
  const task = await buildTask({ site });
  const worker = await buildWorker({ site });
  const crew = await buildCrew({ site, members: [worker] });
  const client = await signInAs(
    await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
  );
  const row = (more: object = {}) => ({
    kind: "worked",
    workerId: worker.id,
    localStart: "06:00",
    lengthMin: 480,
    tasks: [{ taskId: task.id, durationMin: 60 }],
    ...more,
  });
  const save = (one: object) =>
    client.post(`/crews/${crew.id}/day`, { date: yesterday, rows: [one] });
  return { site, task, worker, crew, client, row, save };
}

describe("bad input is answered clearly and changes nothing", () => {
  test("numbers that are none, or out of this world", async () => {
    const { save, row, task, site } = await buildDesk();
    for (const durationMin of [Number.NaN, null, "60", -1, 0, 1e308, 1441]) {
      const { status, body } = await save(row({ tasks: [{ taskId: task.id, durationMin }] }));
      expect(status).toBe(201);
      expect(body.saved, String(durationMin)).toEqual([]);
      expect(body.refused[0].issues[0].path).toEqual(["tasks", 0, "durationMin"]);
    }
    const [shifts] = await select<{ count: string }>(
      "SELECT count(*) FROM shifts WHERE organization_id = $1",
      [site.organizationId],
    );
    expect(shifts?.count).toBe("0");
  });

  test("1e400 in the text of a request, broken JSON, a body that is too large", async () => {
    const { client, crew } = await buildDesk();
    const headers = (client as unknown as { headers: Record<string, string> }).headers;
    const post = (text: string) =>
      request(testApp())
        .post(`/api/crews/${crew.id}/day`)
        .set(headers)
        .set("Idempotency-Key", "some-key-of-mine")
        .set("content-type", "application/json")
        .send(text);
    const infinite = await post(
      `{"date":"${yesterday}","rows":[{"kind":"worked","lengthMin":1e400}]}`,
    );
    expect(infinite.status).toBeLessThan(500);
    const broken = await post('{"date":');
    expect(broken.status).toBe(400);
    expect(broken.headers["content-type"]).toMatch(/problem\+json/);
    const large = await post(`{"date":"${"x".repeat(5_000_000)}"}`);
    expect(large.status).toBe(413);
    expect(large.body.code).toBe("too-large");
  });

  test("levels below 20 or above 160 dB", async () => {
    const { client, task } = await buildDesk();
    const level = (levelDb: number) =>
      client.post(`/tasks/${task.id}/levels`, {
        metric: { kind: "laeq" },
        levelDb,
        grade: "task-level",
        effectiveFrom: yesterday,
        reason: "measured again",
      });
    for (const levelDb of [19.9, 160.1]) {
      const { status, body } = await level(levelDb);
      expect(status).toBe(422);
      expect(body.issues[0].path).toEqual(["levelDb"]);
    }
    expect((await level(160)).status).toBe(201);
  });

  test("a dose under settings that no criterion of the site has is kept as evidence and judges nothing", async () => {
    const { client, worker, crew, save, row, site } = await buildDesk();
    const { body: instrument } = await client.post("/instruments", {
      siteId: site.id,
      kind: "dosimeter",
      class: "2",
      serialNumber: "D-odd",
      name: "Dosimeter",
    });
    const settings = {
      criterionLevelDb: 90,
      exchangeRateDb: 4,
      thresholdDb: 80,
      weighting: "A",
      response: "slow",
    };
    const saved = await save(
      row({
        tasks: [],
        unaccounted: { how: "unknown" },
        run: {
          instrumentId: instrument.id,
          durationMin: 480,
          readings: [{ settings, dosePct: 20 }],
        },
      }),
    );
    expect(saved.body.refused).toEqual([]);
    expect(saved.body.saved[0].figures.verdictAtEar).toBe("not-assessed");
    const grid = await client.get(`/crews/${crew.id}/day?date=${yesterday}`);
    expect(grid.body.rows[0].readings[0]).toMatchObject({ dosePct: 20, settings });
    expect(worker.id).toBe(grid.body.rows[0].worker.id);
  });

  test("a field check that drifted is refused, unless it is kept with a reason that shows", async () => {
    const { client, worker, site } = await buildDesk();
    const { body: instrument } = await client.post("/instruments", {
      siteId: site.id,
      kind: "dosimeter",
      class: "2",
      serialNumber: "D-drift",
      name: "Dosimeter",
    });
    const run = {
      instrumentId: instrument.id,
      workerId: worker.id,
      date: yesterday,
      durationMin: 480,
      covers: "shift",
      checkBeforeDb: 114,
      checkAfterDb: 114.6,
      readings: [
        {
          settings: {
            criterionLevelDb: 85,
            exchangeRateDb: 3,
            thresholdDb: null,
            weighting: "A",
            response: "slow",
          },
          averageDb: 88,
        },
      ],
    };
    const refused = await client.post("/runs", run);
    expect(refused.status).toBe(422);
    expect(refused.body.issues[0]).toMatchObject({
      path: ["keptReason"],
      code: "field-check-drift",
    });
    const kept = await client.post("/runs", {
      ...run,
      keptReason: "calibrator was cold; second check within 0.2 dB",
    });
    expect(kept.status).toBe(201);
  });

  test("unknown addresses, wrong methods and nobody signed in are problems with a code", async () => {
    const missing = await nobody.get("/no-such-thing");
    expect([missing.status, missing.body.code]).toEqual([404, "not-found"]);
    const { body, headers } = await nobody.get("/findings");
    expect(body).toMatchObject({ status: 401, code: "signed-out", type: "/problems/signed-out" });
    expect(body.requestId).toBe(headers["x-request-id"]);
  });

  test("an id or a date in the address that is none is not there; a filter that is none is refused", async () => {
    const { client, worker } = await buildDesk();
    for (const path of [
      "/crews/junk/sheet",
      "/workers/12345",
      `/workers/${worker.id}/days/2026-02-30`,
      "/findings/00000000-0000-0000-0000",
    ]) {
      const { status, body } = await client.get(path);
      expect([path, status, body.code]).toEqual([path, 404, "not-found"]);
    }
    const filter = await client.get("/findings?workerId=junk");
    expect([filter.status, filter.body.issues[0].params.format]).toEqual([422, "uuid"]);
  });

  test("a change without the revision it saw, and a create without a key, are asked for them", async () => {
    const { client, crew } = await buildDesk();
    const headers = (client as unknown as { headers: Record<string, string> }).headers;
    const change = await request(testApp()).put(`/api/crews/${crew.id}`).set(headers).send({});
    expect([change.status, change.body.code]).toEqual(
      [422, "invalid"].includes(change.body.code) ? [422, "invalid"] : [428, "revision-missing"],
    );
    const create = await request(testApp())
      .post("/api/areas")
      .set(headers)
      .send({ siteId: crew.siteId, name: "Cell" });
    expect([create.status, create.body.code]).toEqual([428, "key-missing"]);
  });

  test("names in any script, an emoji, a note of 10,000 characters", async () => {
    const { client, site, save, row } = await buildDesk();
    const names = ["Łukasz Ćwięk", "Дмитро Ковальчук", "山田 花子", "مريم", "R. Szabó 🦺"];
    for (const [index, name] of names.entries()) {
      const { status, body } = await client.post("/workers", {
        siteId: site.id,
        employeeNumber: `n${index}`,
        name,
        hiredOn: "2020-01-01",
      });
      expect([status, body.name]).toEqual([201, name]);
    }
    const found = await client.get(`/workers?search=${encodeURIComponent("花子")}`);
    expect(found.body.rows.map(({ name }: { name: string }) => name)).toEqual(["山田 花子"]);
    const long = "ö".repeat(10_000);
    expect((await save(row({ note: long }))).body.saved[0].shift.note).toBe(long);
    expect((await save(row({ note: `${long}x` }))).body.refused[0].issues[0].path).toEqual([
      "note",
    ]);
  });

  test("a time that came twice is asked about, one that never came is refused", async () => {
    const { client, task, site } = await buildDesk();
    const worker = await buildWorker({ site });
    const crew = await buildCrew({ site, members: [worker] });
    const save = (date: string, more: object) =>
      client.post(`/crews/${crew.id}/day`, {
        date,
        rows: [
          {
            kind: "worked",
            workerId: worker.id,
            localStart: "02:30",
            lengthMin: 480,
            tasks: [{ taskId: task.id, durationMin: 60 }],
            ...more,
          },
        ],
      });
    // Berlin: 26 October 2025 and 29 March 2026.
    expect((await save("2025-10-26", {})).body.refused[0].issues[0]).toMatchObject({
      path: ["whichHour"],
      code: "time-twice",
    });
    const second = await save("2025-10-26", { whichHour: "second" });
    expect(second.body.saved[0].shift.whichHour).toBe("second");
    const [stored] = await select<{ starts_at: Date }>(
      "SELECT starts_at FROM shifts WHERE worker_id = $1",
      [worker.id],
    );
    expect(stored?.starts_at.toISOString()).toBe("2025-10-26T01:30:00.000Z");
    expect((await save("2026-03-29", {})).body.refused[0].issues[0].code).toBe("time-skipped");
  });

  test("a shift over another of the same worker is refused with which", async () => {
    const { client, task, site, worker, save, row } = await buildDesk();
    await save(row());
    const other = await buildCrew({ site, members: [worker] });
    const { body } = await client.post(`/crews/${other.id}/day`, {
      date: yesterday,
      rows: [
        {
          kind: "worked",
          workerId: worker.id,
          localStart: "13:00",
          lengthMin: 240,
          tasks: [{ taskId: task.id, durationMin: 60 }],
        },
      ],
    });
    expect(body.refused[0].issues[0]).toMatchObject({
      code: "shifts-overlap",
      params: { localStart: "06:00", lengthMin: 480 },
    });
    const after = await client.post(`/crews/${other.id}/day`, {
      date: yesterday,
      rows: [
        {
          kind: "worked",
          workerId: worker.id,
          localStart: "14:00",
          lengthMin: 240,
          unaccounted: { how: "like-the-rest" },
          tasks: [{ taskId: task.id, durationMin: 60 }],
        },
      ],
    });
    expect(after.body.refused).toEqual([]);
    // The worker's day is both shifts.
    const [day] = await select<{ shift_min: number }>(
      "SELECT r.shift_min FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.worker_id = $1",
      [worker.id],
    );
    expect(day?.shift_min).toBe(720);
  });
});

describe("health", () => {
  test("alive, and ready when the database answers and is migrated", async () => {
    expect((await request(testApp()).get("/healthz")).body).toEqual({ status: "ok" });
    expect((await request(testApp()).get("/readyz")).body).toEqual({ status: "ready" });
  });
});
