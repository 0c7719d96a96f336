import { describe, expect, test } from "vitest";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import { addDays, localDate } from "../../shared/time/zone";
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

const TIME_ZONE = "Europe/London";

/** A worker with an address, an officer and a supervisor; 8 h a day of grinding, taken for 70 dB. */
async function buildQuietShop() {
  const { id: organizationId } = await buildOrganization();
  const site = await buildSite({
    organizationId,
    governingRuleSet: "uk-2005",
    timeZone: TIME_ZONE,
  });
  const task = await buildTask({ site, name: "Grinding", levelDb: 70, metric: { kind: "steady" } });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 480 }] });
  const worker = await buildWorker({ site, jobId: job.id });
  await buildUser({ organizationId, roles: ["worker"], workerId: worker.id });
  const supervisor = await buildUser({ organizationId, roles: ["supervisor"] });
  const crew = await buildCrew({ site, members: [worker], supervisors: [supervisor] });
  const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const save = async (daysAgo: number) => {
    const answer = await officer.post(`/crews/${crew.id}/day`, {
      date: daysFromToday(-daysAgo),
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
    expect(answer.body.refused).toEqual([]);
  };
  const level = (levelDb: number, daysAgo: number) => ({
    metric: { kind: "steady" },
    levelDb,
    grade: "task-level",
    effectiveFrom: daysFromToday(-daysAgo),
  });
  const correct = async (levelDb: number, daysAgo: number) => {
    const answer = await officer.post(`/tasks/${task.id}/levels`, {
      ...level(levelDb, daysAgo),
      reason: "measured anew",
    });
    expect(answer.status).toBe(201);
    await recomputeStaleDays(organizationId);
  };
  const preview = (levelDb: number, daysAgo: number) =>
    officer.post(`/tasks/${task.id}/levels/preview`, level(levelDb, daysAgo));
  const finding = async (kind: string) => {
    const { body } = await officer.get(`/findings?workerId=${worker.id}&kind=${kind}`);
    return (await officer.get(`/findings/${body.rows[0].id}`)).body;
  };
  const told = () =>
    select<{ audience: string; date: string }>(
      `SELECT DISTINCT n.audience, i.date::text AS date FROM notices n JOIN notice_items i ON i.notice_id = n.id
       WHERE n.organization_id = $1 ORDER BY 1, 2`,
      [organizationId],
    );
  return { organizationId, save, correct, preview, finding, told };
}

describe("a finding whose first day lies too far back to be news", () => {
  test("is told by its latest fresh day", async () => {
    const { save, correct, finding, told } = await buildQuietShop();
    for (const daysAgo of [45, 5, 2]) await save(daysAgo);
    await correct(105, 60);
    const date = daysFromToday(-2);
    expect(await told()).toEqual([
      { audience: "officer", date },
      { audience: "supervisor", date },
      { audience: "worker", date },
    ]);
    const found = await finding("no-protector");
    expect(found).toMatchObject({ firstDate: daysFromToday(-45), untold: null });
    expect(found.told).toHaveLength(3);
  });

  test("is told once a fresh day joins it, and then no more", async () => {
    const { save, correct, finding, told } = await buildQuietShop();
    await save(45);
    await correct(105, 60);
    expect(await told()).toEqual([]);
    expect((await finding("no-protector")).untold).toBe("long-ago");
    await save(3);
    const once = await told();
    expect(once.map(({ date }) => date)).toEqual(Array(3).fill(daysFromToday(-3)));
    await save(1);
    expect(await told()).toEqual(once);
  });

  test("is not overdue when it is noticed", async () => {
    const { save, correct, finding } = await buildQuietShop();
    await save(45);
    await correct(105, 60);
    const today = localDate(new Date(), TIME_ZONE);
    expect((await finding("no-protector")).dueOn).toBe(addDays(today, 1));
  });
});

describe("a preview foretells who is told", () => {
  test("as many as are told then, of old days nobody", async () => {
    const { organizationId, save, correct, preview, told } = await buildQuietShop();
    await save(45);
    expect((await preview(105, 60)).body).toMatchObject({ days: 1, overDays: 1, people: 0 });
    for (const daysAgo of [5, 2]) await save(daysAgo);
    expect((await preview(71, 60)).body.people).toBe(0);
    expect((await preview(105, 60)).body).toMatchObject({ days: 3, overDays: 3, people: 3 });
    // Looking has left nothing behind.
    expect(await told()).toEqual([]);
    expect(
      await select("SELECT 1 FROM findings WHERE organization_id = $1", [organizationId]),
    ).toEqual([]);
    await correct(105, 60);
    expect(await told()).toHaveLength(3);
  });

  test("and who is told that an earlier mail is replaced", async () => {
    const { organizationId, save, correct, preview } = await buildQuietShop();
    for (const daysAgo of [5, 2]) await save(daysAgo);
    await correct(105, 60);
    expect((await preview(103, 60)).body.people).toBe(0);
    await select("UPDATE notices SET state = 'sent', sent_at = now() WHERE organization_id = $1", [
      organizationId,
    ]);
    expect((await preview(103, 60)).body.people).toBe(3);
    expect((await preview(105, 60)).body.people).toBe(0);
  });
});

test("a finding says why nobody is told of it", async () => {
  const { organizationId, save, correct, finding } = await buildQuietShop();
  await save(2);
  // 86 dB for 8 h is over the upper action value of 85 dB and under the limit of 87 dB: an officer's business.
  await correct(86, 60);
  expect((await finding("no-protector")).untold).toBeNull();
  await select("DELETE FROM notice_items WHERE organization_id = $1", [organizationId]);
  expect((await finding("no-protector")).untold).toBe("no-address");
});
