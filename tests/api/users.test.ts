import { describe, expect, test } from "vitest";
import {
  buildCrew,
  buildOrganization,
  buildProtector,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

describeEndpoint({
  route: "GET /users",
  as: "administrator",
  not: "officer",
  event: null,
  bad: null,
  namesNothing: true,
  call: async ({ organizationId }) => {
    await buildUser({ organizationId });
    return { method: "get", path: "/users" };
  },
});
describeEndpoint({
  route: "POST /users",
  as: "administrator",
  not: "officer",
  event: "create-user",
  bad: { body: { email: null } },
  badField: "email",
  call: async (site) => ({
    method: "post",
    path: "/users",
    body: {
      name: "Ines Roth",
      email: `ines-${site.id}@dinward.example`,
      grants: [{ role: "officer", siteId: site.id }],
    },
  }),
});
describeEndpoint({
  route: "PUT /users/:id",
  as: "administrator",
  not: "auditor",
  event: "change-user",
  bad: { body: { grants: [{ role: "king" }] } },
  badField: "grants.0.role",
  call: async ({ organizationId }) => {
    const user = await buildUser({ organizationId, roles: ["auditor"] });
    return {
      method: "put",
      path: `/users/${user.id}`,
      revision: 1,
      body: { name: "Renamed", language: "de", workerId: null, grants: [{ role: "auditor" }] },
    };
  },
});
describeEndpoint({
  route: "POST /users/:id/revoke",
  as: "administrator",
  not: "officer",
  event: "revoke-user",
  bad: null,
  status: 200,
  call: async ({ organizationId }) => ({
    method: "post",
    path: `/users/${(await buildUser({ organizationId, roles: ["officer"] })).id}/revoke`,
    revision: 1,
  }),
});
describeEndpoint({
  route: "GET /search",
  as: "supervisor",
  not: "administrator",
  event: null,
  bad: { path: "x".repeat(101) },
  namesNothing: true,
  call: async (site) => {
    await buildTask({ site });
    return { method: "get", path: "/search?q=task" };
  },
});
describeEndpoint({
  route: "GET /audit-events",
  as: "auditor",
  not: "officer",
  event: null,
  bad: { path: "?cursor=bm8" },
  badField: "cursor",
  namesNothing: true,
  call: async () => ({ method: "get", path: "/audit-events" }),
});

const administratorOf = async (organizationId: string) => {
  const user = await buildUser({ organizationId, roles: ["administrator"] });
  return { user, client: await signInAs(user) };
};
const change = (name: string, ...grants: { role: string; siteId?: string }[]) => ({
  name,
  language: "en",
  workerId: null,
  grants,
});

describe("access", () => {
  test("with the last role taken away it is said as such; with one of two, the other stays", async () => {
    const organization = await buildOrganization();
    const { client } = await administratorOf(organization.id);
    const user = await buildUser({
      organizationId: organization.id,
      roles: ["officer", "auditor"],
    });
    const theirs = await signInAs(user);
    const put = (revision: number, ...grants: { role: string }[]) =>
      client.put(`/users/${user.id}`, change(user.name, ...grants), revision);
    expect((await put(1, { role: "auditor" })).status).toBe(200);
    expect((await theirs.get("/rule-sets")).status).toBe(200);
    expect((await theirs.get("/session")).body.user.roles).toEqual(["auditor"]);
    await select("UPDATE role_grants SET revoked_at = now() WHERE user_id = $1", [user.id]);
    const refused = await theirs.get("/rule-sets");
    expect([refused.status, refused.body.code]).toEqual([401, "access-taken"]);
  });

  test("ends at the next request, and can be granted anew to the same e-mail and identity", async () => {
    const organization = await buildOrganization();
    const { client } = await administratorOf(organization.id);
    const user = await buildUser({ organizationId: organization.id, roles: ["officer"] });
    await select("UPDATE users SET issuer = 'https://id.example', subject = 'ines' WHERE id = $1", [
      user.id,
    ]);
    const theirs = await signInAs(user);
    expect((await theirs.get("/rule-sets")).status).toBe(200);
    const revoked = await client.send({
      method: "post",
      path: `/users/${user.id}/revoke`,
      revision: 1,
    });
    expect(revoked.body).toMatchObject({
      isBound: false,
      revision: 2,
      can: { change: false, revoke: false },
    });
    const refused = await theirs.get("/rule-sets");
    expect([refused.status, refused.body.code]).toEqual([401, "access-taken"]);
    const { body: session } = await theirs.get("/session");
    expect(session).toMatchObject({ user: null, pendingName: user.name });
    expect(Date.now() - Date.parse(session.endedAt)).toBeLessThan(60_000);
    expect(
      (await client.send({ method: "post", path: `/users/${user.id}/revoke`, revision: 2 })).body
        .code,
    ).toBe("nothing-to-do");
    const again = await client.post("/users", {
      name: user.name,
      email: user.email,
      grants: [{ role: "auditor" }],
    });
    expect(again.status).toBe(201);
    await select("UPDATE users SET issuer = 'https://id.example', subject = 'ines' WHERE id = $1", [
      again.body.id,
    ]);
  });

  test("nobody revokes the own", async () => {
    const { user, client } = await administratorOf((await buildOrganization()).id);
    const answer = await client.send({
      method: "post",
      path: `/users/${user.id}/revoke`,
      revision: 1,
    });
    expect([answer.status, answer.body.code]).toEqual([403, "own-grant"]);
  });

  test("the last administrator stays, even where two step down at once", async () => {
    const organization = await buildOrganization();
    const [one, two] = [
      await administratorOf(organization.id),
      await administratorOf(organization.id),
    ];
    const stepDown = ({ user, client }: typeof one) =>
      client.put(`/users/${user.id}`, change(user.name, { role: "auditor" }), 1);
    const answers = await Promise.all([stepDown(one), stepDown(two)]);
    expect(answers.map(({ status }) => status).toSorted()).toEqual([200, 409]);
    expect(answers.map(({ body }) => body.code)).toContain("last-administrator");
  });

  test("who administers all sites stays, whoever administers one of them", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const { user, client } = await administratorOf(organizationId);
    const ofSite = { organizationId, siteId: site.id, roles: ["administrator" as const] };
    const local = await buildUser(ofSite);
    const down = await client.put(`/users/${user.id}`, change(user.name, { role: "auditor" }), 1);
    expect([down.status, down.body.code]).toEqual([409, "last-administrator"]);
    // The one of the site may go, for what they give and take is still in somebody's hands.
    const path = `/users/${local.id}/revoke`;
    expect((await client.send({ method: "post", path, revision: 1 })).status).toBe(200);
  });

  test("nobody ends access that reaches beyond the sites they administer", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    await administratorOf(organizationId);
    const elsewhere = await buildSite({ organizationId });
    const local = await signInAs(
      await buildUser({ organizationId, siteId: site.id, roles: ["administrator"] }),
    );
    const end = async (person: { id: string }) => {
      const { rows } = (await local.get("/users")).body;
      const { can } = rows.find(({ id }: { id: string }) => id === person.id);
      const { status } = await local.send({
        method: "post",
        path: `/users/${person.id}/revoke`,
        revision: 1,
      });
      return [can.revoke, status];
    };
    const officer = (siteId?: string) => buildUser({ organizationId, siteId, roles: ["officer"] });
    expect(await end(await officer(elsewhere.id))).toEqual([false, 403]);
    expect(await end(await officer())).toEqual([false, 403]);
    expect(await end(await officer(site.id))).toEqual([true, 200]);
  });

  test("roles are replaced as a whole, and hold from the next request on", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const { client } = await administratorOf(organizationId);
    const user = await buildUser({ organizationId, roles: ["officer", "auditor"] });
    const theirs = await signInAs(user);
    expect((await theirs.get("/areas")).status).toBe(200);
    const answer = await client.put(
      `/users/${user.id}`,
      change(user.name, { role: "administrator" }, { role: "auditor", siteId: site.id }),
      1,
    );
    expect(
      answer.body.grants.map(({ role, siteName }: { role: string; siteName: string }) => [
        role,
        siteName,
      ]),
    ).toEqual([
      ["administrator", null],
      ["auditor", site.name],
    ]);
    const statuses = [
      await theirs.get("/users"),
      await theirs.get("/areas"),
      await theirs.post("/areas", {}),
    ].map(({ status }) => status);
    expect(statuses).toEqual([200, 200, 403]);
    const [event] = await select<{ recorded: { granted: unknown[]; revoked: unknown[] } }>(
      "SELECT v.recorded FROM audit_events e JOIN audit_values v ON v.event_id = e.id WHERE e.subject_id = $1",
      [user.id],
    );
    expect([event?.recorded.granted.length, event?.recorded.revoked.length]).toEqual([2, 2]);
  });

  test("an administrator of one site grants nothing beyond it", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    await administratorOf(organizationId);
    const other = await buildSite({ organizationId });
    const client = await signInAs(
      await buildUser({ organizationId, roles: ["administrator"], siteId: site.id }),
    );
    const grant = (siteId: string | null) =>
      client.post("/users", {
        name: "Somebody",
        email: `${crypto.randomUUID()}@dinward.example`,
        grants: [{ role: "officer", siteId }],
      });
    expect([
      (await grant(null)).status,
      (await grant(other.id)).status,
      (await grant(site.id)).status,
    ]).toEqual([403, 404, 201]);
  });

  test.each([
    [
      "an e-mail that is taken, in other letters",
      "email",
      "email-taken",
      (email: string) => ({ email: email.toUpperCase(), grants: [{ role: "auditor" }] }),
    ],
    [
      "a worker's role without a worker",
      "workerId",
      "worker-needed",
      () => ({ email: `${crypto.randomUUID()}@dinward.example`, grants: [{ role: "worker" }] }),
    ],
  ])("%s is refused by its field", async (_, field, code, body) => {
    const organization = await buildOrganization();
    const { user, client } = await administratorOf(organization.id);
    const answer = await client.post("/users", { name: "Somebody", ...body(user.email) });
    expect(answer.status).toBe(422);
    expect(answer.body.issues[0]).toMatchObject({ path: [field], code });
  });

  test("one's own language is one's own to set", async () => {
    const user = await buildUser({ roles: ["worker"] });
    const client = await signInAs(user);
    const answer = await client.send({
      method: "put",
      path: "/me/settings",
      body: { language: "de" },
    });
    expect(answer.body).toEqual({ language: "de" });
    expect((await client.get("/session")).body.user.language).toBe("de");
    expect(
      (await client.send({ method: "put", path: "/me/settings", body: { language: "fr" } })).status,
    ).toBe(422);
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE actor_id = $1",
      [user.id],
    );
    expect(events).toEqual([{ action: "set-own-language" }]);
  });
});

