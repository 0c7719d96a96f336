import { describe, expect, test } from "vitest";
import {
  buildAssignment,
  buildDay,
  buildProtector,
  buildShift,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  owner,
  select,
  signInAs,
} from "../factories";

/** z of the normal distribution at 84 % and 95 %, one-sided, from tables. */
const Z_84 = 0.9945;
const Z_95 = 1.6449;

async function buildFit() {
  const site = await buildSite({ timeZone: "UTC" });
  const { organizationId } = site;
  const client = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const worker = await buildWorker({ site });
  const model = await buildProtector({ organizationId });
  return { site, client, worker, model };
}

const input = (modelId: string, more: object = {}) => ({
  modelId,
  testedOn: daysFromToday(-2),
  method: "real-ear-microphones",
  size: null,
  facts: { leftDb: [26, 24, 28], rightDb: [22, 20], methodSdDb: 2 },
  confidencePct: 84,
  needDb: 15,
  note: "",
  ...more,
});

describe("what is stored of a fit test", () => {
  test("each ear's trials less z times their uncertainty, and the weaker ear governs", async () => {
    const { client, worker, model } = await buildFit();
    const { body } = await client.post(`/workers/${worker.id}/fit-tests`, input(model.id));
    // s of 24, 26, 28 is 2, of 20 and 22 √2; u² = s²/n + 2².
    const left = 26 - Z_84 * Math.sqrt(4 / 3 + 4);
    const right = 21 - Z_84 * Math.sqrt(2 / 2 + 4);
    expect(body.leftDb).toBeCloseTo(left, 2);
    expect(body.rightDb).toBeCloseTo(right, 2);
    expect(body).toMatchObject({ parDb: body.rightDb, hasPassed: true, activePassed: null });
    const stored = await select<{ par_db: number; number: number; has_passed: boolean }>(
      "SELECT v.par_db, v.number, v.has_passed FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id WHERE f.id = $1",
      [body.id],
    );
    expect(stored).toEqual([{ par_db: body.parDb, number: 1, has_passed: true }]);
  });

  test("a correction is a revision with its reason; what was entered stays", async () => {
    const { client, worker, model } = await buildFit();
    const test = (await client.post(`/workers/${worker.id}/fit-tests`, input(model.id))).body;
    const { modelId: _, testedOn: __, ...rest } = input(model.id, { confidencePct: 95 });
    const change = { ...rest, reason: "the site asks for 95 %" };
    const stale = await client.put(`/fit-tests/${test.id}`, change, 7);
    expect(stale.status).toBe(412);
    const corrected = await client.put(`/fit-tests/${test.id}`, change, 1);
    expect(corrected.body.parDb).toBeCloseTo(21 - Z_95 * Math.sqrt(5), 2);
    const revisions = await select<{ number: number; reason: string | null }>(
      "SELECT number, reason FROM fit_test_revisions WHERE fit_test_id = $1 ORDER BY number",
      [test.id],
    );
    expect(revisions).toEqual([
      { number: 1, reason: null },
      { number: 2, reason: "the site asks for 95 %" },
    ]);
  });

  test("struck out it stays with the reason, and nothing more can be done to it", async () => {
    const { client, worker, model } = await buildFit();
    const test = (await client.post(`/workers/${worker.id}/fit-tests`, input(model.id))).body;
    const struck = await client.send({
      method: "post",
      path: `/fit-tests/${test.id}/void`,
      body: { reason: "the other worker's" },
      revision: 1,
    });
    expect(struck.body).toMatchObject({ isVoid: true, revision: 2, parDb: test.parDb });
    const again = await client.send({
      method: "post",
      path: `/fit-tests/${test.id}/void`,
      body: { reason: "once more" },
      revision: 2,
    });
    expect(again.body.code).toBe("wrong-state");
  });

  test("the worker's days from the test on are computed anew, by a void as well", async () => {
    const { site, client, worker, model } = await buildFit();
    await buildAssignment({ worker, inner: model });
    const task = await buildTask({ site });
    const days = [daysFromToday(-3), daysFromToday(-2), daysFromToday(-1)];
    for (const date of days) {
      await buildDay(worker, date, { origin: "imported" });
      await buildShift(worker, { date, tasks: [{ taskId: task.id, durationMin: 480 }] });
    }
    const staleDays = async () =>
      (
        await select<{ date: string }>(
          "SELECT date::text FROM days WHERE worker_id = $1 AND is_stale ORDER BY date",
          [worker.id],
        )
      ).map(({ date }) => date);
    const made = (await client.post(`/workers/${worker.id}/fit-tests`, input(model.id))).body;
    expect(await staleDays()).toEqual(days.slice(1));
    await owner().query("UPDATE days SET is_stale = FALSE WHERE worker_id = $1", [worker.id]);
    await client.send({
      method: "post",
      path: `/fit-tests/${made.id}/void`,
      body: { reason: "wrong worker" },
      revision: 1,
    });
    expect(await staleDays()).toEqual(days.slice(1));
  });
});

