import { describe, expect, test } from "vitest";
import { buildCrew, buildSite, buildUser, buildWorker, select, signInAs } from "../factories";
import { describeEndpoint } from "./five-cases";

const spanId = async (table: "crew_memberships" | "crew_supervisors", crewId: string) =>
  (await select<{ id: string }>(`SELECT id FROM ${table} WHERE crew_id = $1`, [crewId]))[0]?.id;

describeEndpoint({
  route: "GET /crews",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "?siteId=x" },
  namesNothing: true,
  call: async (site) => {
    await buildCrew({ site });
    return { method: "get", path: "/crews" };
  },
});
describeEndpoint({
  route: "GET /crews/:id",
  as: "officer",
  not: "administrator",
  event: null,
  bad: { path: "x" },
  call: async (site) => ({ method: "get", path: `/crews/${(await buildCrew({ site })).id}` }),
});
describeEndpoint({
  route: "GET /supervisors",
  as: "officer",
  not: "auditor",
  event: null,
  bad: { path: "?siteId=x" },
  call: async (site) => ({ method: "get", path: `/supervisors?siteId=${site.id}` }),
});
describeEndpoint({
  route: "POST /crews",
  as: "officer",
  not: "supervisor",
  event: "create-crew",
  bad: { body: { usualStart: "24:00" } },
  badField: "usualStart",
  call: async (site) => ({
    method: "post",
    path: "/crews",
    body: { siteId: site.id, name: "Early", usualStart: "05:45", usualLengthMin: 480 },
  }),
});
describeEndpoint({
  route: "PUT /crews/:id",
  as: "officer",
  not: "supervisor",
  event: "change-crew",
  bad: { body: { usualLengthMin: 1441 } },
  badField: "usualLengthMin",
  call: async (site) => ({
    method: "put",
    path: `/crews/${(await buildCrew({ site })).id}`,
    revision: 1,
    body: { siteId: site.id, name: "Night", usualStart: "18:00", usualLengthMin: 720 },
  }),
});
describeEndpoint({
  route: "POST /crews/:id/memberships",
  as: "officer",
  not: "supervisor",
  event: "add-crew-member",
  bad: { body: { fromDate: "2019-12-31" } },
  badField: "fromDate",
  call: async (site) => {
    const [crew, worker] = [await buildCrew({ site }), await buildWorker({ site })];
    return {
      method: "post",
      path: `/crews/${crew.id}/memberships`,
      body: { workerId: worker.id, fromDate: "2026-01-01" },
    };
  },
});
describeEndpoint({
  route: "POST /crews/:id/supervisors",
  as: "officer",
  not: "administrator",
  event: "add-crew-supervisor",
  bad: { body: { toDate: "2025-01-01" } },
  badField: "toDate",
  call: async (site) => {
    const crew = await buildCrew({ site });
    const user = await buildUser({ organizationId: site.organizationId, roles: ["supervisor"] });
    return {
      method: "post",
      path: `/crews/${crew.id}/supervisors`,
      body: { userId: user.id, fromDate: "2026-01-01" },
    };
  },
});
describeEndpoint({
  route: "PATCH /crews/:id/memberships/:spanId",
  as: "officer",
  not: "auditor",
  event: "end-crew-membership",
  bad: { body: { toDate: "2019-12-31" } },
  badField: "toDate",
  call: async (site) => {
    const { id } = await buildCrew({ site, members: [await buildWorker({ site })] });
    return {
      method: "patch",
      path: `/crews/${id}/memberships/${await spanId("crew_memberships", id)}`,
      revision: 1,
      body: { toDate: "2026-01-31" },
    };
  },
});
describeEndpoint({
  route: "PATCH /crews/:id/supervisors/:spanId",
  as: "officer",
  not: "supervisor",
  event: "end-crew-supervision",
  bad: { body: { toDate: null } },
  badField: "toDate",
  call: async (site) => {
    const user = await buildUser({ organizationId: site.organizationId, roles: ["supervisor"] });
    const { id } = await buildCrew({ site, supervisors: [user] });
    return {
      method: "patch",
      path: `/crews/${id}/supervisors/${await spanId("crew_supervisors", id)}`,
      revision: 1,
      body: { toDate: "2026-01-31" },
    };
  },
});