describe("search", () => {
  test("finds workers by name and number, crews, tasks and protectors, eight of each at most", async () => {
    const site = await buildSite();
    for (let count = 0; count < 9; count += 1)
      await buildWorker({ site, name: `Test person ${count}`, employeeNumber: `7${count}` });
    await buildCrew({ site, name: "Test bench" });
    await buildTask({ site, name: "Testing engines" });
    await buildProtector({ organizationId: site.organizationId, name: "Muff for the test cell" });
    const client = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const found = (await client.get("/search?q=TEST")).body;
    expect(Object.values<unknown[]>(found).map(({ length }) => length)).toEqual([8, 1, 1, 1]);
    expect((await client.get("/search?q=person%2073")).body.workers).toMatchObject([
      { name: "Test person 3", employeeNumber: "73", siteName: site.name },
    ]);
    expect((await client.get("/search?q=%25")).body.workers).toEqual([]);
  });
});

describe("the trail", () => {
  test("pages back from the latest, with who, when and what", async () => {
    const site = await buildSite();
    const officer = await buildUser({ organizationId: site.organizationId, roles: ["officer"] });
    const client = await signInAs(officer);
    for (const name of ["One", "Two", "Three"])
      await client.post("/areas", { siteId: site.id, name });
    const auditor = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["auditor"] }),
    );
    const first = (await auditor.get("/audit-events?limit=2")).body;
    expect(first.rows.map(({ values }: { values: { name: string } }) => values.name)).toEqual([
      "Three",
      "Two",
    ]);
    expect(first.rows[0]).toMatchObject({
      actorName: officer.name,
      action: "create-area",
      subjectKind: "area",
      isSealed: false,
    });
    const second = (await auditor.get(`/audit-events?limit=2&cursor=${first.next}`)).body;
    expect(second).toMatchObject({ rows: [{ values: { name: "One" } }], next: null });
  });

  test("an administrator sees people, roles and sites; an auditor of one site what is about it", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const other = await buildSite({ organizationId });
    const { client: administrator } = await administratorOf(organizationId);
    const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
    await officer.post("/areas", { siteId: site.id, name: "Here" });
    await officer.post("/areas", { siteId: other.id, name: "There" });
    await administrator.post("/users", {
      name: "Somebody",
      email: `${crypto.randomUUID()}@dinward.example`,
      grants: [{ role: "auditor" }],
    });
    const auditor = await signInAs(
      await buildUser({ organizationId, roles: ["auditor"], siteId: site.id }),
    );
    const kinds = async (client: typeof auditor) =>
      (await client.get("/audit-events")).body.rows.map(
        (row: { subjectKind: string; values: { name: string } }) =>
          `${row.subjectKind} ${row.values.name}`,
      );
    expect(await kinds(administrator)).toEqual(["user Somebody"]);
    expect(await kinds(auditor)).toEqual(["area Here"]);
  });
});
