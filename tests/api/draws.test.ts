import { createHash } from "node:crypto";
import { describe, expect, test } from "vitest";
import {
  buildDay,
  buildInstrument,
  buildSite,
  buildUser,
  buildWorker,
  type Client,
  insert,
  owner,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const auditorAt = async ({ organizationId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["auditor"] }));

const input = (site: Site, more: object = {}) => ({
  siteId: site.id,
  year: 2026,
  seed: "7 3 5",
  size: 5,
  ...more,
});

/** A draw kept without its events. */
async function buildDraw(site: Site, isMarked = false): Promise<string> {
  const { organizationId, id: siteId } = site;
  const worker = await buildWorker({ site });
  const date = "2026-03-02";
  const resultId = await buildDay(worker, date);
  const author = await buildUser({ organizationId, roles: ["auditor"] });
  const drawId = await insert("record_draws", {
    organizationId,
    siteId,
    year: 2026,
    seed: "1",
    drawnFrom: 1,
    drawnFromSha256: Buffer.alloc(32),
    authorId: author.id,
  });
  await owner().query(
    "INSERT INTO record_draw_items (organization_id, draw_id, position, worker_id, date, result_id) VALUES ($1, $2, 1, $3, $4, $5)",
    [organizationId, drawId, worker.id, date, resultId],
  );
  if (isMarked)
    await insert("record_draw_marks", {
      organizationId,
      drawId,
      position: 1,
      number: 1,
      word: "in-order",
      authorId: author.id,
    });
  return drawId;
}

describeEndpoint({
  route: "GET /draws",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: { path: "&limit=none" },
  badField: "limit",
  call: async (site) => {
    await buildDraw(site);
    return { method: "get", path: `/draws?siteId=${site.id}&year=2026` };
  },
});
describeEndpoint({
  route: "GET /draws/:id",
  as: "officer",
  not: "worker",
  event: null,
  bad: { path: "-none" },
  call: async (site) => ({ method: "get", path: `/draws/${await buildDraw(site)}` }),
});
describeEndpoint({
  route: "POST /draws",
  as: "auditor",
  not: "officer",
  event: "draw-records",
  bad: { body: { size: 51 } },
  badField: "size",
  call: async (site) => {
    await buildDay(await buildWorker({ site }), "2026-03-02");
    return { method: "post", path: "/draws", body: input(site) };
  },
});
describeEndpoint({
  route: "POST /draws/:id/marks",
  as: "auditor",
  not: "officer",
  event: "mark-drawn-record",
  bad: { body: { word: "question", note: " " } },
  badField: "note",
  call: async (site) => ({
    method: "post",
    path: `/draws/${await buildDraw(site)}/marks`,
    body: { position: 1, word: "in-order", note: "" },
  }),
});
describeEndpoint({
  route: "POST /draws/:id/signature",
  as: "auditor",
  not: "administrator",
  event: "sign-draw",
  bad: null,
  call: async (site) => ({
    method: "post",
    path: `/draws/${await buildDraw(site, true)}/signature`,
    revision: 2,
  }),
});

const draw = async (client: Client, body: object) => {
  const answer = await client.post("/draws", body);
  expect(answer.status).toBe(201);
  return answer.body;
};
const drawnIds = (view: { rows: { figures: { resultId: string } }[] }) =>
  view.rows.map(({ figures }) => figures.resultId);

