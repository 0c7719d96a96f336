import { describe, expect, test } from "vitest";
import { routes } from "../../server/lib/endpoint";
import {
  buildDay,
  buildFitTest,
  buildIssue,
  buildOrganization,
  buildProtector,
  buildRun,
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

const visitorInput = (siteId: string) => ({
  name: "Ida Visiting",
  email: `visitor-${crypto.randomUUID()}@dinward.example`,
  siteId,
  year: 2025,
});

describeEndpoint({
  route: "GET /visitors",
  as: "administrator",
  not: "officer",
  event: null,
  bad: null,
  namesNothing: true,
  call: async (site) => {
    await visitorAt(site, 2025);
    return { method: "get", path: "/visitors" };
  },
});
describeEndpoint({
  route: "POST /visitors",
  as: "administrator",
  not: "officer",
  event: "let-visitor-in",
  bad: { body: { lastDay: "2020-01-01" } },
  badField: "lastDay",
  call: async (site) => ({ method: "post", path: "/visitors", body: visitorInput(site.id) }),
});
describeEndpoint({
  route: "POST /visitors/:id/end",
  as: "administrator",
  not: "auditor",
  event: "end-visit",
  bad: null,
  status: 200,
  call: async (site) => ({
    method: "post",
    path: `/visitors/${(await visitorAt(site, 2025)).grantId}/end`,
  }),
});

/** Somebody let in to a site's year, with an hour left unless told. */
async function visitorAt(site: Site, year: number, endsInMin = 60) {
  const user = await buildUser({ organizationId: site.organizationId });
  const at = (minutes: number) => new Date(Date.now() + minutes * 60_000);
  const grantId = await insert("role_grants", {
    organizationId: site.organizationId,
    userId: user.id,
    role: "auditor",
    siteId: site.id,
    year,
    grantedAt: at(-120),
    endsAt: at(endsInMin),
  });
  return { user, grantId, client: await signInAs(user) };
}

async function dayOf(site: Site, date: string) {
  const worker = await buildWorker({ site, hiredOn: "2020-01-01" });
  await buildDay(worker, date, { origin: "imported" });
  return { worker };
}

describe("a visitor", () => {
  test("sees the workers and days of the year and site, and nothing of another year, site or organization", async () => {
    const site = await buildSite();
    const other = await buildSite({ organizationId: site.organizationId });
    const ours = await dayOf(site, "2025-03-04");
    const later = await dayOf(site, "2026-01-01");
    const there = await dayOf(other, "2025-03-04");
    const foreign = await dayOf(await buildSite(), "2025-03-04");
    await buildDay(ours.worker, "2024-12-31", { origin: "imported" });
    const { client } = await visitorAt(site, 2025);
    const listed = (await client.get("/workers")).body.rows;
    expect(listed.map(({ id }: { id: string }) => id)).toEqual([ours.worker.id]);
    const days = (await client.get(`/workers/${ours.worker.id}/days`)).body.rows;
    expect(days.map(({ date }: { date: string }) => date)).toEqual(["2025-03-04"]);
    const statuses = [];
    for (const { worker, date } of [
      { ...ours, date: "2025-03-04" },
      { ...ours, date: "2024-12-31" },
      { ...later, date: "2026-01-01" },
      { ...there, date: "2025-03-04" },
      { ...foreign, date: "2025-03-04" },
    ])
      statuses.push((await client.get(`/workers/${worker.id}/days/${date}`)).status);
    expect(statuses).toEqual([200, 404, 404, 404, 404]);
    expect((await client.get("/sites")).body.rows.map(({ id }: { id: string }) => id)).toEqual([
      site.id,
    ]);
  });

  test("takes the file of that year and of no other", async () => {
    const site = await buildSite();
    const other = await buildSite({ organizationId: site.organizationId });
    await dayOf(site, "2025-03-04");
    await dayOf(site, "2026-03-04");
    const { client } = await visitorAt(site, 2025);
    const gaps = (siteId: string, year: number) =>
      client.get(`/exports/gaps?siteId=${siteId}&year=${year}`);
    const mine = await gaps(site.id, 2025);
    expect([mine.status, mine.body.years]).toEqual([200, [2025]]);
    expect(await gaps(site.id, 2026)).toMatchObject({
      status: 403,
      body: { code: "other-year", params: { years: "2025" } },
    });
    expect((await gaps(other.id, 2025)).status).toBe(404);
    const file = (siteId: string, year: number) =>
      client.get(`/exports/year.csv?siteId=${siteId}&year=${year}&workers=number`);
    expect((await file(site.id, 2025)).text.split("\r\n")).toHaveLength(4);
    expect((await file(site.id, 2026)).status).toBe(403);
    expect((await file(other.id, 2025)).status).toBe(404);
    const records = (year: number) =>
      client.get(`/exports/year.zip?siteId=${site.id}&year=${year}&workers=number`);
    expect([(await records(2025)).status, (await records(2026)).status]).toEqual([200, 403]);
  });

  test("sees runs, fit tests and what was handed out by their dates", async () => {
    const site = await buildSite();
    const { worker } = await dayOf(site, "2025-03-04");
    const model = await buildProtector({ organizationId: site.organizationId });
    for (const testedOn of ["2025-02-01", "2026-02-01"])
      await buildFitTest({ worker, model, testedOn });
    const issue = await buildIssue({ worker, model, issuedOn: "2025-02-01" });
    const later = await dayOf(site, "2025-03-04");
    await buildIssue({ worker: later.worker, model, issuedOn: "2026-02-01" });
    const inYear = await buildRun({ site, workerId: worker.id, date: "2025-03-04" });
    const after = await buildRun({ site, workerId: worker.id, date: "2026-03-04" });
    const { client } = await visitorAt(site, 2025);
    const fits = (await client.get(`/fit-tests?workerId=${worker.id}`)).body.rows;
    expect(fits.map(({ testedOn }: { testedOn: string }) => testedOn)).toEqual(["2025-02-01"]);
    const issues = (await client.get("/issues")).body.rows;
    expect(issues.map(({ id }: { id: string }) => id)).toEqual([issue.id]);
    expect((await client.get(`/runs/${inYear.id}`)).status).toBe(200);
    expect((await client.get(`/runs/${after.id}`)).status).toBe(404);
  });

  test("changes nothing: no route that writes lets one in, but for the own language", async () => {
    const site = await buildSite();
    const { client } = await visitorAt(site, 2025);
    const open: string[] = [];
    for (const { method, path, spec } of routes) {
      if (method === "get" || spec.may === "public") continue;
      const nobodys = path.replace(/:date/g, "2026-01-01").replace(/:\w+/g, () => site.id);
      const { status } = await client.send({
        method: method as Call["method"],
        path: nobodys,
        revision: 1,
      });
      if (status !== 403) open.push(`${method.toUpperCase()} ${path}`);
    }
    // A computation of what is sent along stores nothing.
    expect(open.toSorted()).toEqual(["POST /evaluate", "PUT /me/settings"]);
  });

  test("whose time is over is told so, at once and when signing in is tried again", async () => {
    const site = await buildSite();
    const { client, user } = await visitorAt(site, 2025, -1);
    const answer = await client.get("/workers");
    expect([answer.status, answer.body.code]).toEqual([401, "access-ended"]);
    const { body } = await client.get("/session");
    expect(body).toMatchObject({ user: null, pendingName: user.name });
    expect(Date.parse(body.endedAt)).toBeLessThan(Date.now());
  });

  test("who is ended before the time is out at the next request", async () => {
    const site = await buildSite();
    const administrator = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["administrator"] }),
    );
    const { client, grantId } = await visitorAt(site, 2025);
    expect((await client.get("/workers")).status).toBe(200);
    expect((await administrator.post(`/visitors/${grantId}/end`, {})).body.state).toBe("over");
    expect((await client.get("/workers")).body.code).toBe("access-ended");
    expect((await administrator.post(`/visitors/${grantId}/end`, {})).body.code).toBe(
      "nothing-to-do",
    );
  });
});