describe("what is refused", () => {
  test.each([
    ["a day that lies ahead", { testedOn: daysFromToday(2) }, "testedOn", "in-the-future"],
    ["a day before the hire", { testedOn: "2019-01-01" }, "testedOn", "before-hire"],
    [
      "no trial at all",
      { facts: { leftDb: [], rightDb: [], methodSdDb: 2 } },
      "facts.leftDb",
      "no-trial",
    ],
    [
      "more than the skull lets through",
      { facts: { leftDb: [20], rightDb: [60], methodSdDb: 2 } },
      "facts.rightDb",
      "above-bone-conduction",
    ],
    [
      "one trial of that size among others",
      { facts: { leftDb: [80, 24, 23], rightDb: [22], methodSdDb: 2 } },
      "facts.leftDb",
      "above-bone-conduction",
    ],
  ])("%s", async (_, more, path, code) => {
    const { site, client, worker, model } = await buildFit();
    const answer = await client.post(`/workers/${worker.id}/fit-tests`, input(model.id, more));
    expect(answer.status).toBe(422);
    expect(
      answer.body.issues.map((found: { path: string[]; code: string }) => [
        found.path.join("."),
        found.code,
      ]),
    ).toContainEqual([path, code]);
    expect(await select("SELECT 1 FROM fit_tests WHERE site_id = $1", [site.id])).toEqual([]);
  });

  test("each trial that no ear can have, at its ear and with its number", async () => {
    const { client, worker, model } = await buildFit();
    const facts = { leftDb: [70], rightDb: [20, 69], methodSdDb: 2 };
    const answer = await client.post(`/workers/${worker.id}/fit-tests`, input(model.id, { facts }));
    expect(answer.body.issues).toMatchObject([
      { path: ["facts", "leftDb"], params: { ear: "left", trial: 1, foundDb: 70 } },
      { path: ["facts", "rightDb"], params: { ear: "right", trial: 2, foundDb: 69 } },
    ]);
  });

  test("a size that the model does not come in; another organization's model", async () => {
    const { client, worker, model } = await buildFit();
    await owner().query(
      'INSERT INTO protector_model_revisions (organization_id, model_id, number, effective_from, data, reason) SELECT organization_id, model_id, 2, effective_from, data || \'{"sizes": ["S", "L"]}\', \'sizes\' FROM protector_model_revisions WHERE model_id = $1',
      [model.id],
    );
    const path = `/workers/${worker.id}/fit-tests`;
    const wrong = await client.post(path, input(model.id, { size: "M" }));
    expect(wrong.body.issues).toMatchObject([{ path: ["size"], code: "size-unknown" }]);
    expect((await client.post(path, input(model.id, { size: "L" }))).status).toBe(201);
    const foreign = await buildProtector();
    expect((await client.post(path, input(foreign.id))).status).toBe(404);
  });
});
