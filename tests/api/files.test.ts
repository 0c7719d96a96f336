import { randomUUID } from "node:crypto";
import request from "supertest";
import { describe, expect, test } from "vitest";
import {
  buildInstrument,
  buildSite,
  buildSupervisorOf,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  nobody,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";

/** The first bytes of a PNG and something of its own after them. */
const picture = () =>
  Buffer.concat([Buffer.from("\x89PNG\r\n\x1a\n", "latin1"), Buffer.from(randomUUID())]);

const upload = ({ headers }: Pick<Client, "headers">, content: Buffer, name = "Prüfstand 3.png") =>
  request(testApp())
    .post("/api/files")
    .set(headers)
    .set("Idempotency-Key", randomUUID())
    .attach("file", content, name);
const download = ({ headers }: Pick<Client, "headers">, id: string) =>
  request(testApp()).get(`/api/files/${id}`).set(headers).buffer(true);

const roleAt = async ({ organizationId }: Site, role: "officer" | "auditor" | "supervisor") =>
  signInAs(await buildUser({ organizationId, roles: [role] }));

describe("POST /files", () => {
  test("401 without a session, 403 as auditor, 422 without a file or with another kind", async () => {
    const site = await buildSite();
    expect((await upload(nobody, picture())).status).toBe(401);
    expect((await upload(await roleAt(site, "auditor"), picture())).status).toBe(403);
    const officer = await roleAt(site, "officer");
    const script = await upload(officer, Buffer.from("<script>alert(1)</script>"), "photo.png");
    expect([script.status, script.body.issues]).toMatchObject([
      422,
      [
        {
          path: ["file"],
          code: "file-not-as-named",
          params: { name: "photo.png", found: "text/plain" },
        },
      ],
    ]);
    const text = await upload(officer, Buffer.from("Offer of 3 March"), "offer.txt");
    expect(text.body.issues).toMatchObject([{ path: ["file"], code: "file-kind" }]);
    expect((await officer.post("/files", {})).status).toBe(422);
    const events = await select("SELECT 1 FROM audit_events WHERE organization_id = $1", [
      site.organizationId,
    ]);
    expect(events).toHaveLength(0);
  });

  test("keeps it under its content, says what it is by its bytes, and leaves upload-file", async () => {
    const site = await buildSite();
    const officer = await roleAt(site, "officer");
    const content = picture();
    const { status, body } = await upload(officer, content, "photo.pdf");
    expect(status).toBe(201);
    expect(body).toMatchObject({ mediaType: "image/png", sizeBytes: content.length });
    const second = await upload(officer, content, "again.png");
    expect(second.body.id).toBe(body.id);
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1",
      [site.organizationId],
    );
    expect(events.map(({ action }) => action)).toEqual(["upload-file", "upload-file"]);
  });
});

describe("GET /files/:id", () => {
  test("comes as an attachment that no browser looks into", async () => {
    const site = await buildSite();
    const officer = await roleAt(site, "officer");
    const content = picture();
    const { body: file } = await upload(officer, content);
    const answer = await download(officer, file.id);
    expect(answer.status).toBe(200);
    expect(answer.headers).toMatchObject({
      "content-type": "image/png",
      "x-content-type-options": "nosniff",
      "content-length": String(content.length),
    });
    expect(answer.headers["content-disposition"]).toMatch(/^attachment; filename/);
    expect(Buffer.compare(answer.body, content)).toBe(0);
  });

  test("until it belongs to something it is its sender's alone", async () => {
    const site = await buildSite();
    const { body: file } = await upload(await roleAt(site, "officer"), picture());
    expect((await download(nobody, file.id)).status).toBe(401);
    expect((await download(await roleAt(site, "auditor"), file.id)).status).toBe(404);
    expect((await download(await roleAt(site, "officer"), file.id)).status).toBe(404);
    expect((await download(await roleAt(await buildSite(), "officer"), file.id)).status).toBe(404);
    const administrator = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["administrator"] }),
    );
    expect((await download(administrator, file.id)).status).toBe(403);
  });

  test("of a run: whoever may see the run; nobody attaches what is another's", async () => {
    const site = await buildSite();
    const officer = await roleAt(site, "officer");
    const worker = await buildWorker({ site });
    const task = await buildTask({ site });
    const instrument = await buildInstrument({ site, kind: "sound-level-meter" });
    const { body: file } = await upload(officer, picture());
    const sample = {
      taskId: task.id,
      workerId: worker.id,
      instrumentId: instrument.id,
      date: daysFromToday(-1),
      startedAt: `${daysFromToday(-1)}T08:00:00Z`,
      durationMin: 6,
      levelDb: 94.6,
      checkBeforeDb: 94,
      checkAfterDb: 94,
      fileIds: [file.id],
    };
    const strangers = await (await roleAt(site, "officer")).post("/samples", sample);
    expect(strangers.status).toBe(404);
    const { body: run } = await officer.post("/samples", sample);
    expect(run.files).toEqual([{ id: file.id, name: "Prüfstand 3.png", mediaType: "image/png" }]);
    expect((await download(await roleAt(site, "auditor"), file.id)).status).toBe(200);
    const own = await signInAs(await buildSupervisorOf(site, worker));
    expect((await download(own, file.id)).status).toBe(200);
    expect((await download(await roleAt(site, "supervisor"), file.id)).status).toBe(404);
  });

  test("a certificate: whoever may see the instrument", async () => {
    const site = await buildSite();
    const officer = await roleAt(site, "officer");
    const instrument = await buildInstrument({ site });
    const certificate = Buffer.from(`%PDF-1.7\n${randomUUID()}`);
    const { body: file } = await upload(officer, certificate, "certificate.pdf");
    const recorded = await officer.post(`/instruments/${instrument.id}/calibrations`, {
      doneOn: daysFromToday(-2),
      hasPassed: true,
      certificateFileId: file.id,
    });
    expect(recorded.body.rows[0].certificateFileId).toBe(file.id);
    expect((await download(await roleAt(site, "supervisor"), file.id)).status).toBe(200);
  });
});
