import { describe, expect, test } from "vitest";
import { erasePeople } from "../../server/jobs/erase-people";
import { sealTrail } from "../../server/lib/audit";
import { inTransaction, row } from "../../server/lib/db";
import { checkRows, checkSeals, trailState } from "../../server/queries/trail-check";
import {
  buildDay,
  buildFinding,
  buildSite,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  insert,
  owner,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const US = { governingRuleSet: "us-general-industry", timeZone: "America/Chicago" };
const personAt = async (site: Site, role: "officer" | "administrator") =>
  signInAs(await buildUser({ organizationId: site.organizationId, roles: [role] }));

/** Somebody whose two years are over; the site's rule set says so. */
const longGone = (site: Site, more: object = {}) =>
  buildWorker({ site, hiredOn: "2015-01-01", leftOn: "2019-12-31", ...more });
const usSite = (organizationId?: string) => buildSite({ ...US, organizationId });

async function proposed(site: Site): Promise<string> {
  const worker = await longGone(site);
  const author = await buildUser({ organizationId: site.organizationId, roles: ["officer"] });
  const erasureId = await insert("erasures", {
    organizationId: site.organizationId,
    siteId: site.id,
    proposedBy: author.id,
  });
  await owner().query(
    "INSERT INTO erasure_people (erasure_id, organization_id, worker_id, keep_until) VALUES ($1, $2, $3, '2019-12-31')",
    [erasureId, site.organizationId, worker.id],
  );
  return erasureId;
}
const held = async (site: Site, workerId: string | null = null) =>
  insert("legal_holds", {
    organizationId: site.organizationId,
    siteId: site.id,
    workerId,
    reason: "A claim is open",
    placedBy: (await buildUser({ organizationId: site.organizationId, roles: ["officer"] })).id,
  });

describeEndpoint({
  route: "GET /retention",
  as: "officer",
  not: "auditor",
  event: null,
  bad: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/retention" }),
});
describeEndpoint({
  route: "PUT /retention",
  as: "administrator",
  not: "officer",
  event: "set-retention-term",
  bad: { body: { yearsAfterLeaving: 101 } },
  badField: "yearsAfterLeaving",
  namesNothing: true,
  call: async () => ({
    method: "put",
    path: "/retention",
    revision: 0,
    body: { yearsAfterLeaving: 10 },
  }),
});
describeEndpoint({
  route: "GET /retention/people",
  as: "administrator",
  not: "auditor",
  event: null,
  bad: { path: "&limit=none" },
  badField: "limit",
  call: async (site) => ({ method: "get", path: `/retention/people?siteId=${site.id}` }),
});
describeEndpoint({
  route: "GET /legal-holds",
  as: "officer",
  not: "supervisor",
  event: null,
  bad: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/legal-holds" }),
});
describeEndpoint({
  route: "POST /legal-holds",
  as: "administrator",
  not: "auditor",
  event: "place-hold",
  bad: { body: { reason: " " } },
  badField: "reason",
  call: async (site) => ({
    method: "post",
    path: "/legal-holds",
    body: { siteId: site.id, reason: "A claim is open" },
  }),
});
describeEndpoint({
  route: "POST /legal-holds/:id/lift",
  as: "officer",
  not: "worker",
  status: 200,
  event: "lift-hold",
  bad: { body: { reason: "" } },
  badField: "reason",
  call: async (site) => ({
    method: "post",
    path: `/legal-holds/${await held(site)}/lift`,
    body: { reason: "The claim was settled" },
  }),
});
describeEndpoint({
  route: "GET /erasures",
  as: "administrator",
  not: "supervisor",
  event: null,
  bad: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/erasures" }),
});
describeEndpoint({
  route: "POST /erasures",
  as: "officer",
  not: "auditor",
  event: "propose-erasure",
  bad: { body: { workerIds: [] } },
  badField: "workerIds",
  call: async (site) => {
    await select(
      "INSERT INTO retention_terms (organization_id, number, years_after_leaving, set_by) VALUES ($1, 1, 1, $2)",
      [site.organizationId, (await buildUser({ organizationId: site.organizationId })).id],
    );
    const { id } = await longGone(site);
    return { method: "post", path: "/erasures", body: { siteId: site.id, workerIds: [id] } };
  },
});
describeEndpoint({
  route: "POST /erasures/:id/approval",
  as: "administrator",
  not: "worker",
  status: 200,
  event: "approve-erasure",
  bad: null,
  call: async (site) => ({
    method: "post",
    path: `/erasures/${await proposed(site)}/approval`,
    revision: 1,
  }),
});
describeEndpoint({
  route: "POST /erasures/:id/withdrawal",
  as: "officer",
  not: "auditor",
  status: 200,
  event: "withdraw-erasure",
  bad: null,
  call: async (site) => ({
    method: "post",
    path: `/erasures/${await proposed(site)}/withdrawal`,
    revision: 1,
  }),
});

const people = async (client: Client, show: "due" | "kept", more = "") =>
  (await client.get(`/retention/people?show=${show}${more}`)).body.rows as {
    id: string;
    keepUntil: string | null;
    keptBecause: string | null;
    citation: string | null;
  }[];
const propose = (client: Client, site: Site, ...workerIds: string[]) =>
  client.post("/erasures", { siteId: site.id, workerIds });
const decide = (client: Client, id: string, what: "approval" | "withdrawal", revision = 1) =>
  client.send({ method: "post", path: `/erasures/${id}/${what}`, revision });

describe("who is due", () => {
  test("is who left and whose longest term is over; nobody who works here, and nobody without a term", async () => {
    const site = await usSite();
    const european = await buildSite({ organizationId: site.organizationId });
    const gone = await longGone(site);
    await buildDay(gone, "2019-12-01");
    await buildWorker({ site });
    await buildWorker({ site, leftOn: daysFromToday(0) });
    const unsaid = await longGone(european);
    const recent = await longGone(site, { leftOn: daysFromToday(-20) });
    await buildDay(recent, daysFromToday(-30));
    const client = await personAt(site, "officer");
    expect(await people(client, "due")).toMatchObject([
      { id: gone.id, keepUntil: "2021-12-01", citation: "29 CFR 1910.95(m)(3)(i)" },
    ]);
    expect(await people(client, "kept")).toMatchObject([
      { id: unsaid.id, keepUntil: null, keptBecause: "no-term" },
      { id: recent.id, keptBecause: "not-due" },
    ]);
    expect((await client.get("/retention")).body.counts).toEqual({ due: 1, proposed: 0, kept: 2 });
    const administrator = await personAt(site, "administrator");
    const set = await administrator.send({
      method: "put",
      path: "/retention",
      revision: 0,
      body: { yearsAfterLeaving: 40 },
    });
    expect(set.body).toMatchObject({ yearsAfterLeaving: 40, revision: 1 });
    expect(await people(client, "due")).toEqual([]);
    expect(await people(client, "kept")).toHaveLength(3);
  });

  test("comes in pages that go on where the last ended", async () => {
    const site = await usSite();
    for (const day of ["01", "02", "03"]) await longGone(site, { leftOn: `2019-03-${day}` });
    const client = await personAt(site, "officer");
    const first = (await client.get("/retention/people?limit=2")).body;
    const second = (await client.get(`/retention/people?limit=2&cursor=${first.next}`)).body;
    expect([...first.rows, ...second.rows].map(({ leftOn }) => leftOn)).toEqual([
      "2019-03-01",
      "2019-03-02",
      "2019-03-03",
    ]);
    expect(second.next).toBeNull();
  });

  test("a hold on a worker or a site, an open finding, another role: each keeps, and lifting lets go", async () => {
    const site = await usSite();
    const [byHold, byFinding, byRole] = [
      await longGone(site),
      await longGone(site),
      await longGone(site),
    ];
    await buildFinding({ site, workerId: byFinding.id });
    await buildUser({
      organizationId: site.organizationId,
      workerId: byRole.id,
      roles: ["worker", "supervisor"],
    });
    const client = await personAt(site, "officer");
    const hold = (
      await client.post("/legal-holds", {
        siteId: site.id,
        workerId: byHold.id,
        reason: "A claim is open",
      })
    ).body;
    const because = async () =>
      Object.fromEntries((await people(client, "kept")).map((one) => [one.id, one.keptBecause]));
    expect(await because()).toEqual({
      [byHold.id]: "held",
      [byFinding.id]: "open-finding",
      [byRole.id]: "other-role",
    });
    const refused = await propose(client, site, byHold.id);
    expect(refused.status).toBe(422);
    expect(refused.body.issues).toMatchObject([{ path: ["workerIds", 0], code: "not-erasable" }]);
    expect((await client.post(`/legal-holds/${hold.id}/lift`, { reason: "Settled" })).status).toBe(
      200,
    );
    expect((await people(client, "due")).map(({ id }) => id)).toEqual([byHold.id]);
    await client.post("/legal-holds", { siteId: site.id, reason: "An inquiry into the site" });
    expect(Object.values(await because())).toEqual(["held", "held", "held"]);
  });
});

async function trailFaults(organizationId: string) {
  while ((await inTransaction({ organizationId }, () => sealTrail(organizationId))) === 5000);
  return inTransaction({ organizationId, readOnly: true }, async () => {
    const { tables, foreign } = await trailState(organizationId);
    const seals = await checkSeals(organizationId, 0);
    const ofRows = [];
    for (const table of tables) {
      const { faults } = await checkRows(organizationId, table);
      ofRows.push(...faults.map((fault) => ({ table, ...fault })));
    }
    return { seals: seals.faults, rows: ofRows, erased: seals.erased, foreign };
  });
}

/** Every table and column of the organization in which a text stands. */
async function whereIs(text: string, organizationId: string): Promise<string[]> {
  const tables = await select<{ name: string; owner: string }>(
    "SELECT table_name AS name, owner_column AS owner FROM watched_tables UNION SELECT 'audit_values', 'organization_id'",
  );
  const found: string[] = [];
  for (const { name, owner: column } of tables) {
    const [held] = await select<{ count: number }>(
      `SELECT count(*)::int AS count FROM ${name} t WHERE t.${column} = $1 AND position($2 IN t::text) > 0`,
      [organizationId, text],
    );
    if (held!.count > 0) found.push(name);
  }
  return found;
}

describe("erasing", () => {
  test("takes two people, leaves the results with their inputs, and the trail holds", async () => {
    const site = await usSite();
    const { organizationId } = site;
    const worker = await longGone(site, { name: "Ó. O’Brien-“Łuk”", employeeNumber: "28 41-X" });
    const other = await longGone(site, { name: "Ó. O’Brien-“Łuk”s brother" });
    const account = await buildUser({
      organizationId,
      workerId: worker.id,
      name: worker.name,
      roles: ["worker"],
    });
    const resultId = await buildDay(worker, "2019-12-01");
    const findingId = await insert("findings", {
      organizationId,
      siteId: site.id,
      workerId: worker.id,
      kind: "problem-reported",
      state: "closed",
      facts: { text: "My left ear rings" },
      firstDate: "2019-12-01",
      lastDate: "2019-12-01",
      closedOn: "2019-12-05",
      closingReason: "Seen by the doctor: left ear rings",
    });
    await insert("finding_steps", {
      organizationId,
      findingId,
      kind: "comment",
      text: "Said that the left ear rings",
    });
    const letter = {
      organizationId,
      siteId: site.id,
      ruleSet: "us-general-industry",
      ruleSetVersion: 1,
      dueOn: "2020-01-17",
      language: "en",
      subject: "Your results",
    };
    const letterId = await insert("result_letters", {
      ...letter,
      workerId: worker.id,
      bodyText: `Hello ${worker.name},\n\n${worker.name}, ${worker.employeeNumber}\n91.3 dB on 28 days`,
    });
    const officer = await personAt(site, "officer");
    const administrator = await personAt(site, "administrator");
    await owner().query(
      "INSERT INTO worker_requirement_reasons (worker_id, organization_id, reason) VALUES ($1, $2, 'A hearing aid')",
      [worker.id, organizationId],
    );
    const before = await select("SELECT * FROM day_results WHERE id = $1", [resultId]);

    const { id } = (await propose(officer, site, worker.id)).body;
    expect((await propose(administrator, site, worker.id)).status).toBe(422);
    const own = await decide(officer, id, "approval");
    expect(own.status).toBe(403);
    expect(own.body.code).toBe("own-proposal");
    expect((await decide(administrator, id, "approval", 2)).body.code).toBe("stale");
    expect((await decide(administrator, id, "approval")).body).toMatchObject({
      state: "approved",
      waiting: 1,
    });
    await erasePeople({ organizationId, erasureId: id });
    await erasePeople({ organizationId, erasureId: id });

    const [done] = (await administrator.get("/erasures")).body.rows;
    expect(done).toMatchObject({ state: "done", erased: 1, waiting: 0, kept: [] });
    const [now] = await select<{ name: string; number: string }>(
      "SELECT name, employee_number AS number FROM workers WHERE id = $1",
      [worker.id],
    );
    expect(now?.name).toBe(`Former worker ${now?.number}`);
    expect(now?.number).toMatch(/^[0-9A-F]{4}$/);
    // The brother's name begins with the same letters and stays.
    expect(await whereIs(`${worker.name}s brother`, organizationId)).toEqual(["workers"]);
    await select("UPDATE workers SET name = 'B. Brother' WHERE id = $1", [other.id]);
    for (const text of [
      worker.name,
      account.email,
      worker.employeeNumber,
      "left ear rings",
      "hearing aid",
    ])
      expect(await whereIs(text, organizationId)).toEqual([]);
    const [kept] = await select<{ body: string }>(
      "SELECT body_text AS body FROM result_letters WHERE id = $1",
      [letterId],
    );
    expect(kept?.body).toBe(
      `Hello ${now?.name},\n\n${now?.name}, ${now?.number}\n91.3 dB on 28 days`,
    );
    expect(await select("SELECT * FROM day_results WHERE id = $1", [resultId])).toEqual(before);
    expect(
      await select("SELECT 1 FROM users WHERE id = $1 AND revoked_at IS NOT NULL", [account.id]),
    ).toHaveLength(1);
    expect(await people(officer, "due")).toMatchObject([{ id: other.id }]);

    const checked = await trailFaults(organizationId);
    expect(checked.seals).toEqual([]);
    // What tests put in past the application is in the trail by its triggers.
    expect(checked.rows).toEqual([]);
    expect(
      await select(
        "SELECT actor_id, recorded->'values' AS values FROM audit_events e JOIN audit_values v ON v.event_id = e.id WHERE e.action = 'erase-person' AND subject_id = $1",
        [worker.id],
      ),
    ).toHaveLength(1);
  });

  test("values that an erasure took are told from values that were removed", async () => {
    const site = await usSite();
    const { organizationId } = site;
    const worker = await longGone(site);
    const officer = await personAt(site, "officer");
    await officer.post("/legal-holds", {
      siteId: site.id,
      workerId: worker.id,
      reason: "A claim is open",
    });
    const [hold] = (await officer.get("/legal-holds")).body.rows;
    await officer.post(`/legal-holds/${hold.id}/lift`, { reason: "It was settled" });
    const { id } = (await propose(officer, site, worker.id)).body;
    await decide(await personAt(site, "administrator"), id, "approval");
    await erasePeople({ organizationId, erasureId: id });
    expect(await whereIs("It was settled", organizationId)).toEqual([]);
    expect(await trailFaults(organizationId)).toMatchObject({ seals: [], rows: [], erased: 2 });
    await select(
      "DELETE FROM audit_values v USING audit_events e WHERE e.id = v.event_id AND e.action = 'propose-erasure' AND e.subject_id = $1",
      [id],
    );
    expect((await trailFaults(organizationId)).seals).toMatchObject([
      { kind: "values-removed", event: { action: "propose-erasure" } },
    ]);
  });

  test("a hold that comes after the approval stops it there, and the order says so", async () => {
    const site = await usSite();
    const { organizationId } = site;
    const [first, second] = [await longGone(site), await longGone(site)];
    const officer = await personAt(site, "officer");
    const { id } = (await propose(officer, site, first.id, second.id)).body;
    await decide(await personAt(site, "administrator"), id, "approval");
    await held(site, second.id);
    await erasePeople({ organizationId, erasureId: id });
    expect((await officer.get("/erasures")).body.rows).toMatchObject([
      { state: "done", erased: 1, kept: [{ because: "held", count: 1 }] },
    ]);
    expect(await select("SELECT name FROM workers WHERE id = $1", [second.id])).toEqual([
      { name: second.name },
    ]);
  });

  test("a restart goes on where it stopped, with everybody erased once", async () => {
    const site = await usSite();
    const { organizationId } = site;
    const ids: string[] = [];
    for (let count = 0; count < 3; count++) ids.push((await longGone(site)).id);
    const officer = await personAt(site, "officer");
    const { id } = (await propose(officer, site, ...ids)).body;
    await decide(await personAt(site, "administrator"), id, "approval");
    let done = 0;
    await erasePeople({ organizationId, erasureId: id }, () => {
      done += 1;
      return done > 1;
    });
    expect((await officer.get("/erasures")).body.rows).toMatchObject([
      { state: "approved", erased: 1, waiting: 2 },
    ]);
    await Promise.all([
      erasePeople({ organizationId, erasureId: id }),
      erasePeople({ organizationId, erasureId: id }),
    ]);
    expect((await officer.get("/erasures")).body.rows).toMatchObject([
      { state: "done", erased: 3, waiting: 0 },
    ]);
    expect(
      await select(
        "SELECT 1 FROM audit_events WHERE organization_id = $1 AND action = 'erase-person'",
        [organizationId],
      ),
    ).toHaveLength(3);
  });

  test("the database itself erases nobody who was not approved, is employed, or is held", async () => {
    const site = await usSite();
    const { organizationId } = site;
    const erasureId = await proposed(site);
    const [one] = await select<{ workerId: string }>(
      `SELECT worker_id AS "workerId" FROM erasure_people WHERE erasure_id = $1`,
      [erasureId],
    );
    const { workerId } = one!;
    const erase = () =>
      inTransaction({ organizationId }, async () => {
        return row("SELECT erase_person(:erasureId, :workerId, 'F', 'F', 'gone') AS erased", {
          erasureId,
          workerId,
        });
      });
    await expect(erase()).rejects.toThrow(/refused/);
    const second = await buildUser({ organizationId, roles: ["administrator"] });
    await select(
      "UPDATE erasures SET state = 'approved', approved_by = $2, approved_at = now() WHERE id = $1",
      [erasureId, second.id],
    );
    const holdId = await held(site);
    await expect(erase()).rejects.toThrow(/refused/);
    await select(
      "UPDATE legal_holds SET lifted_at = now(), lifted_by = placed_by, lifted_reason = 'Settled' WHERE id = $1",
      [holdId],
    );
    await select("UPDATE workers SET left_on = NULL WHERE id = $1", [workerId]);
    await expect(erase()).rejects.toThrow(/refused/);
    await expect(
      select("UPDATE erasures SET approved_by = proposed_by WHERE id = $1", [erasureId]),
    ).rejects.toThrow(/check/);
  });

  test("a proposal is withdrawn once, and its people can be proposed again", async () => {
    const site = await usSite();
    const worker = await longGone(site);
    const officer = await personAt(site, "officer");
    const { id } = (await propose(officer, site, worker.id)).body;
    expect((await decide(officer, id, "withdrawal")).body).toMatchObject({ state: "withdrawn" });
    expect((await decide(officer, id, "withdrawal", 2)).body.code).toBe("wrong-state");
    expect((await propose(officer, site, worker.id)).status).toBe(201);
  });
});
