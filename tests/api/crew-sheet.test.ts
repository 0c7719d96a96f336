import { describe, expect, test } from "vitest";
import {
  buildAssignment,
  buildCrew,
  buildFinding,
  buildFitTest,
  buildJob,
  buildProtector,
  buildSite,
  buildSupervisorOf,
  buildTask,
  buildUser,
  buildWorker,
  type Client,
  daysFromToday,
  insert,
  select,
  signInAs,
} from "../factories";

const stepOn = (client: Client, findingId: string, body: object, revision: number) =>
  client.send({ method: "post", path: `/findings/${findingId}/steps`, body, revision });

describe("undo", () => {
  const lay = async () => {
    const site = await buildSite();
    const worker = await buildWorker({ site });
    const supervisor = await buildSupervisorOf(site, worker);
    const findingId = await buildFinding({ site, workerId: worker.id, state: "came-back" });
    return { site, worker, supervisor, findingId, client: await signInAs(supervisor) };
  };

  test.each([
    [{ kind: "mark-done", text: "" }, "done"],
    [{ kind: "cannot", text: "No stock left." }, "in-hand"],
  ])("takes %o back to what it was before, as a step of its own", async (step, state) => {
    const { site, client, findingId, supervisor } = await lay();
    const said = await stepOn(client, findingId, step, 1);
    expect(said.body).toMatchObject({ state, revision: 2 });
    const undone = await stepOn(client, findingId, { kind: "undo" }, 2);
    expect(undone.status).toBe(201);
    expect(undone.body).toMatchObject({ state: "came-back", revision: 3, closedOn: null });
    expect(undone.body.steps.at(-2)).toMatchObject({ toState: state });
    expect(undone.body.steps.at(-1)).toMatchObject({
      kind: "undone",
      fromState: state,
      toState: "came-back",
      authorName: supervisor.name,
    });
    const events = await select<{ action: string }>(
      "SELECT action FROM audit_events WHERE organization_id = $1 ORDER BY id DESC LIMIT 1",
      [site.organizationId],
    );
    expect(events[0]?.action).toBe("undo-finding");
    // Once undone there is nothing left to undo.
    const again = await stepOn(client, findingId, { kind: "undo" }, 3);
    expect([again.status, again.body.code]).toEqual([409, "too-late-to-undo"]);
  });

  test("is the same person's only, and of what happened last", async () => {
    const { site, client, findingId } = await lay();
    const officer = await signInAs(
      await buildUser({ organizationId: site.organizationId, roles: ["officer"] }),
    );
    await stepOn(client, findingId, { kind: "mark-done", text: "" }, 1);
    const other = await stepOn(officer, findingId, { kind: "undo" }, 2);
    expect([other.status, other.body.code]).toEqual([409, "too-late-to-undo"]);
    await stepOn(officer, findingId, { kind: "close", text: "Seen to." }, 2);
    const stale = await stepOn(client, findingId, { kind: "undo" }, 2);
    expect(stale.status).toBe(412);
    const closed = await stepOn(client, findingId, { kind: "undo" }, 3);
    expect([closed.status, closed.body.code]).toEqual([409, "too-late-to-undo"]);
    const reopened = await stepOn(officer, findingId, { kind: "undo" }, 3);
    expect([reopened.status, reopened.body.code]).toEqual([409, "too-late-to-undo"]);
  });

  test("is for moments: after a minute the word stands", async () => {
    const { site, client, supervisor, worker } = await lay();
    const findingId = await buildFinding({ site, workerId: worker.id, kind: "fit", state: "done" });
    await insert("finding_steps", {
      organizationId: site.organizationId,
      findingId,
      kind: "marked-done",
      fromState: "new",
      toState: "done",
      authorId: supervisor.id,
      createdAt: new Date(Date.now() - 61_000),
    });
    const late = await stepOn(client, findingId, { kind: "undo" }, 1);
    expect([late.status, late.body.code]).toEqual([409, "too-late-to-undo"]);
    expect(late.body.detail).toContain("too late");
  });
});