describe("letting a visitor in", () => {
  const administratorOf = async (organizationId: string, siteId?: string) =>
    signInAs(await buildUser({ organizationId, roles: ["administrator"], siteId }));

  test.each([
    ["Europe/London", null],
    ["Pacific/Auckland", null],
    // Its clock goes forward at midnight.
    ["Africa/Cairo", "2027-04-29"],
  ])("access ends with the day at the site, %s", async (timeZone, lastDay) => {
    const site = await buildSite({ timeZone });
    const client = await administratorOf(site.organizationId);
    const body = (await client.post("/visitors", { ...visitorInput(site.id), lastDay })).body;
    const local = (instant: number) =>
      new Intl.DateTimeFormat("sv-SE", { timeZone, dateStyle: "short" }).format(instant);
    const end = Date.parse(body.endsAt);
    expect(local(end - 1)).toBe(lastDay ?? local(Date.now()));
    expect(local(end)).not.toBe(local(end - 1));
  });

  test("somebody known keeps their roles, and the visit is no part of them", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const client = await administratorOf(organizationId);
    const known = await buildUser({ organizationId, roles: ["supervisor"] });
    const answer = await client.post("/visitors", {
      ...visitorInput(site.id),
      email: known.email.toUpperCase(),
    });
    expect(answer.body).toMatchObject({ userId: known.id, name: known.name, state: "expected" });
    const changed = await client.put(
      `/users/${known.id}`,
      { name: known.name, language: "en", workerId: null, grants: [{ role: "supervisor" }] },
      1,
    );
    expect(changed.body.grants).toHaveLength(2);
    const session = (await (await signInAs(known)).get("/session")).body.user;
    expect(session).toMatchObject({
      roles: ["supervisor", "visitor"],
      visits: [{ siteId: site.id, year: 2025 }],
    });
  });

  test("the same year again takes the place of the first", async () => {
    const site = await buildSite();
    const client = await administratorOf(site.organizationId);
    const input = visitorInput(site.id);
    await client.post("/visitors", input);
    await client.post("/visitors", input);
    const states = (await client.get("/visitors")).body.rows.map(
      ({ state }: { state: string }) => state,
    );
    expect(states).toEqual(["expected", "over"]);
  });

  test("an administrator of one site lets nobody in to another; nobody in to what they read for longer", async () => {
    const site = await buildSite();
    const { organizationId } = site;
    const other = await buildSite({ organizationId });
    await administratorOf(organizationId);
    const client = await administratorOf(organizationId, site.id);
    expect((await client.post("/visitors", visitorInput(other.id))).status).toBe(404);
    const auditor = await buildUser({ organizationId, roles: ["auditor"] });
    const answer = await client.post("/visitors", {
      ...visitorInput(site.id),
      email: auditor.email,
    });
    expect(answer.body.issues[0]).toMatchObject({ path: ["email"], code: "reads-it-already" });
  });

  test("an e-mail of another organization's is refused by its field", async () => {
    const site = await buildSite();
    const client = await administratorOf(site.organizationId);
    const foreign = await buildUser({ organizationId: (await buildOrganization()).id });
    const answer = await client.post("/visitors", {
      ...visitorInput(site.id),
      email: foreign.email,
    });
    expect(answer.body.issues[0]).toMatchObject({ path: ["email"], code: "email-taken" });
  });

  test("the database takes no year without a site and an end, and no administrator who ends", async () => {
    const site = await buildSite();
    const user = await buildUser({ organizationId: site.organizationId });
    const grant = (more: string) =>
      select(
        `INSERT INTO role_grants (organization_id, user_id, ${more.split("=")[0]}) SELECT organization_id, id, ${more.split("=")[1]} FROM users WHERE id = $1`,
        [user.id],
      );
    await expect(grant("role, year = 'auditor', 2025")).rejects.toThrow(/role_grants_visitor/);
    await expect(
      grant("role, ends_at = 'administrator', now() + interval '1 day'"),
    ).rejects.toThrow(/role_grants_visitor/);
  });
});
