import { describe, expect, test } from "vitest";
import {
  buildAssignment,
  buildDay,
  buildProtector,
  buildSite,
  buildUser,
  buildWorker,
  daysFromToday,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const data = { effectiveFrom: "2026-01-01", snrDb: 30, hDb: 33, mDb: 27, lDb: 19 };

describeEndpoint({
  route: "GET /protectors",
  as: "supervisor",
  not: "worker",
  event: null,
  bad: null,
  namesNothing: true,
  call: async ({ organizationId }) => {
    await buildProtector({ organizationId });
    return { method: "get", path: "/protectors" };
  },
});
describeEndpoint({
  route: "GET /protectors/:id",
  as: "auditor",
  not: "administrator",
  event: null,
  bad: { path: "x" },
  call: async ({ organizationId }) => ({
    method: "get",
    path: `/protectors/${(await buildProtector({ organizationId })).id}`,
  }),
});
describeEndpoint({
  route: "POST /protectors",
  as: "officer",
  not: "supervisor",
  event: "create-protector",
  namesNothing: true,
  bad: { body: { data: { ...data, snrDb: 12 } } },
  badField: "data.snrDb",
  call: async () => ({
    method: "post",
    path: "/protectors",
    body: { name: "Slate muff", kind: "earmuff", data },
  }),
});
describeEndpoint({
  route: "PUT /protectors/:id",
  as: "officer",
  not: "auditor",
  event: "change-protector",
  bad: { body: { kind: "trumpet" } },
  badField: "kind",
  call: async ({ organizationId }) => ({
    method: "put",
    path: `/protectors/${(await buildProtector({ organizationId })).id}`,
    revision: 1,
    body: { name: "Slate muff", kind: "earmuff", isArchived: true },
  }),
});
describeEndpoint({
  route: "POST /protectors/:id/revisions",
  as: "officer",
  not: "auditor",
  event: "add-protector-revision",
  bad: { body: { reason: null } },
  badField: "reason",
  call: async ({ organizationId }) => ({
    method: "post",
    path: `/protectors/${(await buildProtector({ organizationId })).id}/revisions`,
    body: { ...data, reason: "a new certificate" },
  }),
});

const lay = async () => {
  const site = await buildSite();
  const client = await signInAs(
    await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
  );
  return { site, client, organizationId: site.organizationId };
};

describe("a protector", () => {
  test("new data move the days since, of those who wore it then", async () => {
    const { site, client, organizationId } = await lay();
    const model = await buildProtector({ organizationId });
    const [wearer, other] = [await buildWorker({ site }), await buildWorker({ site })];
    await buildAssignment({
      worker: wearer,
      inner: model,
      fromDate: "2026-01-01",
      toDate: "2026-03-31",
    });
    await buildAssignment({ worker: other });
    for (const date of ["2026-02-01", "2026-03-01", "2026-04-01"]) await buildDay(wearer, date);
    await buildDay(other, "2026-03-01");
    const answer = await client.post(`/protectors/${model.id}/revisions`, {
      ...data,
      effectiveFrom: "2026-02-15",
      reason: "a new certificate",
    });
    expect(answer.body.data).toMatchObject({
      number: 2,
      snrDb: 30,
      lDb: 19,
      usRatingDb: null,
      bands: null,
    });
    expect(answer.body.history.map(({ number }: { number: number }) => number)).toEqual([2, 1]);
    const days = await select<{ date: string }>(
      "SELECT date::text FROM days WHERE organization_id = $1 AND is_stale",
      [organizationId],
    );
    expect(days).toEqual([{ date: "2026-03-01" }]);
  });

  test("data of a later day are in force then; until then the earlier ones are", async () => {
    const { client, organizationId } = await lay();
    const model = await buildProtector({ organizationId });
    const answer = await client.post(`/protectors/${model.id}/revisions`, {
      ...data,
      effectiveFrom: daysFromToday(20),
      reason: "from next month on",
    });
    expect(answer.body.data).toMatchObject({ number: 1, snrDb: 28 });
    const later = await buildProtector({ organizationId, effectiveFrom: daysFromToday(20) });
    expect((await client.get(`/protectors/${later.id}`)).body.data.number).toBe(1);
  });

  test("counts who wears it today, once each", async () => {
    const { site, client, organizationId } = await lay();
    const [inner, outer] = [
      await buildProtector({ organizationId }),
      await buildProtector({ organizationId }),
    ];
    const worker = await buildWorker({ site });
    await buildAssignment({ worker, inner, outer });
    await buildAssignment({
      worker: await buildWorker({ site }),
      inner,
      toDate: daysFromToday(-1),
    });
    const { rows, wearersToday } = (await client.get("/protectors")).body;
    const wearers = [inner, outer].map(
      ({ id }) => rows.find((row: { id: string }) => row.id === id).wearersToday,
    );
    expect(wearers).toEqual([1, 1]);
    // Both are on the same head.
    expect(wearersToday).toBe(1);
  });

  test("keeps its kind once somebody has it", async () => {
    const { client, organizationId, site } = await lay();
    const model = await buildProtector({ organizationId, kind: "earmuff" });
    expect(
      (await client.put(`/protectors/${model.id}`, { name: model.name, kind: "foam-plug" }, 1))
        .status,
    ).toBe(200);
    await buildAssignment({ worker: await buildWorker({ site }), inner: model });
    const answer = await client.put(
      `/protectors/${model.id}`,
      { name: model.name, kind: "earmuff" },
      2,
    );
    expect(answer.body.issues[0]).toMatchObject({ path: ["kind"], code: "kind-fixed" });
  });
});