describe("a crew", () => {
  const lay = async () => {
    const site = await buildSite();
    const client = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    return { site, client, crew: await buildCrew({ site }), worker: await buildWorker({ site }) };
  };

  test("keeps the last day of a membership as it was said, and the next may begin the day after", async () => {
    const { client, crew, worker } = await lay();
    const path = `/crews/${crew.id}/memberships`;
    const first = await client.post(path, {
      workerId: worker.id,
      fromDate: "2026-01-01",
      toDate: "2026-01-31",
    });
    expect(first.body.memberships[0]).toMatchObject({
      fromDate: "2026-01-01",
      toDate: "2026-01-31",
      isLoan: false,
    });
    const overlapping = await client.post(path, { workerId: worker.id, fromDate: "2026-01-31" });
    expect([overlapping.status, overlapping.body.code]).toEqual([409, "membership-overlaps"]);
    const next = await client.post(path, {
      workerId: worker.id,
      fromDate: "2026-02-01",
      isLoan: true,
    });
    expect(
      next.body.memberships.map(({ fromDate, toDate }: { fromDate: string; toDate: string }) => [
        fromDate,
        toDate,
      ]),
    ).toEqual([
      ["2026-02-01", null],
      ["2026-01-01", "2026-01-31"],
    ]);
    expect(next.body).toMatchObject({ membersToday: 1, revision: 3 });
  });

  test("who joins a crew of their own leaves the one before, the day before; on loan they stay in it", async () => {
    const { site, client, crew, worker } = await lay();
    const before = await buildCrew({ site, members: [worker], fromDate: "2026-01-01" });
    const join = (into: { id: string }, more: object) =>
      client.post(`/crews/${into.id}/memberships`, { workerId: worker.id, ...more });
    const at = async () =>
      (await client.get(`/crews/${before.id}`)).body.memberships.map(
        ({ fromDate, toDate }: { fromDate: string; toDate: string }) => [fromDate, toDate],
      );
    const lent = { fromDate: "2026-02-01", toDate: "2026-02-07", isLoan: true };
    await join(await buildCrew({ site }), lent);
    expect(await at()).toEqual([["2026-01-01", null]]);
    await join(crew, { fromDate: "2026-03-01" });
    expect(await at()).toEqual([["2026-01-01", "2026-02-28"]]);
  });

  test("a change that saw an older roster is stale", async () => {
    const { client, crew, worker } = await lay();
    const added = await client.post(`/crews/${crew.id}/memberships`, {
      workerId: worker.id,
      fromDate: "2026-01-01",
    });
    const membership = added.body.memberships[0].id;
    const answer = await client.patch(
      `/crews/${crew.id}/memberships/${membership}`,
      { toDate: "2026-02-01" },
      1,
    );
    expect(answer.status).toBe(412);
    expect(answer.body.current.memberships).toHaveLength(1);
  });

  test("takes as supervisor only somebody who is one", async () => {
    const { client, site, crew } = await lay();
    const user = await buildUser({ organizationId: site.organizationId, roles: ["auditor"] });
    const answer = await client.post(`/crews/${crew.id}/supervisors`, {
      userId: user.id,
      fromDate: "2026-01-01",
    });
    expect(answer.body.issues[0]).toMatchObject({ path: ["userId"], code: "not-a-supervisor" });
  });

  test("a supervisor meets the members of the own time only, and no other crew", async () => {
    const { site, worker } = await lay();
    const user = await buildUser({ organizationId: site.organizationId, roles: ["supervisor"] });
    const crew = await buildCrew({
      site,
      members: [worker],
      supervisors: [user],
      fromDate: "2026-02-01",
    });
    const left = await buildWorker({ site });
    await select(
      "INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid) VALUES ($1, $2, $3, '[2025-01-01,2025-12-01)')",
      [site.organizationId, crew.id, left.id],
    );
    const client = await signInAs(user);
    const listed = await client.get("/crews");
    expect(listed.body.rows.map(({ id }: { id: string }) => id)).toEqual([crew.id]);
    const { memberships, supervisorNames, can } = (await client.get(`/crews/${crew.id}`)).body;
    expect(memberships.map(({ workerId }: { workerId: string }) => workerId)).toEqual([worker.id]);
    expect({ supervisorNames, can }).toEqual({
      supervisorNames: [user.name],
      can: { change: false, enterDay: false },
    });
  });
});

test("whoever holds the role at a site may be given its crews, with or without one already", async () => {
  const site = await buildSite();
  const other = await buildSite({ organizationId: site.organizationId });
  const { organizationId } = site;
  const officer = await buildUser({ organizationId, roles: ["officer"] });
  const everywhere = await buildUser({ organizationId, name: "A. Holm", roles: ["supervisor"] });
  const here = await buildUser({
    organizationId,
    name: "B. Quist",
    roles: ["supervisor"],
    siteId: site.id,
  });
  await buildUser({
    organizationId,
    name: "C. Elsewhere",
    roles: ["supervisor"],
    siteId: other.id,
  });
  const answer = await (await signInAs(officer)).get(`/supervisors?siteId=${site.id}`);
  expect(answer.body.rows).toEqual([
    { id: everywhere.id, name: "A. Holm" },
    { id: here.id, name: "B. Quist" },
  ]);
});