/** A worker of a British crew in eight hours of rumble, nearly all of it below 500 Hz, and what the sheet says of them. */
async function buildRumble(creditedFrom: number) {
  const site = await buildSite({ governingRuleSet: "uk-2005", timeZone: "Europe/London" });
  const { organizationId } = site;
  await insert("site_settings", {
    organizationId,
    siteId: site.id,
    number: 2,
    effectiveFrom: daysFromToday(creditedFrom),
    governingRuleSet: "uk-2005",
    comparisonRuleSets: [],
    creditsActivePart: true,
  });
  const task = await buildTask({
    site,
    name: "Run-up",
    levelDb: 98.7,
    octaveBandsDb: [105, 112, 104, 88, 78, 70, 65, 60],
  });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const worker = await buildWorker({ site, jobId: job.id });
  const bands = {
    meanDb: [16, 17, 20, 26, 28, 30, 35, 35],
    sdDb: [2, 2, 2, 2, 2, 2, 2, 2],
  };
  const active = {
    attenuationDb: [8, 8, 8, 6, 2, -1, -1, -1],
    delayS: null,
    gain: null,
    maximumDb: null,
    bandwidthHz: null,
    saturatesAboveDb: null,
    batteryMin: 600,
  };
  const model = await buildProtector({
    organizationId,
    kind: "active-earmuff",
    data: { bands, active },
  });
  await buildAssignment({ worker, inner: model });
  // It takes the same off and needs no battery: what the register would give instead.
  await buildProtector({
    organizationId,
    name: "Alder foam",
    kind: "foam-plug",
    data: { bands: { meanDb: [24, 24, 24, 26, 28, 30, 34, 36], sdDb: bands.sdDb } },
  });
  const crew = await buildCrew({ site, members: [worker] });
  const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const saveDay = async (days: number) => {
    const saved = await client.post(`/crews/${crew.id}/day`, {
      date: daysFromToday(days),
      rows: [
        {
          kind: "worked",
          workerId: worker.id,
          localStart: "06:00",
          lengthMin: 480,
          tasks: [{ taskId: task.id, durationMin: 480, wornPct: 100 }],
        },
      ],
    });
    expect(saved.status).toBeLessThan(300);
  };
  const passCheck = (days: number) =>
    buildFitTest({ worker, model, testedOn: daysFromToday(days), parDb: null, activePassed: true });
  const expected = async () => (await client.get(`/crews/${crew.id}/sheet`)).body.expected.rows[0];
  return { worker, site, task, client, crew, saveDay, passCheck, expected };
}

