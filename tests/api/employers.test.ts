import { expect, test } from "vitest";
import { buildSite, buildUser, buildWorker, type Site, select, signInAs } from "../factories";
import { describeEndpoint } from "./five-cases";

const AGENCY = { employer: "agency", employerName: "Tideway Staffing" };
const UNNAMED = { employer: "contractor", employerName: null };
const AGREED = {
  kind: "agency",
  name: "Tideway Staffing",
  measure: "host",
  protect: "employer",
  train: "host",
  keep: "employer",
  tell: "host",
  basis: "Frame contract, annex 3",
};
const as = async (site: Site, role: "officer" | "auditor") =>
  signInAs(await buildUser({ organizationId: site.organizationId, roles: [role] }));
const pathOf = (site: Site) => `/sites/${site.id}/employers`;

describeEndpoint({
  route: "GET /sites/:id/employers",
  as: "auditor",
  not: "supervisor",
  event: null,
  bad: null,
  call: async (site) => {
    await buildWorker({ site, ...AGENCY });
    return { method: "get", path: pathOf(site) };
  },
});
describeEndpoint({
  route: "PUT /sites/:id/employers",
  as: "officer",
  not: "auditor",
  event: "agree-employer-duties",
  bad: { body: { tell: "nobody" } },
  badField: "tell",
  call: async (site) => {
    await buildWorker({ site, ...AGENCY });
    return { method: "put", path: pathOf(site), revision: 0, body: AGREED };
  },
});

test("counts who is there, by employer; own people and those who left are not among them", async () => {
  const site = await buildSite({ governingRuleSet: "uk-2005" });
  const elsewhere = await buildSite({ organizationId: site.organizationId });
  await buildWorker({ site, name: "Nadia", ...AGENCY });
  await buildWorker({ site, name: "Mirko", ...AGENCY });
  await buildWorker({ site, leftOn: "2024-01-31", hiredOn: "2020-01-01", ...AGENCY });
  await buildWorker({ site: elsewhere, ...AGENCY });
  await buildWorker({ site });
  await buildWorker({ site, ...UNNAMED });
  const client = await as(site, "officer");
  const { body } = await client.send({ method: "get", path: pathOf(site) });
  expect(body.rows).toMatchObject([
    { kind: "contractor", name: null, workerCount: 1, agreed: null, revision: 0 },
    {
      kind: "agency",
      name: "Tideway Staffing",
      workerCount: 2,
      workers: [{ name: "Mirko" }, { name: "Nadia" }],
      agreed: null,
      usual: { duties: { measure: "host", keep: "employer" }, sourceStatus: "from-memory" },
    },
  ]);
});

test("without a known sharing none is made up", async () => {
  const site = await buildSite({ governingRuleSet: "acgih-tlv" });
  await buildWorker({ site, ...AGENCY });
  const client = await as(site, "officer");
  const { body } = await client.send({ method: "get", path: pathOf(site) });
  expect(body.rows[0].usual).toBeNull();
});

test("what is agreed anew leaves what was agreed before on record", async () => {
  const site = await buildSite();
  await buildWorker({ site, ...AGENCY });
  const client = await as(site, "officer");
  const put = (revision: number, body: object) =>
    client.send({ method: "put", path: pathOf(site), revision, body });
  const first = await put(0, AGREED);
  expect(first.body).toMatchObject({ revision: 1, agreed: { tell: "host" } });
  expect((await put(0, { ...AGREED, tell: "employer" })).status).toBe(412);
  const second = await put(1, { ...AGREED, tell: "employer" });
  expect(second.body).toMatchObject({ revision: 2, agreed: { tell: "employer" } });
  expect((await put(2, { ...AGREED, tell: "employer" })).body.revision).toBe(2);
  const kept = await select(
    "SELECT number, tell FROM employer_duties WHERE site_id = $1 ORDER BY number",
    [site.id],
  );
  expect(kept).toEqual([
    { number: 1, tell: "host" },
    { number: 2, tell: "employer" },
  ]);
});

test("nothing is agreed with an employer who has nobody at the site, and nothing at a foreign site", async () => {
  const site = await buildSite();
  const other = await buildSite({ organizationId: site.organizationId });
  await buildWorker({ site: other, ...AGENCY });
  const client = await as(site, "officer");
  const call = { method: "put", revision: 0, body: AGREED } as const;
  expect((await client.send({ ...call, path: pathOf(site) })).status).toBe(404);
  const { organizationId } = site;
  const atOne = await signInAs(
    await buildUser({ organizationId, roles: ["officer"], siteId: site.id }),
  );
  expect((await atOne.send({ method: "get", path: pathOf(other) })).status).toBe(404);
  expect((await atOne.send({ ...call, path: pathOf(other) })).status).toBe(404);
});
