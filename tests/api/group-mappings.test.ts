import { randomUUID } from "node:crypto";
import { describe, expect, test } from "vitest";
import { admitByGroup, followGroups } from "../../server/commands/follow-groups";
import { inTransaction } from "../../server/lib/db";
import type { Role } from "../../server/lib/policy";
import {
  buildOrganization,
  buildSite,
  buildUser,
  insert,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

describeEndpoint({
  route: "GET /group-mappings",
  as: "administrator",
  not: "auditor",
  event: null,
  bad: null,
  namesNothing: true,
  call: async (site) => {
    await mappingOf(site.organizationId, "Readers", "auditor", site.id);
    return { method: "get", path: "/group-mappings" };
  },
});
describeEndpoint({
  route: "POST /group-mappings",
  as: "administrator",
  not: "officer",
  event: "map-group",
  bad: { body: { role: "worker" } },
  badField: "role",
  call: async (site) => ({
    method: "post",
    path: "/group-mappings",
    body: { groupName: "Readers", role: "auditor", siteId: site.id },
  }),
});
describeEndpoint({
  route: "POST /group-mappings/:id/end",
  as: "administrator",
  not: "officer",
  event: "end-group-mapping",
  bad: null,
  status: 200,
  call: async (site) => ({
    method: "post",
    path: `/group-mappings/${await mappingOf(site.organizationId, "Readers", "auditor", site.id)}/end`,
  }),
});

async function mappingOf(
  organizationId: string,
  groupName: string,
  role: Role,
  siteId: string | null = null,
): Promise<string> {
  const author = await buildUser({ organizationId });
  return insert("group_mappings", { organizationId, groupName, role, siteId, authorId: author.id });
}

const follow = (user: { id: string; organizationId: string }, ...groups: string[]) =>
  inTransaction({ organizationId: user.organizationId }, () => followGroups(user, groups));
const held = async (userId: string) =>
  (
    await select<{ role: string }>(
      "SELECT role || CASE WHEN mapping_id IS NULL THEN '' ELSE ' by group' END AS role FROM role_grants WHERE user_id = $1 AND revoked_at IS NULL ORDER BY 1",
      [userId],
    )
  ).map(({ role }) => role);
const events = async (subjectId: string) =>
  select<{ action: string; recorded: Record<string, unknown> }>(
    "SELECT e.action, v.recorded FROM audit_events e JOIN audit_values v ON v.event_id = e.id WHERE e.subject_id = $1 ORDER BY e.id",
    [subjectId],
  );

describe("roles follow groups at sign-in", () => {
  test("what a group gives comes and goes with it; what was given by hand stays", async () => {
    const { id: organizationId } = await buildOrganization();
    await mappingOf(organizationId, "Readers", "auditor");
    await mappingOf(organizationId, "Safety", "officer");
    const user = await buildUser({ organizationId, roles: ["auditor", "supervisor"] });
    await follow(user, "Readers", "Safety", "Canteen");
    expect(await held(user.id)).toEqual([
      "auditor",
      "auditor by group",
      "officer by group",
      "supervisor",
    ]);
    await follow(user, "Readers", "Safety");
    await follow(user, "Safety");
    expect(await held(user.id)).toEqual(["auditor", "officer by group", "supervisor"]);
    await follow(user);
    expect(await held(user.id)).toEqual(["auditor", "supervisor"]);
    expect((await events(user.id)).map(({ action }) => action)).toEqual(
      Array(3).fill("follow-groups"),
    );
  });

  test("the last administrator stays one, and the trail says so; with another the role goes", async () => {
    const { id: organizationId } = await buildOrganization();
    await mappingOf(organizationId, "Keepers", "administrator");
    const user = await buildUser({ organizationId });
    await follow(user, "Keepers");
    await follow(user);
    expect(await held(user.id)).toEqual(["administrator by group"]);
    expect((await events(user.id)).at(-1)?.recorded).toEqual({
      keptAsLastAdministrator: [{ role: "administrator", siteId: null }],
    });
    await buildUser({ organizationId, roles: ["administrator"] });
    await follow(user);
    expect(await held(user.id)).toEqual([]);
  });

  test("of two who lose the role at one moment one stays", async () => {
    const { id: organizationId } = await buildOrganization();
    await mappingOf(organizationId, "Keepers", "administrator");
    const users = [await buildUser({ organizationId }), await buildUser({ organizationId })];
    for (const user of users) await follow(user, "Keepers");
    await Promise.all(users.map((user) => follow(user)));
    const left = await Promise.all(users.map(({ id }) => held(id)));
    expect(left.flat()).toEqual(["administrator by group"]);
  });

  test("a group of that name in another organization gives nothing here", async () => {
    await mappingOf((await buildOrganization()).id, "Readers", "auditor");
    const user = await buildUser({ organizationId: (await buildOrganization()).id });
    await follow(user, "Readers");
    expect(await held(user.id)).toEqual([]);
  });

  test("somebody new is let in; whose access was ended by hand is not", async () => {
    const { id: organizationId } = await buildOrganization();
    const identity = () => ({
      issuer: "https://id.example",
      subject: randomUUID(),
      email: `${randomUUID()}@dinward.example`,
      name: "Ned Newcomer",
    });
    const admit = (who: ReturnType<typeof identity>) =>
      inTransaction({ organizationId }, () => admitByGroup(organizationId, who));
    const somebody = identity();
    const made = await admit(somebody);
    expect((await events(made!.id)).map(({ action }) => action)).toEqual(["admit-by-group"]);
    expect(await admit(somebody)).toBeNull();
    const ended = identity();
    const user = await buildUser({ organizationId, email: ended.email, roles: ["auditor"] });
    await select("UPDATE users SET revoked_at = now() WHERE id = $1", [user.id]);
    expect(await admit(ended)).toBeNull();
  });
});

describe("mappings", () => {
  const administratorOf = async (site: Site, siteId?: string) =>
    signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["administrator"], siteId }),
    );

  test("end with the roles that they gave, at once, and the page of roles keeps them apart", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const client = await administratorOf(site);
    const user = await buildUser({ organizationId, roles: ["supervisor"] });
    const mapping = (
      await client.post("/group-mappings", { groupName: "Readers", role: "auditor" })
    ).body;
    await follow(user, "Readers");
    const theirs = await signInAs(user);
    expect((await theirs.get("/letters")).status).toBe(200);
    const changed = await client.put(
      `/users/${user.id}`,
      { name: user.name, language: "en", workerId: null, grants: [{ role: "supervisor" }] },
      1,
    );
    expect(changed.body.grants).toMatchObject([
      { role: "auditor", groupName: "Readers" },
      { role: "supervisor", groupName: null },
    ]);
    expect((await client.get("/group-mappings")).body.rows).toMatchObject([{ people: 1 }]);
    const ended = await client.post(`/group-mappings/${mapping.id}/end`, {});
    expect(ended.body).toMatchObject({ isEnded: true, people: 0 });
    expect((await theirs.get("/letters")).status).toBe(403);
    expect((await client.post(`/group-mappings/${mapping.id}/end`, {})).body.code).toBe(
      "nothing-to-do",
    );
  });

  test("that give the last administrator the role don't end", async () => {
    const { id: organizationId } = await buildOrganization();
    const id = await mappingOf(organizationId, "Keepers", "administrator");
    const user = await buildUser({ organizationId });
    await follow(user, "Keepers");
    const client = await signInAs(user);
    const answer = await client.post(`/group-mappings/${id}/end`, {});
    expect([answer.status, answer.body.code]).toEqual([409, "last-administrator"]);
    expect(await held(user.id)).toEqual(["administrator by group"]);
  });

  test("an administrator of one site maps nothing beyond it", async () => {
    const site = await buildSite();
    const other = await buildSite({ organizationId: site.organizationId });
    await administratorOf(site);
    const client = await administratorOf(site, site.id);
    const map = (siteId: string | null) =>
      client.post("/group-mappings", { groupName: randomUUID(), role: "auditor", siteId });
    expect([
      (await map(null)).status,
      (await map(other.id)).status,
      (await map(site.id)).status,
    ]).toEqual([403, 404, 201]);
    await mappingOf(site.organizationId, "Readers", "auditor");
    expect((await client.get("/group-mappings")).body.rows).toHaveLength(1);
  });
});