describe("an order beside the day that is expected", () => {
  test("falls away where the active part is credited now and the days since were good", async () => {
    const { saveDay, passCheck, expected } = await buildRumble(-4);
    await saveDay(-5);
    expect(await expected()).toMatchObject({
      order: { kind: "protects-too-little", ofDate: null, facts: { isExpected: true } },
      figures: { word: "too-little" },
      ahead: null,
    });
    await passCheck(-4);
    await saveDay(-3);
    await saveDay(-2);
    expect(await expected()).toMatchObject({
      order: null,
      ahead: null,
      figures: { word: "good", verdictAtEar: "under" },
    });
  });

  test("falls away as soon as the credited part makes the day to come right", async () => {
    const { saveDay, passCheck, expected } = await buildRumble(-4);
    await saveDay(-5);
    await passCheck(-1);
    expect(await expected()).toMatchObject({ order: null, figures: { word: "good" } });
  });

  test("is the one of the finding’s page and of the list, and so is that nothing is left to be given", async () => {
    const { client, worker, saveDay, passCheck, expected } = await buildRumble(-4);
    await saveDay(-5);
    const remedy = (await expected()).order.facts.remedy;
    const listed = async () =>
      (await client.get(`/findings?workerId=${worker.id}&kind=protects-too-little`)).body.rows[0];
    const found = await listed();
    expect(found.today).toMatchObject({ is: "asked", proposal: { remedy, left: null } });
    await passCheck(-1);
    expect((await listed()).today).toMatchObject({ is: "in-order", word: "good" });
    const { body } = await client.get(`/findings/${found.id}`);
    expect(body.today).toMatchObject({ is: "in-order", word: "good" });
    expect(body.today.atEarDb).toBeCloseTo((await expected()).figures.atEarDb, 9);
    // What was noticed stays as it was.
    expect(body.facts).toEqual(found.facts);
    await client.send({
      method: "post",
      path: `/findings/${found.id}/steps`,
      body: { kind: "mark-done" },
      revision: body.revision,
    });
    expect((await listed()).today).toBeNull();
  });

  test("stays where a day since was in order, and the day to come is not", async () => {
    const { worker, saveDay, passCheck, expected, site } = await buildRumble(-4);
    await saveDay(-5);
    await passCheck(-4);
    await saveDay(-3);
    await insert("site_settings", {
      organizationId: worker.organizationId,
      siteId: site.id,
      number: 3,
      effectiveFrom: daysFromToday(-1),
      governingRuleSet: "uk-2005",
      comparisonRuleSets: [],
      creditsActivePart: false,
    });
    expect(await expected()).toMatchObject({
      order: { kind: "protects-too-little" },
      figures: { word: "too-little" },
    });
  });

  test("proposes by what the verdict goes by: the own fit of a protector", async () => {
    const { worker, saveDay, expected } = await buildRumble(1);
    const foam = (await select<{ id: string }>(
      "SELECT id FROM protector_models WHERE organization_id = $1 AND name = 'Alder foam'",
      [worker.organizationId],
    )) as [{ id: string }];
    await saveDay(-5);
    const byLabel = (await expected()).order.facts.remedy;
    expect(byLabel.names).toEqual(["Alder foam"]);
    const organizationId = worker.organizationId;
    await buildFitTest({
      worker,
      model: { id: foam[0].id, organizationId, name: "Alder foam" },
      // Less than the label says: in so deep a noise a fit only lowers it.
      parDb: 17,
    });
    const byFit = (await expected()).order.facts.remedy;
    expect(byFit.names).toEqual(["Alder foam"]);
    expect(byFit.atEarDb).toBeCloseTo(98.7 - 17, 6);
    expect(byLabel.atEarDb).not.toBeCloseTo(byFit.atEarDb, 1);
  });
});

test("expected over the limit by the wearing time alone, it is something to do and says why", async () => {
  const { worker, site, task, client, crew, passCheck, saveDay, expected } = await buildRumble(-4);
  await passCheck(-4);
  await saveDay(-2);
  expect(await expected()).toMatchObject({ order: null, ahead: null, figures: { word: "good" } });
  const looks = [{ workerId: worker.id, taskId: task.id, wornCount: 2, seenCount: 3 }];
  const sent = await client.post("/wearing-rounds", {
    siteId: site.id,
    seenOn: daysFromToday(-1),
    looks,
  });
  expect(sent.status).toBe(201);
  const row = await expected();
  expect(row).toMatchObject({
    order: null,
    figures: { word: "good", verdictAtEar: "over" },
    ahead: {
      kind: "not-worn-long-enough",
      facts: { taskName: "Run-up", valueDb: 87, isExpected: true },
    },
  });
  expect(row.ahead.facts.levelDb).toBeCloseTo(row.figures.atEarDb, 9);
  expect(row.ahead.facts.offMin).toBeCloseTo(160, 6);
  // It goes with the shift as well.
  const draft = await client.get(`/crews/${crew.id}/hand-over-draft`);
  expect(draft.body.content.orders).toMatchObject([
    { findingId: null, kind: "not-worn-long-enough" },
  ]);
});
