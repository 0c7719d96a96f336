import { describe, expect, test } from "vitest";
import { routes } from "../../server/lib/endpoint";
import {
  buildDay,
  buildSite,
  buildUser,
  buildWorker,
  type Call,
  insert,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const AGENCY = { employer: "agency", employerName: "Tideway Staffing" };
const OTHER = { employer: "agency", employerName: "Larkspur Labour" };
const inDays = (days: number) =>
  new Date(Date.now() + days * 86_400_000).toISOString().slice(0, 10);
const shareInput = () => ({
  employer: "agency:Tideway Staffing",
  name: "Ida Abroad",
  email: `share-${crypto.randomUUID()}@dinward.example`,
  lastDay: inDays(30),
});
const pathOf = (site: Site) => `/sites/${site.id}/employer-shares`;

/** Somebody of Tideway Staffing, with an hour left unless told. */
async function readerAt(site: Site, endsInMin = 60) {
  const user = await buildUser({ organizationId: site.organizationId });
  const at = (minutes: number) => new Date(Date.now() + minutes * 60_000);
  const grantId = await insert("role_grants", {
    organizationId: site.organizationId,
    userId: user.id,
    role: "employer",
    siteId: site.id,
    employerKind: "agency",
    employerName: "Tideway Staffing",
    grantedAt: at(-120),
    endsAt: at(endsInMin),
  });
  return { user, grantId, client: await signInAs(user) };
}

async function dayOf(site: Site, of: object, ...dates: string[]) {
  const worker = await buildWorker({ site, hiredOn: "2024-01-01", ...of });
  for (const date of dates) await buildDay(worker, date, { origin: "imported" });
  return worker;
}

describeEndpoint({
  route: "GET /sites/:id/employer-shares",
  as: "officer",
  not: "auditor",
  event: null,
  bad: null,
  call: async (site) => {
    await readerAt(site);
    return { method: "get", path: pathOf(site) };
  },
});
describeEndpoint({
  route: "POST /sites/:id/employer-shares",
  as: "administrator",
  not: "supervisor",
  event: "share-with-employer",
  bad: { body: { lastDay: "2020-01-01" } },
  badField: "lastDay",
  call: async (site) => {
    await buildWorker({ site, ...AGENCY });
    return { method: "post", path: pathOf(site), body: shareInput() };
  },
});
describeEndpoint({
  route: "POST /employer-shares/:id/end",
  as: "officer",
  not: "auditor",
  event: "end-employer-share",
  bad: null,
  status: 200,
  call: async (site) => ({
    method: "post",
    path: `/employer-shares/${(await readerAt(site)).grantId}/end`,
  }),
});

type Client = Awaited<ReturnType<typeof readerAt>>["client"];
const seen = async (client: Client, query = "") =>
  (await client.get(`/shared-results${query}`)).body.rows.map(
    ({ workerName, date }: { workerName: string; date: string }) => [workerName, date],
  );

describe("somebody of an employer", () => {
  test("reads results of its people at the site, and of no other employer, site or organization", async () => {
    const site = await buildSite();
    const elsewhere = await buildSite({ organizationId: site.organizationId });
    const ours = await dayOf(site, AGENCY, "2025-03-04", "2025-03-05", "2023-12-31");
    await dayOf(site, OTHER, "2025-03-04");
    await dayOf(site, { employer: "contractor", employerName: "Tideway Staffing" }, "2025-03-04");
    await dayOf(site, {}, "2025-03-04");
    await dayOf(elsewhere, AGENCY, "2025-03-04");
    await dayOf(await buildSite(), AGENCY, "2025-03-04");
    const { client } = await readerAt(site);
    // The day before the worker was hired is none of the employer's.
    const mine = [
      [ours.name, "2025-03-05"],
      [ours.name, "2025-03-04"],
    ];
    expect(await seen(client)).toEqual(mine);
    const first = (await client.get("/shared-results?limit=1")).body;
    expect(await seen(client, `?limit=1&cursor=${first.next}`)).toEqual([mine[1]]);
    expect(await seen(client, "?from=2025-03-05")).toEqual([mine[0]]);
    expect(first.shares).toMatchObject([{ employerName: "Tideway Staffing", siteName: site.name }]);
    expect((await client.get("/shared-results?cursor=bm8")).body.issues[0].path).toEqual([
      "cursor",
    ]);
  });

  test("keeps the days worked for it when a worker goes to another employer, and gets no later ones", async () => {
    const site = await buildSite();
    const leaves = await dayOf(site, AGENCY, "2025-03-04");
    const comes = await dayOf(site, OTHER, "2025-03-04");
    await select("UPDATE workers SET employer = 'own', employer_name = NULL WHERE id = $1", [
      leaves.id,
    ]);
    await select("UPDATE workers SET employer_name = 'Tideway Staffing' WHERE id = $1", [comes.id]);
    await buildDay(leaves, inDays(1), { origin: "imported" });
    await buildDay(comes, inDays(1), { origin: "imported" });
    const { client } = await readerAt(site);
    expect(await seen(client)).toEqual([
      [comes.name, inDays(1)],
      [leaves.name, "2025-03-04"],
    ]);
  });

  test("takes the same as a file, and each person can see that it was read", async () => {
    const site = await buildSite();
    const ours = await dayOf(site, AGENCY, "2025-03-04", "2025-03-05");
    const other = await dayOf(site, OTHER, "2025-03-04");
    const { client, user } = await readerAt(site);
    const file = await client.get("/shared-results.csv");
    expect(file.status).toBe(200);
    const lines = file.text.split("\r\n");
    expect(lines[0]).toMatch(/^result_id,site,worker,date,.*,worker_name$/);
    expect(lines).toHaveLength(5);
    expect(lines[1]).toContain(ours.employeeNumber);
    expect(lines[3]).toMatch(/^rows,2,+$/);
    await client.get("/shared-results");
    const kept = await select(
      "SELECT worker_id, kind FROM record_reads WHERE reader_id = $1 AND organization_id = $2",
      [user.id, site.organizationId],
    );
    expect(kept).toEqual([{ worker_id: ours.id, kind: "result" }]);
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    const readers = async (id: string) =>
      (await officer.get(`/workers/${id}/access`)).body.rows.filter(
        ({ role }: { role: string }) => role === "employer",
      );
    expect(await readers(ours.id)).toMatchObject([
      { userId: user.id, employerName: "Tideway Staffing", siteName: site.name },
    ]);
    expect(await readers(other.id)).toEqual([]);
  });

  test("opens nothing else: of all routes only what is theirs and everybody's own account", async () => {
    const site = await buildSite();
    const { client } = await readerAt(site);
    const open: string[] = [];
    for (const { method, path, spec } of routes) {
      if (spec.may === "public") continue;
      const nobodys = path.replace(/:date/g, "2026-01-01").replace(/:\w+/g, () => site.id);
      const { status } = await client.send({
        method: method as Call["method"],
        path: nobodys,
        revision: 1,
      });
      if (status !== 403) open.push(`${method.toUpperCase()} ${path}`);
    }
    expect(open.toSorted()).toEqual([
      "GET /me/access",
      "GET /rule-sets",
      "GET /shared-results",
      "GET /shared-results.csv",
      "POST /evaluate",
      "PUT /me/settings",
    ]);
  });

  test("whose time is over, or was ended, is told so at the next request", async () => {
    const site = await buildSite();
    await dayOf(site, AGENCY, "2025-03-04");
    const over = await readerAt(site, -1);
    const answer = await over.client.get("/shared-results");
    expect([answer.status, answer.body.code]).toEqual([401, "access-ended"]);
    expect((await over.client.get("/session")).body).toMatchObject({
      user: null,
      pendingName: over.user.name,
    });
    const { client, grantId } = await readerAt(site);
    expect((await client.get("/session")).body.user).toMatchObject({
      roles: ["employer"],
      sites: [{ id: site.id }],
    });
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    expect((await officer.post(`/employer-shares/${grantId}/end`, {})).body.state).toBe("over");
    expect((await client.get("/shared-results.csv")).body.code).toBe("access-ended");
    expect((await officer.post(`/employer-shares/${grantId}/end`, {})).body.code).toBe(
      "nothing-to-do",
    );
  });
});

describe("letting somebody of an employer in", () => {
  const officerOf = async (site: Site) =>
    signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"], siteId: site.id }),
    );

  test("is for an employer with people at the site, for a year at most, and at one's own sites", async () => {
    const site = await buildSite();
    const other = await buildSite({ organizationId: site.organizationId });
    await buildWorker({ site, ...AGENCY });
    const client = await officerOf(site);
    const post = async (change: object, at = site) => {
      const { status, body } = await client.post(pathOf(at), { ...shareInput(), ...change });
      return [status, body.issues?.[0]?.path.join(".") ?? body.code ?? body.state];
    };
    expect(await post({})).toEqual([201, "expected"]);
    expect(await post({ employer: "agency:Larkspur Labour" })).toEqual([422, "employer"]);
    expect(await post({ lastDay: inDays(400) })).toEqual([422, "lastDay"]);
    expect(await post({}, other)).toEqual([404, "not-found"]);
    const auditor = await buildUser({ organizationId: site.organizationId, roles: ["auditor"] });
    expect(await post({ email: auditor.email })).toEqual([422, "email"]);
  });

  test("again takes the place of the first, and a change of roles leaves it", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    await buildWorker({ site, ...AGENCY });
    const client = await officerOf(site);
    const known = await buildUser({ organizationId, roles: ["supervisor"] });
    const input = { ...shareInput(), email: known.email };
    await client.post(pathOf(site), input);
    await client.post(pathOf(site), { ...input, lastDay: inDays(60) });
    const { body } = await client.get(pathOf(site));
    expect(body.rows.map(({ state }: { state: string }) => state)).toEqual(["expected", "over"]);
    expect(body.employers).toEqual([{ kind: "agency", name: "Tideway Staffing" }]);
    const administrator = await signInAs(
      await buildUser({ organizationId, roles: ["administrator"] }),
    );
    const changed = await administrator.put(
      `/users/${known.id}`,
      { name: known.name, language: "en", workerId: null, grants: [{ role: "supervisor" }] },
      1,
    );
    expect(changed.body.grants.map(({ role }: { role: string }) => role)).toEqual([
      "employer",
      "supervisor",
    ]);
  });
});
