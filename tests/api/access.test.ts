import { describe, expect, test } from "vitest";
import type { RouteSpec } from "../../server/lib/endpoint";
import { routes } from "../../server/lib/endpoint";
import type { Role } from "../../server/lib/policy";
import {
  buildCrew,
  buildDay,
  buildSite,
  buildSupervisorOf,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

describeEndpoint({
  route: "GET /workers/:id/access",
  as: "auditor",
  not: "administrator",
  event: null,
  bad: { path: "x" },
  call: async (site) => ({
    method: "get",
    path: `/workers/${(await buildWorker({ site })).id}/access`,
  }),
});
describeEndpoint({
  route: "GET /record-reads",
  as: "administrator",
  not: "officer",
  event: null,
  bad: { path: "?cursor=bm8" },
  badField: "cursor",
  namesNothing: true,
  call: async (site) => {
    const worker = await buildWorker({ site });
    await readBy(site, worker.id);
    return { method: "get", path: "/record-reads" };
  },
});

interface Row {
  readerName: string;
  workerId: string | null;
  kind: string;
}

async function readBy(site: Site, workerId: string) {
  const reader = await buildUser({ organizationId: site.organizationId, roles: ["officer"] });
  await insert("record_reads", {
    organizationId: site.organizationId,
    readerId: reader.id,
    workerId,
    siteId: site.id,
    kind: "page",
    readOn: "2026-03-04",
  });
  return reader;
}

async function ownClient(site: Site) {
  const worker = await buildWorker({ site });
  const user = await buildUser({
    organizationId: site.organizationId,
    roles: ["worker"],
    workerId: worker.id,
  });
  return { worker, user, client: await signInAs(user) };
}

const roleAt = async (site: Site, role: Role, siteId?: string) => {
  const user = await buildUser({ organizationId: site.organizationId, roles: [role], siteId });
  return { user, client: await signInAs(user) };
};

describe("who can see a worker's record", () => {
  test("is whoever a grant lets: not another site's, not one that ended, not a crew's of another worker", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const other = await buildSite({ organizationId });
    const { worker, user, client } = await ownClient(site);
    await buildDay(worker, "2025-03-04");
    const officer = await roleAt(site, "officer");
    await roleAt(site, "auditor", other.id);
    const administrator = await roleAt(site, "administrator", site.id);
    const supervisor = await buildSupervisorOf(site, worker);
    await buildSupervisorOf(site, await buildWorker({ site }));
    const visitor = await buildUser({ organizationId });
    for (const [year, endsInMin] of [
      [2025, 60],
      [2024, 60],
      [2025, -60],
    ] as const)
      await insert("role_grants", {
        organizationId,
        userId: endsInMin > 0 ? visitor.id : user.id,
        role: "auditor",
        siteId: site.id,
        year,
        grantedAt: new Date(Date.now() - 7_200_000),
        endsAt: new Date(Date.now() + endsInMin * 60_000),
      });
    const { record, account } = (await client.get("/me/access")).body;
    expect(
      record.map(({ userId, role }: { userId: string; role: string }) => [userId, role]),
    ).toEqual([
      [officer.user.id, "officer"],
      [supervisor.id, "supervisor"],
      [administrator.user.id, "administrator"],
      [visitor.id, "visitor"],
    ]);
    expect(record[3]).toMatchObject({ year: 2025, siteName: site.name });
    expect(account.map(({ role }: { role: string }) => role)).toEqual(["auditor", "administrator"]);
  });

  test("of a loan it says until when: the midnight after its last day, by the site's clock", async () => {
    const site = await buildSite({ timeZone: "UTC" });
    const { organizationId } = site;
    const { worker, client } = await ownClient(site);
    const own = await buildSupervisorOf(site, worker);
    const borrower = await buildUser({ organizationId, roles: ["supervisor"] });
    const crew = await buildCrew({ site, supervisors: [borrower] });
    const last = daysFromToday(3);
    await select(
      "INSERT INTO crew_memberships (organization_id, crew_id, worker_id, valid, is_loan) VALUES ($1, $2, $3, daterange(current_date, $4::date, '[]'), TRUE)",
      [organizationId, crew.id, worker.id, last],
    );
    const { record } = (await client.get("/me/access")).body;
    const endOf = ({ id }: { id: string }) =>
      record.find(({ userId }: { userId: string }) => userId === id)?.endsAt;
    expect(endOf(own)).toBeNull();
    expect(endOf(borrower)).toBe(`${daysFromToday(4)}T00:00:00.000Z`);
  });

  test("names everybody whom the policies let read the record, and nobody else", async () => {
    const site = await buildSite();
    const { worker } = await ownClient(site);
    const people = await Promise.all(
      (["officer", "auditor", "supervisor", "administrator"] as const).map((role) =>
        roleAt(site, role),
      ),
    );
    const mine = await buildSupervisorOf(site, worker);
    people.push({ user: mine, client: await signInAs(mine) });
    const named = (await people[0]!.client.get(`/workers/${worker.id}/access`)).body.rows;
    for (const { user, client } of people) {
      const found = named.find(({ userId }: { userId: string }) => userId === user.id);
      const { status } = await client.get(`/workers/${worker.id}`);
      // An administrator sees name and number elsewhere, and is named with that.
      expect(status === 200).toBe(found !== undefined && found.role !== "administrator");
    }
  });

  test("whose sign-in is no worker's has an account only", async () => {
    const { client } = await roleAt(await buildSite(), "officer");
    expect((await client.get("/me/access")).body).toEqual({ account: [], record: null });
  });
});