describe("what is drawn", () => {
  test("follows from the seed and the results' ids alone, as anybody can work out again", async () => {
    const site = await buildSite();
    const ids: string[] = [];
    for (let day = 10; day < 30; day++)
      ids.push(await buildDay(await buildWorker({ site }), `2026-03-${day}`));
    await buildDay(await buildWorker({ site }), "2025-12-31");
    const client = await auditorAt(site);
    const byHand = (seed: string) =>
      ids
        .map((id) => ({ id, hash: createHash("sha256").update(`${seed} ${id}`).digest("hex") }))
        .sort((a, b) => (a.hash < b.hash ? -1 : 1))
        .map(({ id }) => id);
    const one = await draw(client, input(site));
    const again = await draw(client, input(site));
    const other = await draw(client, input(site, { seed: "8 1 1", size: 50 }));
    expect(drawnIds(one)).toEqual(byHand("7 3 5").slice(0, 5));
    expect(drawnIds(again)).toEqual(drawnIds(one));
    expect(drawnIds(other)).toEqual(byHand("8 1 1"));
    expect(one).toMatchObject({
      drawnFrom: 20,
      drawnFromSha256: createHash("sha256").update(ids.toSorted().join("\n")).digest("hex"),
    });
    const listed = (await client.get(`/draws?siteId=${site.id}&year=2026`)).body.rows;
    expect(listed.map(({ id }: { id: string }) => id)).toEqual([other.id, again.id, one.id]);
    expect((await client.get(`/draws?siteId=${site.id}&year=2025`)).body.rows).toEqual([]);
  });

  test("a year without a result has nothing to draw from", async () => {
    const site = await buildSite();
    const answer = await (await auditorAt(site)).post("/draws", input(site));
    expect(answer.status).toBe(422);
    expect(answer.body.code).toBe("nothing-to-do");
  });

  test("each record shows its whole line: run, field check, notice, finding, letter; and who read it is kept", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const worker = await buildWorker({ site });
    const instrument = await buildInstrument({ site });
    const date = "2026-03-02";
    const [run] = (
      await owner().query(
        `WITH v AS (INSERT INTO run_revisions (organization_id, run_id, number, duration_min, covers, check_before_db, check_after_db) VALUES ($1, gen_random_uuid(), 1, 480, 'shift', 94, 94.7) RETURNING id, run_id),
         r AS (INSERT INTO runs (id, organization_id, site_id, instrument_id, worker_id, date, current_revision_id) SELECT run_id, $1, $2, $3, $4, '2026-03-02', id FROM v)
         SELECT id AS "revisionId", run_id AS id FROM v`,
        [organizationId, site.id, instrument.id, worker.id],
      )
    ).rows;
    const resultId = await buildDay(worker, date, {
      refs: { shifts: [{ tasks: [{ levelId: null }], runRevisionIds: [run.revisionId] }] },
    });
    const findingId = await insert("findings", {
      organizationId,
      siteId: site.id,
      workerId: worker.id,
      kind: "no-protector",
      state: "new",
      firstDate: date,
      lastDate: date,
    });
    await insert("finding_evidence", {
      organizationId,
      findingId,
      workerId: worker.id,
      date,
      resultId,
    });
    const letterId = await insert("result_letters", {
      organizationId,
      siteId: site.id,
      workerId: worker.id,
      ruleSet: "eu-2003-10-ec",
      ruleSetVersion: 1,
      dueOn: "2026-03-17",
      language: "en",
      subject: "Results",
      bodyText: "91.3 dB",
    });
    await insert("result_letter_days", {
      organizationId,
      letterId,
      workerId: worker.id,
      date,
      resultId,
      criterion: "upper-action",
      isOver: true,
    });
    const auditor = await buildUser({ organizationId, roles: ["auditor"] });
    const view = await draw(await signInAs(auditor), input(site));
    expect(view.rows).toMatchObject([
      {
        position: 1,
        worker: { id: worker.id },
        runs: [{ id: run.id, checkBeforeDb: 94, checkAfterDb: 94.7 }],
        findings: [{ id: findingId, kind: "no-protector", state: "new" }],
        letters: [{ id: letterId, state: "to-print", dueOn: "2026-03-17" }],
        notices: [],
        isCurrent: true,
        mark: null,
      },
    ]);
    expect(
      await select("SELECT kind FROM record_reads WHERE worker_id = $1 AND reader_id = $2", [
        worker.id,
        auditor.id,
      ]),
    ).toEqual([{ kind: "result" }]);
  });
});

describe("marks and signature", () => {
  test("every record is marked before it is signed; the last mark counts, and nothing changes after", async () => {
    const site = await buildSite();
    for (const day of ["02", "03"]) await buildDay(await buildWorker({ site }), `2026-03-${day}`);
    const client = await auditorAt(site);
    const { id } = await draw(client, input(site));
    const mark = (position: number, word: string, note = "") =>
      client.post(`/draws/${id}/marks`, { position, word, note });
    const sign = (revision: number) =>
      client.send({ method: "post", path: `/draws/${id}/signature`, revision });
    expect((await mark(1, "in-order")).body).toMatchObject({ marked: 1, questions: 0 });
    expect((await sign(2)).body.code).toBe("wrong-state");
    expect((await mark(3, "in-order")).status).toBe(404);
    await mark(2, "in-order");
    const last = (await mark(2, "question", "Which calibrator was it?")).body;
    expect(last).toMatchObject({ marked: 2, questions: 1, revision: 4 });
    // Seen before the last mark.
    expect((await sign(3)).body.code).toBe("stale");
    const signed = await sign(4);
    expect(signed.status).toBe(201);
    expect(signed.body).toMatchObject({
      records: 2,
      questions: 1,
      signed: { by: expect.any(String) },
    });
    expect((await mark(1, "question", "Too late")).body.code).toBe("wrong-state");
    expect((await sign(5)).body.code).toBe("wrong-state");
    const [event] = await select<{ recorded: object }>(
      "SELECT v.recorded FROM audit_events e JOIN audit_values v ON v.event_id = e.id WHERE e.action = 'sign-draw' AND e.subject_id = $1",
      [id],
    );
    expect(event?.recorded).toEqual({ records: 2, questions: 1 });
  });

  test.each(["record_draws", "record_draw_items", "record_draw_marks", "record_draw_signatures"])(
    "%s is append-only",
    async (table) => {
      await expect(select(`UPDATE ${table} SET organization_id = organization_id`)).rejects.toThrow(
        /append-only/,
      );
    },
  );
});
