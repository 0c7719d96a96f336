import { describe, expect, test } from "vitest";
import {
  buildCrew,
  buildFinding,
  buildSite,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

type Site = Awaited<ReturnType<typeof buildSite>>;

/** A hand-over to whoever was made last in the organization, as the cases of one route sign in before they call. */
async function buildHandOver(site: Site, crewId?: string) {
  const { organizationId } = site;
  const author = await buildUser({ organizationId, roles: ["supervisor"] });
  const [known] = await select<{ id: string }>(
    "SELECT u.id FROM users u JOIN role_grants g ON g.user_id = u.id AND g.role = 'officer' WHERE u.organization_id = $1 ORDER BY u.created_at DESC LIMIT 1",
    [organizationId],
  );
  const recipientId = known?.id ?? (await buildUser({ organizationId, roles: ["officer"] })).id;
  return insert("hand_overs", {
    organizationId,
    siteId: site.id,
    crewId: crewId ?? (await buildCrew({ site })).id,
    sheetDate: daysFromToday(0),
    content: JSON.stringify({ sheetDate: daysFromToday(0), orders: [], absent: [], loans: [] }),
    note: "",
    authorId: author.id,
    recipientId,
  });
}

describeEndpoint({
  route: "GET /crews/:id/hand-over-draft",
  as: "officer",
  not: "auditor",
  event: null,
  bad: { path: "x" },
  call: async (site) => ({
    method: "get",
    path: `/crews/${(await buildCrew({ site })).id}/hand-over-draft`,
  }),
});
describeEndpoint({
  route: "GET /crews/:id/hand-overs",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "?cursor=x" },
  badField: "cursor",
  call: async (site) => {
    const crew = await buildCrew({ site });
    await buildHandOver(site, crew.id);
    return { method: "get", path: `/crews/${crew.id}/hand-overs` };
  },
});
describeEndpoint({
  route: "POST /crews/:id/hand-overs",
  as: "officer",
  not: "auditor",
  event: "give-hand-over",
  bad: { body: { recipientId: crypto.randomUUID() } },
  badField: "recipientId",
  call: async (site) => {
    const { organizationId } = site;
    const supervisor = await buildUser({ organizationId, roles: ["supervisor"] });
    const crew = await buildCrew({ site, supervisors: [supervisor] });
    const path = `/crews/${crew.id}/hand-overs`;
    const draft = await (await signInAs(supervisor)).get(`/crews/${crew.id}/hand-over-draft`);
    const { fingerprint } = draft.body;
    return { method: "post", path, body: { recipientId: supervisor.id, note: "", fingerprint } };
  },
});
describeEndpoint({
  route: "POST /hand-overs/:id/receipt",
  as: "officer",
  not: "auditor",
  event: "receive-hand-over",
  bad: null,
  call: async (site) => ({
    method: "post",
    path: `/hand-overs/${await buildHandOver(site)}/receipt`,
    body: {},
  }),
});

