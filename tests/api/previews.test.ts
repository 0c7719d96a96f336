import { describe, expect, test } from "vitest";
import { recomputeStaleDays } from "../../server/jobs/recompute-stale-days";
import {
  buildAssignment,
  buildCrew,
  buildJob,
  buildProtector,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  owner,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

const level = {
  metric: { kind: "steady" },
  levelDb: 84,
  grade: "task-level",
  effectiveFrom: daysFromToday(-9),
};
const settings = {
  effectiveFrom: daysFromToday(-9),
  governingRuleSet: "us-general-industry",
  comparisonRuleSets: [],
};

describeEndpoint({
  route: "POST /tasks/:id/levels/preview",
  as: "officer",
  not: "auditor",
  event: null,
  status: 200,
  bad: { body: { levelDb: 161 } },
  badField: "levelDb",
  call: async (site) => ({
    method: "post",
    path: `/tasks/${(await buildTask({ site })).id}/levels/preview`,
    body: level,
  }),
});
describeEndpoint({
  route: "POST /protectors/:id/revisions/preview",
  as: "officer",
  not: "supervisor",
  event: null,
  status: 200,
  bad: { body: { snrDb: -1 } },
  badField: "snrDb",
  call: async ({ organizationId }) => ({
    method: "post",
    path: `/protectors/${(await buildProtector({ organizationId })).id}/revisions/preview`,
    body: { snrDb: 20, effectiveFrom: daysFromToday(-9) },
  }),
});
describeEndpoint({
  route: "POST /sites/:id/settings/preview",
  as: "officer",
  not: "administrator",
  event: null,
  status: 200,
  bad: { body: { governingRuleSet: "none" } },
  badField: "governingRuleSet",
  call: async (site) => ({
    method: "post",
    path: `/sites/${site.id}/settings/preview`,
    body: settings,
  }),
});
describeEndpoint({
  route: "GET /recompute-progress",
  as: "officer",
  not: "auditor",
  event: null,
  bad: null,
  namesNothing: true,
  call: async () => ({ method: "get", path: "/recompute-progress" }),
});

/** Two hours in a steady 100 dB of eight, on two dates; one worker with a muff of SNR 28, one without. */
async function buildCell(site: Site, levelDb = 100) {
  const { organizationId } = site;
  const task = await buildTask({ site, name: "Run-up", levelDb, metric: { kind: "steady" } });
  const quiet = await buildTask({ site, name: "Control room", levelDb: 60 });
  const job = await buildJob({ site, tasks: [{ taskId: task.id, durationMin: 120 }] });
  const [kept, bare] = [
    await buildWorker({ site, jobId: job.id }),
    await buildWorker({ site, jobId: job.id }),
  ];
  const muff = await buildProtector({
    organizationId,
    data: { slc80Db: 24, hDb: 32, mDb: 26, lDb: 18 },
  });
  await buildAssignment({ worker: kept, inner: muff });
  const crew = await buildCrew({ site, members: [kept, bare] });
  const officer = await signInAs(await buildUser({ organizationId, roles: ["officer"] }));
  const dates = [daysFromToday(-10), daysFromToday(-8)];
  for (const date of dates) {
    const rows = [kept, bare].map(({ id: workerId }) => ({
      kind: "worked",
      workerId,
      localStart: "06:00",
      lengthMin: 480,
      tasks: [
        { taskId: task.id, durationMin: 120, wornPct: workerId === kept.id ? 100 : null },
        { taskId: quiet.id, durationMin: 360 },
      ],
    }));
    const answer = await officer.post(`/crews/${crew.id}/day`, { date, rows });
    expect(answer.body.refused).toEqual([]);
  }
  return { task, kept, bare, muff, officer, dates };
}

interface Change {
  workerId: string;
  lastDate: string;
  line: string;
  before: string;
  after: string;
}

describe("a preview", () => {
  test("says what the change then does, and changes nothing itself", async () => {
    const site = await buildSite();
    const { task, kept, bare, officer, dates } = await buildCell(site);
    const before = await select(
      "SELECT count(*)::int AS n, (SELECT count(*)::int FROM days WHERE is_stale) AS stale FROM task_levels WHERE task_id = $1",
      [task.id],
    );
    const preview = await officer.post(`/tasks/${task.id}/levels/preview`, level);
    expect(preview.body).toMatchObject({ days: 2, workers: 2, changedDays: 2, tooMany: 0 });
    // 100 dB for 2 of 8 h is LEX,8h 94.0, past 85; 84 dB is 78.0, under 80.
    const outside = (preview.body.changes as Change[]).filter(
      ({ line }) => line === "without-protection",
    );
    expect(
      outside.map(({ workerId, lastDate, before: was, after }) => ({
        workerId,
        date: lastDate,
        was,
        after,
      })),
    ).toEqual(
      expect.arrayContaining(
        [kept, bare].map(({ id }) => ({
          workerId: id,
          date: dates[1],
          was: "over",
          after: "under",
        })),
      ),
    );
    expect(
      await select(
        "SELECT count(*)::int AS n, (SELECT count(*)::int FROM days WHERE is_stale) AS stale FROM task_levels WHERE task_id = $1",
        [task.id],
      ),
    ).toEqual(before);

    expect(
      (
        await officer.post(`/tasks/${task.id}/levels`, {
          ...level,
          reason: "the enclosure was built",
        })
      ).status,
    ).toBe(201);
    expect((await officer.get("/recompute-progress")).body).toEqual({ daysLeft: 2 });
    const stored = () =>
      select<{
        worker_id: string;
        date: string;
        verdict_outside: string;
        verdict_at_ear: string;
        word: string | null;
      }>(
        "SELECT d.worker_id, d.date::text AS date, r.verdict_outside, r.verdict_at_ear, r.word FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.site_id = $1",
        [site.id],
      );
    const was = await stored();
    await recomputeStaleDays(site.organizationId);
    expect((await officer.get("/recompute-progress")).body).toEqual({ daysLeft: 0 });
    const lines = {
      "without-protection": "verdict_outside",
      "at-the-ear": "verdict_at_ear",
      protector: "word",
    } as const;
    const happened = (await stored()).flatMap((now) => {
      const then = was.find((one) => one.worker_id === now.worker_id && one.date === now.date)!;
      return Object.entries(lines).flatMap(([line, column]) =>
        then[column] === now[column]
          ? []
          : [
              {
                workerId: now.worker_id,
                lastDate: now.date,
                line,
                before: then[column] ?? "none",
                after: now[column] ?? "none",
              },
            ],
      );
    });
    const inOrder = (changes: Change[]) =>
      changes
        .map(({ workerId, lastDate, line, before: from, after }) =>
          [workerId, lastDate, line, from, after].join(" "),
        )
        .sort();
    expect(inOrder(preview.body.changes)).toEqual(inOrder(happened as Change[]));
  });

  test("a protector's data concern who wears it only", async () => {
    const site = await buildSite({ governingRuleSet: "us-general-industry" });
    // 105 dB for 2 h is a dose of 200 %, TWA 95: 79 under a rating of 23, 95 under one of 5 (Appendix B: less 7 dB).
    const { kept, muff, officer } = await buildCell(site, 105);
    const preview = await officer.post(`/protectors/${muff.id}/revisions/preview`, {
      usRatingDb: 5,
      effectiveFrom: daysFromToday(-30),
    });
    expect(preview.body).toMatchObject({ days: 2, workers: 1, changedDays: 2 });
    expect(
      preview.body.changes.map(({ workerId, line, before, after }: Change) => [
        workerId,
        line,
        before,
        after,
      ]),
    ).toEqual(expect.arrayContaining([[kept.id, "protector", "enough", "too-little"]]));
    expect(
      await select("SELECT 1 FROM protector_model_revisions WHERE model_id = $1", [muff.id]),
    ).toHaveLength(1);
  });

  test("other rules concern the site's days from their date on", async () => {
    const site = await buildSite();
    const { officer, dates } = await buildCell(site);
    const preview = await officer.post(`/sites/${site.id}/settings/preview`, settings);
    expect(preview.body).toMatchObject({ days: 2, workers: 2 });
    expect(new Set(preview.body.changes.map(({ lastDate }: Change) => lastDate))).toEqual(
      new Set([dates[1]]),
    );
    expect(await select("SELECT 1 FROM site_settings WHERE site_id = $1", [site.id])).toHaveLength(
      1,
    );
  });

  test("of more days than one request looks at, the latest are looked at and the rest is counted", async () => {
    const site = await buildSite();
    const { officer } = await buildCell(site);
    const worker = await buildWorker({ site });
    await owner().query(
      `INSERT INTO days (organization_id, worker_id, date, site_id) SELECT $1, $2, date '2005-01-01' + n, $3 FROM generate_series(1, 20000) n`,
      [site.organizationId, worker.id, site.id],
    );
    const preview = await officer.post(`/sites/${site.id}/settings/preview`, {
      ...settings,
      effectiveFrom: "1990-01-01",
    });
    expect(preview.body.days - preview.body.tooMany).toBe(20_000);
    expect(preview.body.tooMany).toBe(4);
  });
});
