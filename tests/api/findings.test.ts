import { describe, expect, test } from "vitest";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import {
  buildCrew,
  buildJob,
  buildOrganization,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  select,
  signInAs,
} from "../factories";

interface FindingRow {
  id: string;
  kind: string;
  state: string;
  criterion: string;
  revision: number;
}

/** Eight hours at 98 dB bare, on one day two days ago: under the British rules no protector, and over at the ear. */
async function buildBareDay() {
  const { id: organizationId } = await buildOrganization();
  const site = await buildSite({
    organizationId,
    governingRuleSet: "uk-2005",
    timeZone: "Europe/London",
  });
  const task = await buildTask({ site, name: "Run-up", levelDb: 98, metric: { kind: "steady" } });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const worker = await buildWorker({ site, jobId: job.id });
  const officer = await buildUser({ organizationId, roles: ["officer"] });
  const supervisor = await buildUser({ organizationId, roles: ["supervisor"] });
  const crew = await buildCrew({ site, members: [worker], supervisors: [supervisor] });
  const client = await signInAs(officer);
  const date = daysFromToday(-2);
  const saveDay = (on: string) =>
    client.post(`/crews/${crew.id}/day`, {
      date: on,
      rows: [
        {
          kind: "worked",
          workerId: worker.id,
          localStart: "06:00",
          lengthMin: 480,
          tasks: [{ taskId: task.id, durationMin: 480 }],
        },
      ],
    });
  await saveDay(date);
  const findings = () =>
    select<FindingRow>(
      "SELECT id, kind, state, criterion, revision FROM findings WHERE organization_id = $1 ORDER BY kind",
      [organizationId],
    );
  const newRules = async (effectiveFrom: string) => {
    await client.post(`/sites/${site.id}/settings`, {
      effectiveFrom,
      governingRuleSet: "us-general-industry",
      comparisonRuleSets: [],
      wearFromDb: 85,
      creditsActivePart: false,
      usesUncertainty: false,
      reason: "The site is under other rules",
    });
    await recomputeStaleDays(organizationId);
  };
  return {
    organizationId,
    site,
    worker,
    supervisor,
    crew,
    client,
    date,
    saveDay,
    findings,
    newRules,
  };
}

const find = (all: FindingRow[], kind: string, ruleSet: string) =>
  all.find((one) => one.kind === kind && one.criterion.startsWith(ruleSet));

describe("a change of the governing rules", () => {
  test("judging a day again by other rules leaves its finding to be checked, with a step that says so", async () => {
    const { client, date, findings, newRules } = await buildBareDay();
    const before = find(await findings(), "over-limit-at-ear", "uk-2005");
    expect(before?.state).toBe("new");
    await newRules(date);

    const view = await client.get(`/findings/${before?.id}`);
    expect(view.body).toMatchObject({
      state: "done",
      evidence: [],
      daysCount: 0,
      rulesUntil: date,
      facts: { ruleSetKey: "uk-2005", ruleSetVersion: 1 },
    });
    expect(view.body.steps.at(-1)).toMatchObject({
      kind: "rules-changed",
      fromState: "new",
      toState: "done",
      text: "us-general-industry",
    });
    // What the new rules ask for stands beside it.
    expect(find(await findings(), "over-limit-outside", "us-general-industry")?.state).toBe("new");
    // Judging once more changes nothing.
    const steps = view.body.steps.length;
    await newRules(date);
    expect((await client.get(`/findings/${before?.id}`)).body.steps).toHaveLength(steps);
  });

  test("rules from a later day leave the finding as it is, and say until when its rules governed", async () => {
    const { client, findings, newRules } = await buildBareDay();
    const before = find(await findings(), "over-limit-at-ear", "uk-2005");
    const from = daysFromToday(-1);
    await newRules(from);
    const view = await client.get(`/findings/${before?.id}`);
    expect(view.body).toMatchObject({ state: "new", daysCount: 1, rulesUntil: from });
    const waiting = await client.get("/waiting");
    expect(waiting.body.ruleSets).toMatchObject([
      { ruleSetKey: "us-general-industry", ruleSetVersion: 1 },
    ]);
  });

  test("the Crew sheet gives an order of earlier rules only until a day is judged by the new ones", async () => {
    const { crew, client, newRules, saveDay } = await buildBareDay();
    const order = async () => (await client.get(`/crews/${crew.id}/sheet`)).body.last.rows[0].order;
    expect(await order()).toMatchObject({ kind: "no-protector", rulesUntil: null });
    const from = daysFromToday(-1);
    await newRules(from);
    expect(await order()).toMatchObject({ kind: "no-protector", rulesUntil: from });
    await saveDay(from);
    const judgedAnew = await order();
    expect(judgedAnew).toMatchObject({ rulesUntil: null });
    expect(judgedAnew.facts.ruleSetKey).toBe("us-general-industry");
  });

  test("while its rules govern, nothing is said of them", async () => {
    const { client, findings } = await buildBareDay();
    for (const { id } of await findings())
      expect((await client.get(`/findings/${id}`)).body.rulesUntil).toBeNull();
  });
});

test("a worker reads the own open findings, and nobody else's", async () => {
  const { organizationId, site, worker } = await buildBareDay();
  const reader = await buildUser({ organizationId, roles: ["worker"], workerId: worker.id });
  const stranger = await buildWorker({ site });
  const other = await buildUser({ organizationId, roles: ["worker"], workerId: stranger.id });
  const rows = async (who: typeof reader) =>
    (await (await signInAs(who)).get(`/findings?workerId=${worker.id}`)).body.rows;
  expect((await rows(reader)).length).toBeGreaterThan(0);
  expect(await rows(other)).toEqual([]);
});

test("a worker has one order on the crew sheet, and once it is done the same is not asked again", async () => {
  const { crew, supervisor, findings } = await buildBareDay();
  const kinds = (await findings()).map(({ kind }) => kind);
  expect(kinds).toEqual(expect.arrayContaining(["no-protector", "over-limit-at-ear"]));
  const client = await signInAs(supervisor);
  const order = async () => (await client.get(`/crews/${crew.id}/sheet`)).body.last.rows[0].order;
  const { findingId, kind, revision } = await order();
  expect(kind).toBe("no-protector");
  await client.send({
    method: "post",
    path: `/findings/${findingId}/steps`,
    body: { kind: "mark-done", text: "" },
    revision,
  });
  expect(await order()).toMatchObject({ findingId, state: "done", canMarkDone: false });
});