describe("from one shift to the next", () => {
  const lay = async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { organizationId } = site;
    const [early, late, stranger] = [
      await buildUser({ organizationId, name: "A. Early", roles: ["supervisor"] }),
      await buildUser({ organizationId, name: "B. Late", roles: ["supervisor"] }),
      await buildUser({ organizationId, name: "C. Stranger", roles: ["supervisor"] }),
    ];
    const officer = await buildUser({ organizationId, name: "D. Officer", roles: ["officer"] });
    const worker = await buildWorker({ site, name: "E. Worker" });
    const crew = await buildCrew({ site, members: [worker], supervisors: [early, late] });
    const findingId = await buildFinding({
      site,
      workerId: worker.id,
      kind: "no-protector",
      lastDate: daysFromToday(0),
    });
    return {
      worker,
      crew,
      findingId,
      late,
      officer,
      early: await signInAs(early),
      asLate: await signInAs(late),
      asStranger: await signInAs(stranger),
      asOfficer: await signInAs(officer),
    };
  };

  test("the list is made from the sheet, frozen as it was given, and acknowledged by whom it was given to", async () => {
    const { worker, crew, findingId, late, officer, early, asLate, asOfficer, asStranger } =
      await lay();
    const said = { kind: "cannot", text: "The right size is not in stock." };
    await early.send({
      method: "post",
      path: `/findings/${findingId}/steps`,
      body: said,
      revision: 1,
    });
    const draft = (await early.get(`/crews/${crew.id}/hand-over-draft`)).body;
    expect(draft.recipients).toEqual([
      { id: late.id, name: "B. Late" },
      { id: officer.id, name: "D. Officer" },
    ]);
    expect(draft.content.orders).toMatchObject([
      {
        workerName: "E. Worker",
        kind: "no-protector",
        cannot: { text: said.text, byName: "A. Early" },
      },
    ]);
    // The officer, whom it was said to, reads it where the finding waits, and the sheet keeps it.
    const waiting = (await asOfficer.get("/waiting")).body;
    expect(waiting.findings.find(({ id }: { id: string }) => id === findingId)).toMatchObject({
      cannot: { text: said.text, byName: "A. Early" },
    });
    const sheet = (await early.get(`/crews/${crew.id}/sheet`)).body;
    expect(sheet.expected.rows).toMatchObject([{ order: { cannot: { text: said.text } } }]);
    const given = await early.post(`/crews/${crew.id}/hand-overs`, {
      recipientId: late.id,
      note: "The fan is off until noon.",
      fingerprint: draft.fingerprint,
    });
    expect(given.body).toMatchObject({ toName: "B. Late", receivedAt: null, canReceive: false });

    // What happens afterwards changes nothing of it.
    const today = daysFromToday(0);
    const absence = { workerId: worker.id, fromDate: today, toDate: today };
    await early.post(`/crews/${crew.id}/absences`, absence);
    expect((await asLate.get(`/crews/${crew.id}/sheet`)).body.handOver).toMatchObject({
      byName: "A. Early",
    });
    const [row] = (await asLate.get(`/crews/${crew.id}/hand-overs`)).body.rows;
    expect(row).toMatchObject({
      content: draft.content,
      note: "The fan is off until noon.",
      canReceive: true,
    });

    const path = `/hand-overs/${row.id}/receipt`;
    expect((await asStranger.post(path, {})).status).toBe(404);
    expect((await asOfficer.post(path, {})).status).toBe(403);
    expect((await asLate.post(path, {})).body.receivedAt).not.toBeNull();
    expect((await asLate.post(path, {})).body.code).toBe("nothing-to-do");
    expect((await asLate.get(`/crews/${crew.id}/sheet`)).body.handOver).toBeNull();
    await expect(select("UPDATE hand_overs SET note = ''")).rejects.toThrow();
  });

  test("nothing is given that its giver did not see", async () => {
    const { worker, crew, late, early } = await lay();
    const before = (await early.get(`/crews/${crew.id}/hand-over-draft`)).body;
    const today = daysFromToday(0);
    await early.post(`/crews/${crew.id}/absences`, { workerId: worker.id, fromDate: today });
    const body = { recipientId: late.id, note: "", fingerprint: before.fingerprint };
    const refused = await early.post(`/crews/${crew.id}/hand-overs`, body);
    expect(refused.status).toBe(412);
    const { fingerprint, content } = refused.body.current;
    expect(content.absent).toEqual([{ workerName: "E. Worker", untilDate: null }]);
    const given = await early.post(`/crews/${crew.id}/hand-overs`, { ...body, fingerprint });
    expect(given.status).toBe(201);
  });

  test("a Can't that was undone is not handed over", async () => {
    const { crew, findingId, early } = await lay();
    const path = `/findings/${findingId}/steps`;
    const body = { kind: "cannot", text: "A slip of the thumb." };
    await early.send({ method: "post", path, body, revision: 1 });
    await early.send({ method: "post", path, body: { kind: "undo" }, revision: 2 });
    const { content } = (await early.get(`/crews/${crew.id}/hand-over-draft`)).body;
    expect(content.orders).toMatchObject([{ cannot: null }]);
  });

  test("earlier ones come in pages, the latest first", async () => {
    const { crew, late, early } = await lay();
    const { fingerprint } = (await early.get(`/crews/${crew.id}/hand-over-draft`)).body;
    for (const note of ["first", "second", "third"])
      await early.post(`/crews/${crew.id}/hand-overs`, { recipientId: late.id, note, fingerprint });
    const notes = ({ rows }: { rows: { note: string }[] }) => rows.map(({ note }) => note);
    const one = (await early.get(`/crews/${crew.id}/hand-overs?limit=2`)).body;
    expect(notes(one)).toEqual(["third", "second"]);
    const two = (await early.get(`/crews/${crew.id}/hand-overs?limit=2&cursor=${one.next}`)).body;
    expect([notes(two), two.next]).toEqual([["first"], null]);
  });
});
