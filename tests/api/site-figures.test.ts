import { describe, expect, test } from "vitest";
import {
  buildCrew,
  buildDay,
  buildFinding,
  buildJob,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  insert,
  type Site,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const OVER_LOWER = [
  { criterionId: "lower-action", verdict: "over" },
  { criterionId: "upper-action", verdict: "under" },
];
const pathOf = (site: Site, year = 2025) => `/sites/${site.id}/figures?year=${year}`;
const representativeAt = async ({ organizationId, id: siteId }: Site) =>
  signInAs(await buildUser({ organizationId, roles: ["representative"], siteId }));

/** So many people of a crew with a day over the lower action value. */
async function buildPeople(
  site: Site,
  count: number,
  more: { crewId?: string; jobId?: string } = {},
) {
  const people = [];
  for (let at = 0; at < count; at++) {
    const worker = await buildWorker({ site, jobId: more.jobId, name: `Hidden Person ${at}` });
    await buildDay(worker, "2025-03-04", {
      governingRuleSet: "uk-2005",
      crewId: more.crewId,
      outsideDb: 84,
      criteria: OVER_LOWER,
    });
    people.push(worker);
  }
  return people;
}

describeEndpoint({
  route: "GET /sites/:id/figures",
  as: "representative",
  not: "officer",
  event: null,
  bad: { path: "&year=soon" },
  badField: "year",
  call: async (site) => ({ method: "get", path: `/sites/${site.id}/figures?` }),
});

describe("what a representative sees", () => {
  test("is counted by crew and job; nobody is named", async () => {
    const site = await buildSite();
    const job = await buildJob({ site, name: "Grinding" });
    const [days, lates] = [
      await buildCrew({ site, name: "Days" }),
      await buildCrew({ site, name: "Lates" }),
    ];
    await buildPeople(site, 6, { crewId: days.id, jobId: job.id });
    await buildPeople(site, 7, { crewId: lates.id });
    const { body } = await (await representativeAt(site)).get(pathOf(site));
    const lower = body.criteria.findIndex(({ id }: { id: string }) => id === "lower-action");
    const upper = body.criteria.findIndex(({ id }: { id: string }) => id === "upper-action");
    expect(body.total).toMatchObject({ inNoise: 13, measured: 0, neverMeasured: 13, undecided: 0 });
    expect([body.total.over[lower], body.total.over[upper]]).toEqual([13, 0]);
    expect(body.groups.crew).toMatchObject([
      { name: "Days", inNoise: 6 },
      { name: "Lates", inNoise: 7 },
    ]);
    expect(body.groups.job).toMatchObject([
      { name: "Grinding", inNoise: 6 },
      { name: null, inNoise: 7 },
    ]);
    expect(body.gaps[0]).toEqual({ kind: "not-measured", count: 13 });
    expect(JSON.stringify(body)).not.toMatch(/Hidden Person/);
  });

  test("is by task and area, through the shifts in which the task was done", async () => {
    const site = await buildSite();
    const task = await buildTask({ site, name: "Cutting" });
    for (const worker of await buildPeople(site, 5))
      await buildShift(worker, {
        date: "2025-03-04",
        tasks: [{ taskId: task.id, durationMin: 480 }],
      });
    const { body } = await (await representativeAt(site)).get(pathOf(site));
    expect(body.groups.task).toMatchObject([{ name: "Cutting", inNoise: 5 }]);
    expect(body.groups.area).toMatchObject([{ inNoise: 5 }]);
  });

  test("fewer than five people are not counted, nor is what would give them away", async () => {
    const site = await buildSite();
    const [small, big, bigger] = [
      await buildCrew({ site, name: "A small" }),
      await buildCrew({ site, name: "B big" }),
      await buildCrew({ site, name: "C bigger" }),
    ];
    await buildPeople(site, 3, { crewId: small.id });
    await buildPeople(site, 6, { crewId: big.id });
    await buildPeople(site, 8, { crewId: bigger.id });
    const { body } = await (await representativeAt(site)).get(pathOf(site));
    expect(body.total.inNoise).toBe(17);
    expect(body.groups.crew).toMatchObject([
      { inNoise: "few", neverMeasured: "few", undecided: "few" },
      { inNoise: "withheld" },
      { inNoise: 8 },
    ]);
  });

  test("open findings are counted by the people whom they are about", async () => {
    const site = await buildSite();
    const people = await buildPeople(site, 6);
    for (const { id: workerId } of people) {
      await buildFinding({ site, workerId, criterion: "a" });
      await buildFinding({ site, workerId, criterion: "b" });
    }
    for (const { id: workerId } of people.slice(0, 4))
      await buildFinding({ site, workerId, kind: "fit-failed" });
    await buildFinding({ site, kind: "instrument" });
    await buildFinding({ site, workerId: people[0]!.id, kind: "no-protector", state: "new" });
    const { body } = await (await representativeAt(site)).get(pathOf(site));
    expect(body.findings).toEqual([
      { kind: "over-limit-outside", total: 6, first: 6, second: 0, third: 0 },
      { kind: "no-protector", total: "few", first: "few", second: "few", third: "few" },
      { kind: "instrument", total: 1, first: 1, second: 0, third: 0 },
      { kind: "fit-failed", total: "few", first: "few", second: "few", third: "few" },
    ]);
  });

  test("without a year it is the latest on record, and a site without days has counts of none", async () => {
    const site = await buildSite();
    const empty = await buildSite({ organizationId: site.organizationId });
    await buildPeople(site, 5);
    expect((await (await representativeAt(site)).get(`/sites/${site.id}/figures`)).body.year).toBe(
      2025,
    );
    const { body } = await (await representativeAt(empty)).get(`/sites/${empty.id}/figures`);
    expect(body).toMatchObject({ total: { inNoise: 0 }, years: [], findings: [], duties: [] });
  });
});

describe("a representative's grant", () => {
  test("is of one site and one organization, and ends at the next request", async () => {
    const site = await buildSite();
    const other = await buildSite({ organizationId: site.organizationId });
    const foreign = await buildSite();
    const user = await buildUser({ organizationId: site.organizationId });
    const granted = (endsInMin: number | null) =>
      insert("role_grants", {
        organizationId: site.organizationId,
        userId: user.id,
        role: "representative",
        siteId: site.id,
        grantedAt: new Date(Date.now() - 7_200_000),
        ...(endsInMin === null ? {} : { endsAt: new Date(Date.now() + endsInMin * 60_000) }),
      });
    await granted(60);
    const client = await signInAs(user);
    expect((await client.get(pathOf(site))).status).toBe(200);
    expect((await client.get(pathOf(other))).status).toBe(404);
    expect((await client.get(pathOf(foreign))).status).toBe(404);
    const over = await buildUser({ organizationId: site.organizationId });
    await insert("role_grants", {
      organizationId: site.organizationId,
      userId: over.id,
      role: "representative",
      siteId: site.id,
      grantedAt: new Date(Date.now() - 7_200_000),
      endsAt: new Date(Date.now() - 60_000),
    });
    const ended = await (await signInAs(over)).get(pathOf(site));
    expect(ended.status).toBe(401);
    expect(ended.body.code).toBe("access-ended");
  });

  test("opens no record of anybody, by any id", async () => {
    const site = await buildSite();
    const [worker] = await buildPeople(site, 1);
    const findingId = await buildFinding({ site, workerId: worker!.id });
    const client = await representativeAt(site);
    for (const path of [
      `/workers/${worker!.id}`,
      `/workers/${worker!.id}/days`,
      `/workers/${worker!.id}/access`,
      `/findings/${findingId}`,
      "/workers",
      "/findings",
      "/crews",
      "/sites",
      "/search?q=Hidden",
      `/exports/gaps?siteId=${site.id}&year=2025`,
    ])
      expect((await client.get(path)).status, path).toBe(403);
  });
});