describe("the log of who read whose record", () => {
  const kinds = async (client: { get: (path: string) => Promise<{ body: { rows: Row[] } }> }) =>
    (await client.get("/record-reads")).body.rows.map(({ readerName, kind }) => [readerName, kind]);

  test("has one row a day for a reader and a part of the record, and none for the own", async () => {
    const site = await buildSite();
    const { worker, client } = await ownClient(site);
    await buildDay(worker, "2026-03-04", { origin: "imported" });
    const officer = await roleAt(site, "officer");
    for (let count = 0; count < 2; count += 1)
      for (const path of ["", "/days", "/assignments", "/days/2026-03-04"]) {
        expect((await officer.client.get(`/workers/${worker.id}${path}`)).status).toBe(200);
        await client.get(`/workers/${worker.id}${path}`);
      }
    await officer.client.get(`/fit-tests?workerId=${worker.id}`);
    await officer.client.get("/fit-tests");
    expect((await kinds(client)).toSorted()).toEqual(
      ["fits", "history", "page", "result"].map((kind) => [officer.user.name, kind]),
    );
  });

  test("what was refused was not read", async () => {
    const site = await buildSite();
    const { worker } = await ownClient(site);
    const { client } = await roleAt(site, "supervisor");
    expect((await client.get(`/workers/${worker.id}`)).status).toBe(404);
    expect(
      await select("SELECT 1 FROM record_reads WHERE worker_id = $1", [worker.id]),
    ).toHaveLength(0);
  });

  test("a file of a year stands there for everybody with a day in it", async () => {
    const site = await buildSite();
    const inIt = await ownClient(site);
    const notInIt = await ownClient(site);
    await buildDay(inIt.worker, "2025-03-04", { origin: "imported" });
    await buildDay(notInIt.worker, "2026-03-04", { origin: "imported" });
    const { client, user } = await roleAt(site, "auditor");
    await client.get(`/exports/year.csv?siteId=${site.id}&year=2025&workers=number`);
    expect(await kinds(inIt.client)).toEqual([[user.name, "export"]]);
    expect(await kinds(notInIt.client)).toEqual([]);
    expect(await kinds(client)).toEqual([[user.name, "export"]]);
  });

  test("is read by a worker for the own record, by auditor and administrator for their sites, page by page", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const other = await buildSite({ organizationId });
    const here = await ownClient(site);
    const there = await ownClient(other);
    for (let count = 0; count < 3; count += 1) await readBy(site, here.worker.id);
    await readBy(other, there.worker.id);
    const ids = async (client: typeof here.client, query = "") =>
      (await client.get(`/record-reads${query}`)).body.rows.map((row: Row) => row.workerId);
    expect(await ids(here.client)).toEqual(Array(3).fill(here.worker.id));
    expect(await ids(there.client)).toEqual([there.worker.id]);
    expect(await ids((await roleAt(site, "auditor", site.id)).client)).toHaveLength(3);
    const { client } = await roleAt(site, "administrator");
    expect(await ids(client)).toHaveLength(4);
    expect(await ids(client, `?workerId=${there.worker.id}`)).toEqual([there.worker.id]);
    const first = (await client.get("/record-reads?limit=3")).body;
    const second = (await client.get(`/record-reads?limit=3&cursor=${first.next}`)).body;
    expect(second.rows).toHaveLength(1);
    expect(first.rows.map(({ id }: { id: string }) => id)).not.toContain(second.rows[0].id);
  });

  test("nobody changes it", async () => {
    const site = await buildSite();
    await readBy(site, (await buildWorker({ site })).id);
    await expect(select("UPDATE record_reads SET kind = 'fits'")).rejects.toThrow(/append-only/);
    await expect(select("DELETE FROM record_reads")).rejects.toThrow(/append-only/);
  });

  test("every address beneath one worker says which part of the record it shows", () => {
    const silent = routes.filter(
      ({ method, path, spec }: { method: string; path: string; spec: RouteSpec }) =>
        method === "get" && path.startsWith("/workers/:id") && !spec.reads,
    );
    // The report keeps its reader in the transaction that makes it; who can see the record is no part of it.
    expect(silent.map(({ path }) => path).toSorted()).toEqual([
      "/workers/:id/access",
      "/workers/:id/exposure-record.pdf",
    ]);
  });
});
