import { execFileSync } from "node:child_process";
import { createHash } from "node:crypto";
import { mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { get } from "node:http";
import type { AddressInfo } from "node:net";
import { tmpdir } from "node:os";
import { join } from "node:path";
import type { Readable } from "node:stream";
import { buffer } from "node:stream/consumers";
import { parse } from "csv-parse/sync";
import request from "supertest";
import { beforeAll, describe, expect, test } from "vitest";
import { ensureProgram } from "../../scripts/lib/debian-programs.mjs";
import { recomputeDays } from "../../server/commands/recompute-days";
import { erasePeople } from "../../server/jobs/erase-people";
import { sealTrail } from "../../server/lib/audit";
import { inTransaction } from "../../server/lib/db";
import { checkRows, checkSeals, trailState } from "../../server/queries/trail-check";
import { checkYearFile, isSound } from "../../shared/year-file/check-year-file";
import {
  buildAssignment,
  buildDay,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  insert,
  type Site,
  select,
  signInAs,
  testApp,
} from "../factories";
import { describeEndpoint } from "./five-cases";

testApp();

const US = { governingRuleSet: "us-general-industry", timeZone: "UTC" };
const personAt = async (site: Site, role: "officer" | "administrator" | "auditor") =>
  signInAs(await buildUser({ organizationId: site.organizationId, roles: [role] }));
const asked = (site: Site) => ({
  siteId: site.id,
  successor: "Marrow Lane Castings",
  passesOn: daysFromToday(90),
  note: "",
});
const HASH = "ab".repeat(32);

/** One as it stands in the database, by others than whoever calls. */
async function standing(site: Site, state: "proposed" | "approved" = "approved"): Promise<string> {
  const { organizationId } = site;
  const [first, second] = [
    await buildUser({ organizationId, roles: ["officer"] }),
    await buildUser({ organizationId, roles: ["administrator"] }),
  ];
  return insert("record_transfers", {
    organizationId,
    siteId: site.id,
    successor: "Marrow Lane Castings",
    passesOn: daysFromToday(90),
    note: "",
    state,
    proposedBy: first.id,
    ...(state === "approved" && { approvedBy: second.id, approvedAt: new Date() }),
  });
}

async function handedOut(site: Site): Promise<string> {
  const id = await standing(site);
  await select(
    `INSERT INTO record_transfer_files (organization_id, transfer_id, sha256, size_bytes, years, taken_by)
     SELECT organization_id, id, decode($2, 'hex'), 1000, '{2026}', proposed_by FROM record_transfers WHERE id = $1`,
    [id, HASH],
  );
  return id;
}

const receipt = (more: object = {}) => ({
  sha256: HASH,
  signedBy: "O. Penhallow",
  signedOn: daysFromToday(0),
  ...more,
});

describeEndpoint({
  route: "GET /record-transfers",
  as: "administrator",
  not: "auditor",
  event: null,
  bad: null,
  namesNothing: true,
  call: async (site) => {
    await standing(site);
    return { method: "get", path: "/record-transfers" };
  },
});
describeEndpoint({
  route: "POST /record-transfers",
  as: "officer",
  not: "auditor",
  event: "propose-transfer",
  bad: { body: { passesOn: "1890-01-01" } },
  badField: "passesOn",
  call: async (site) => ({ method: "post", path: "/record-transfers", body: asked(site) }),
});
describeEndpoint({
  route: "POST /record-transfers/:id/approval",
  as: "administrator",
  not: "supervisor",
  status: 200,
  event: "approve-transfer",
  bad: { path: "x" },
  call: async (site) => {
    const id = await standing(site, "proposed");
    return { method: "post", path: `/record-transfers/${id}/approval`, revision: 1 };
  },
});
describeEndpoint({
  route: "POST /record-transfers/:id/withdrawal",
  as: "officer",
  not: "auditor",
  status: 200,
  event: "withdraw-transfer",
  bad: { path: "x" },
  call: async (site) => ({
    method: "post",
    path: `/record-transfers/${await standing(site)}/withdrawal`,
    revision: 1,
  }),
});
describeEndpoint({
  route: "GET /record-transfers/:id/records.zip",
  as: "officer",
  not: "administrator",
  event: "hand-out-transfer-file",
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/record-transfers/${await standing(site)}/records.zip`,
  }),
});
describeEndpoint({
  route: "POST /record-transfers/:id/receipt",
  as: "administrator",
  not: "worker",
  status: 200,
  event: "receive-transfer",
  bad: { body: { sha256: "12 34" } },
  badField: "sha256",
  call: async (site) => ({
    method: "post",
    path: `/record-transfers/${await handedOut(site)}/receipt`,
    revision: 1,
    body: receipt(),
  }),
});

const decide = (client: Client, id: string, what: "approval" | "withdrawal", revision = 1) =>
  client.send({ method: "post", path: `/record-transfers/${id}/${what}`, revision });
const receive = (client: Client, id: string, body: object, revision = 2) =>
  client.send({ method: "post", path: `/record-transfers/${id}/receipt`, revision, body });
const listed = async (client: Client) => (await client.get("/record-transfers")).body.rows;

async function take(client: Client, id: string): Promise<Buffer> {
  const answer = await request(testApp())
    .get(`/api/record-transfers/${id}/records.zip`)
    .set(client.headers)
    .buffer(true)
    .parse((stream, done) => {
      buffer(stream as unknown as Readable).then(
        (bytes) => done(null, bytes),
        (error) => done(error, null),
      );
    });
  expect(answer.status).toBe(200);
  return answer.body as Buffer;
}

/** Its files, read by another program: a ZIP whose places are counted in 64 bits. */
function unpacked(bytes: Buffer): Map<string, Buffer> {
  const folder = mkdtempSync(join(tmpdir(), "dinward-transfer-"));
  try {
    writeFileSync(join(folder, "records.zip"), bytes);
    execFileSync("python3", ["-m", "zipfile", "-t", join(folder, "records.zip")]);
    execFileSync("python3", ["-m", "zipfile", "-e", join(folder, "records.zip"), folder]);
    return new Map(
      readdirSync(folder)
        .filter((name) => name !== "records.zip")
        .map((name) => [name, readFileSync(join(folder, name))]),
    );
  } finally {
    rmSync(folder, { recursive: true });
  }
}

const sha256 = (bytes: Buffer) => createHash("sha256").update(bytes).digest("hex");

/** A day computed in 2025, one imported in 2026, and a protector assigned since 2025. */
async function layOutSite() {
  const site = await buildSite({ ...US, name: "Ostmere, works" });
  const { organizationId } = site;
  const worker = await buildWorker({
    site,
    name: "Quill Amberley-Voss",
    employeeNumber: "ZX-4711",
    hiredOn: "2020-01-01",
  });
  await buildAssignment({ worker, fromDate: "2025-01-01" });
  const task = await buildTask({ site, levelDb: 97.3 });
  const date = "2025-03-03";
  await insert("days", { organizationId, workerId: worker.id, date, siteId: site.id });
  await buildShift(worker, {
    date,
    tasks: [{ taskId: task.id, durationMin: 480, wornPct: 90 }],
  });
  await inTransaction({ organizationId }, () =>
    recomputeDays(organizationId, [{ workerId: worker.id, date }]),
  );
  await buildDay(worker, "2026-05-04", { origin: "imported", outsideDb: 91.3, atEarDb: 79.6 });
  return { site, worker };
}

async function trailFaults(organizationId: string) {
  while ((await inTransaction({ organizationId }, () => sealTrail(organizationId))) === 5000);
  return inTransaction({ organizationId, readOnly: true }, async () => {
    const { tables } = await trailState(organizationId);
    const ofRows = [];
    for (const table of tables)
      ofRows.push(...(await checkRows(organizationId, table)).faults.map((one) => one.key));
    return { tables, seals: (await checkSeals(organizationId, 0)).faults, rows: ofRows };
  });
}

describe("records handed over to a successor", () => {
  beforeAll(() => ensureProgram("python3", "python3"), 120_000);

  test("one proposes, another approves, the file goes out, and the receipt ends it", async () => {
    const { site, worker } = await layOutSite();
    const [officer, administrator] = [
      await personAt(site, "officer"),
      await personAt(site, "administrator"),
    ];
    const { id } = (await officer.post("/record-transfers", asked(site))).body;
    const again = await administrator.post("/record-transfers", asked(site));
    expect(again.status).toBe(409);
    expect(again.body.code).toBe("exists-already");
    const early = await officer.get(`/record-transfers/${id}/records.zip`);
    expect(early.status).toBe(409);
    expect((await decide(officer, id, "approval")).body.code).toBe("own-proposal");
    expect((await decide(administrator, id, "approval", 2)).body.code).toBe("stale");
    expect((await decide(administrator, id, "approval")).body).toMatchObject({
      state: "approved",
      can: { take: false, receive: true, withdraw: true },
    });
    // A hold keeps people from being erased, and nothing from being handed over.
    await officer.post("/legal-holds", { siteId: site.id, reason: "A claim is open" });

    const bytes = await take(officer, id);
    const files = unpacked(bytes);
    expect([...files.keys()].sort()).toEqual([
      "2025.zip",
      "2026.zip",
      "README.txt",
      "manifest.json",
      "people.csv",
    ]);
    const manifest = JSON.parse(String(files.get("manifest.json")));
    expect(manifest).toMatchObject({ site: site.name, successor: "Marrow Lane Castings" });
    for (const { path, sha256: stated, sizeBytes } of manifest.files) {
      expect(sha256(files.get(path)!)).toBe(stated);
      expect(files.get(path)!.length).toBe(sizeBytes);
    }
    expect(parse(files.get("people.csv")!, { columns: true })).toMatchObject([
      { worker: worker.employeeNumber, name: worker.name, hired_on: "2020-01-01", left_on: "" },
    ]);
    expect(String(files.get("README.txt"))).toContain("npm run verify:export 2025.zip");

    // Each year's file checks and derives itself again, as one taken alone.
    for (const [path, rederived, imported] of [
      ["2025.zip", 1, 0],
      ["2026.zip", 0, 1],
    ] as const) {
      const report = await checkYearFile(new Blob([new Uint8Array(files.get(path)!)]));
      expect(isSound(report)).toBe(true);
      expect(report).toMatchObject({ rederived, imported, manifest: { workers: "number" } });
    }
    expect(
      await select(
        "SELECT v.recorded->>'manifestSha256' AS sha256 FROM audit_events e JOIN audit_values v ON v.event_id = e.id WHERE e.organization_id = $1 AND e.action = 'finish-year-records' ORDER BY e.id",
        [site.organizationId],
      ),
    ).toEqual(
      manifest.files
        .filter(({ year }: { year: number | null }) => year !== null)
        .map(({ manifestSha256 }: { manifestSha256: string }) => ({ sha256: manifestSha256 })),
    );
    expect((await listed(officer))[0].files).toMatchObject([
      { sizeBytes: bytes.length, years: [2025, 2026] },
    ]);
    expect(JSON.stringify(await listed(officer))).not.toContain(sha256(bytes));

    const wrong = await receive(officer, id, receipt());
    expect(wrong.status).toBe(422);
    expect(wrong.body.issues).toMatchObject([{ path: ["sha256"], code: "sha256-not-handed-out" }]);
    const own = receipt({ sha256: sha256(bytes).toUpperCase().replace(/(..)/g, "$1 ") });
    for (const [day, code] of [
      [-1, "signed-before-handed-out"],
      [1, "in-the-future"],
    ] as const)
      expect(
        (await receive(officer, id, { ...own, signedOn: daysFromToday(day) })).body.issues,
      ).toMatchObject([{ path: ["signedOn"], code }]);
    expect((await receive(officer, id, own)).body).toMatchObject({
      state: "done",
      receipt: { sha256: sha256(bytes), signedBy: "O. Penhallow" },
      can: { take: false, receive: false, withdraw: false },
    });
    expect((await receive(officer, id, own, 3)).body.code).toBe("wrong-state");
    expect((await officer.get(`/record-transfers/${id}/records.zip`)).status).toBe(409);
    expect((await officer.post("/record-transfers", asked(site))).status).toBe(201);

    const { tables, seals, rows } = await trailFaults(site.organizationId);
    expect(tables).toEqual(expect.arrayContaining(["record_transfers", "record_transfer_files"]));
    expect({ seals, rows }).toEqual({ seals: [], rows: [] });
  });

  test("a file that breaks off leaves no row, and the next one is whole", async () => {
    const site = await buildSite(US);
    // Enough years that the file doesn't fit between the two sides.
    await buildAssignment({
      worker: await buildWorker({ site, hiredOn: "1985-01-01" }),
      fromDate: "1985-01-01",
    });
    const officer = await personAt(site, "officer");
    const id = await standing(site);
    const server = testApp().listen(0);
    try {
      const { port } = server.address() as AddressInfo;
      await new Promise<void>((resolve) => {
        const sent = get(
          { port, path: `/api/record-transfers/${id}/records.zip`, headers: officer.headers },
          (answer) => answer.once("data", () => answer.destroy()).once("close", resolve),
        );
        sent.on("error", () => undefined);
      });
    } finally {
      await new Promise((resolve) => server.close(resolve));
    }
    expect((await listed(officer))[0].files).toEqual([]);
    expect(
      await select(
        "SELECT action FROM audit_events WHERE organization_id = $1 AND action LIKE '%transfer-file'",
        [site.organizationId],
      ),
    ).toEqual([{ action: "begin-transfer-file" }]);
    const bytes = await take(officer, id);
    expect((await receive(officer, id, receipt({ sha256: sha256(bytes) }), 1)).status).toBe(200);
  });

  test("the database itself holds to two people, to what was approved and to what went out", async () => {
    const site = await buildSite(US);
    const id = await standing(site, "proposed");
    await expect(
      select(
        "UPDATE record_transfers SET state = 'approved', approved_by = proposed_by, approved_at = now() WHERE id = $1",
        [id],
      ),
    ).rejects.toThrow(/check/);
    await expect(
      select("UPDATE record_transfers SET state = 'approved' WHERE id = $1", [id]),
    ).rejects.toThrow(/check/);
    const file = `INSERT INTO record_transfer_files (organization_id, transfer_id, sha256, size_bytes, years, taken_by)
      SELECT organization_id, id, decode('${HASH}', 'hex'), 1, '{}', proposed_by FROM record_transfers WHERE id = $1`;
    await expect(select(file, [id])).rejects.toThrow(/not approved/);
    const other = await buildSite({ ...US, organizationId: site.organizationId });
    const approved = await handedOut(other);
    const done = (hash: string) =>
      select(
        `UPDATE record_transfers SET state = 'done', received_sha256 = decode($2, 'hex'), signed_by = 'O', signed_on = current_date, received_by = proposed_by, received_at = now() WHERE id = $1`,
        [approved, hash],
      );
    await expect(done("cd".repeat(32))).rejects.toThrow(/record_transfers_received/);
    await expect(
      select("UPDATE record_transfers SET state = 'done' WHERE id = $1", [approved]),
    ).rejects.toThrow(/check/);
    await expect(
      select("DELETE FROM record_transfer_files WHERE transfer_id = $1", [approved]),
    ).rejects.toThrow(/append-only/);
    await done(HASH);
  });

  test("another organization gets nothing, and whoever looks after another site neither", async () => {
    const site = await buildSite(US);
    const id = await handedOut(site);
    const [foreign, elsewhere] = [
      await buildSite(US),
      await buildSite({ ...US, organizationId: site.organizationId }),
    ];
    const stranger = await personAt(foreign, "officer");
    const user = await buildUser({ organizationId: site.organizationId, roles: [] });
    await insert("role_grants", {
      organizationId: site.organizationId,
      userId: user.id,
      role: "officer",
      siteId: elsewhere.id,
    });
    for (const client of [stranger, await signInAs(user)]) {
      expect(await listed(client)).toEqual([]);
      expect((await client.get(`/record-transfers/${id}/records.zip`)).status).toBe(404);
      expect((await receive(client, id, receipt(), 1)).status).toBe(404);
      expect((await client.post("/record-transfers", asked(site))).status).toBe(404);
    }
  });

  test("it can come to nothing after it was approved, and says what rules ask", async () => {
    const site = await buildSite(US);
    const officer = await personAt(site, "officer");
    const id = await standing(site);
    expect((await decide(officer, id, "withdrawal")).body).toMatchObject({ state: "withdrawn" });
    expect((await decide(officer, id, "withdrawal", 2)).body.code).toBe("wrong-state");
    expect((await receive(officer, id, receipt())).body.code).toBe("wrong-state");
    expect((await officer.get("/record-transfers")).body.duties).toMatchObject([
      { kind: "hand-over", citation: "29 CFR 1910.95(m)(5)", sourceStatus: "from-memory" },
      { kind: "receive", citation: "29 CFR 1910.1020(h)(1)" },
      { kind: "tell-workers", monthsBefore: 3, citation: "29 CFR 1910.1020(h)(2)" },
    ]);
  });

  test("a person who is erased later is erased from it too, and the term is not touched", async () => {
    const site = await buildSite(US);
    const worker = await buildWorker({ site, hiredOn: "2015-01-01", leftOn: "2019-12-31" });
    const officer = await personAt(site, "officer");
    const before = (await officer.get("/retention/people")).body.rows;
    await officer.post("/record-transfers", {
      ...asked(site),
      note: `${worker.name} knows where the paper is`,
    });
    expect((await officer.get("/retention/people")).body.rows).toEqual(before);
    const { id: erasureId } = (
      await officer.post("/erasures", { siteId: site.id, workerIds: [worker.id] })
    ).body;
    const administrator = await personAt(site, "administrator");
    await administrator.send({
      method: "post",
      path: `/erasures/${erasureId}/approval`,
      revision: 1,
    });
    await erasePeople({ organizationId: site.organizationId, erasureId });
    const [transfer] = await listed(officer);
    expect(transfer.note).toMatch(/^Former worker [0-9A-F]{4} knows/);
    expect(
      await select(
        "SELECT 1 FROM audit_values WHERE organization_id = $1 AND position($2 IN recorded::text) > 0",
        [site.organizationId, worker.name],
      ),
    ).toEqual([]);
    expect(await trailFaults(site.organizationId)).toMatchObject({ seals: [], rows: [] });
  });
});
