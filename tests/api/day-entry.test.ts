import { describe, expect, test } from "vitest";
import { localDate, localTime } from "../../shared/time/zone";
import {
  buildAssignment,
  buildCrew,
  buildInstrument,
  buildJob,
  buildOrganization,
  buildProtector,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  select,
  signInAs,
} from "../factories";

const yesterday = daysFromToday(-1);

/** A crew of two in a test cell, one with a muff, one without anything; supervisor, officer, worker with sign-ins. */
async function buildCell() {
  const { id: organizationId } = await buildOrganization();
  const site = await buildSite({
    organizationId,
    governingRuleSet: "uk-2005",
    timeZone: "Europe/London",
  });
  const runUp = await buildTask({ site, name: "Run-up", levelDb: 100, metric: { kind: "steady" } });
  const control = await buildTask({ site, name: "Control room", levelDb: 70 });
  const job = await buildJob({
    site,
    tasks: [
      { taskId: runUp.id, durationMin: 120 },
      { taskId: control.id, durationMin: 360 },
    ],
  });
  const kept = await buildWorker({ site, jobId: job.id, name: "A. Sørli" });
  const bare = await buildWorker({ site, jobId: job.id, name: "R. Szabó 🦺" });
  const muff = await buildProtector({
    organizationId,
    name: "Fenmuff",
    data: {
      snrDb: null,
      usRatingDb: null,
      hDb: null,
      mDb: null,
      lDb: null,
      bands: {
        meanDb: [14, 16, 21, 28, 34, 33, 36, 35],
        sdDb: [3, 3, 3, 3, 3, 3, 3, 3],
      },
      slc80Db: 24,
    },
  });
  await buildAssignment({ worker: kept, inner: muff });
  const officer = await buildUser({ organizationId, roles: ["officer"], name: "S. Ferrand" });
  const supervisor = await buildUser({ organizationId, roles: ["supervisor"] });
  await buildUser({ organizationId, roles: ["worker"], workerId: bare.id });
  const crew = await buildCrew({
    site,
    members: [kept, bare],
    supervisors: [supervisor],
    fromDate: "2018-01-01",
  });
  return { organizationId, site, runUp, control, kept, bare, muff, officer, supervisor, crew };
}

type Cell = Awaited<ReturnType<typeof buildCell>>;

const worked = ({ runUp, control }: Cell, workerId: string, more: object = {}) => ({
  kind: "worked",
  workerId,
  localStart: "06:00",
  lengthMin: 480,
  unaccounted: { how: "unknown" },
  tasks: [
    { taskId: runUp.id, durationMin: 120, wornPct: 100 },
    { taskId: control.id, durationMin: 360 },
  ],
  ...more,
});

describe("a crew's day", () => {
  test("opens filled from roster and nominal day, saves, computes, finds and schedules notices", async () => {
    const cell = await buildCell();
    const client = await signInAs(cell.officer);
    const opened = await client.get(`/crews/${cell.crew.id}/day?date=${yesterday}`);
    expect(opened.status).toBe(200);
    expect(opened.body.rows).toHaveLength(2);
    expect(opened.body.rows[0].nominal).toEqual([
      { taskId: cell.runUp.id, durationMin: 120 },
      { taskId: cell.control.id, durationMin: 360 },
    ]);
    expect(
      opened.body.tasks
        .filter((task: { isColumn: boolean }) => task.isColumn)
        .map((task: { name: string }) => task.name),
    ).toEqual(["Run-up", "Control room"]);

    const saved = await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [worked(cell, cell.kept.id), worked(cell, cell.bare.id)],
    });
    expect(saved.status).toBe(201);
    expect(saved.body.refused).toEqual([]);
    // LEX,8h = 10 lg(2/8·10^10 + 6/8·10^7) = 10 lg 2.5075·10^9, by hand: 93.99 dB.
    expect(saved.body.saved[1].figures.outsideDb).toBeCloseTo(93.9924, 3);
    expect(saved.body.saved[1].figures).toMatchObject({
      verdictAtEar: "over",
      verdictOutside: "over",
      hasProtector: "no",
    });
    expect(saved.body.notices.state).toBe("waiting");
    expect(saved.body.notices.people).toBe(3);

    const findings = await client.get("/findings");
    const ofBare = findings.body.rows.filter(
      (row: { worker: { id: string } }) => row.worker?.id === cell.bare.id,
    );
    expect(ofBare.map((row: { kind: string }) => row.kind).sort()).toEqual([
      "no-protector",
      "over-limit-at-ear",
    ]);
    const [event] = await select<{ count: string }>(
      "SELECT count(*) FROM audit_events WHERE organization_id = $1 AND action = 'record-shift'",
      [cell.organizationId],
    );
    expect(event?.count).toBe("2");
  });

  test("keeps what does not stand as it was and stores the rest", async () => {
    const cell = await buildCell();
    const client = await signInAs(cell.officer);
    const tooLong = worked(cell, cell.bare.id, {
      tasks: [{ taskId: cell.runUp.id, durationMin: 525, wornPct: null }],
    });
    const saved = await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [worked(cell, cell.kept.id), tooLong],
    });
    expect(saved.body.saved.map((row: { workerId: string }) => row.workerId)).toEqual([
      cell.kept.id,
    ]);
    expect(saved.body.refused).toEqual([
      {
        index: 1,
        workerId: cell.bare.id,
        issues: [
          {
            path: ["tasks"],
            code: "tasks-longer-than-shift",
            params: { sumMin: 525, lengthMin: 480, overMin: 45 },
          },
        ],
      },
    ]);
    const [shifts] = await select<{ count: string }>(
      "SELECT count(*) FROM shifts WHERE organization_id = $1",
      [cell.organizationId],
    );
    expect(shifts?.count).toBe("1");
  });

  test("refuses a future day, a foreign task, a whole day unasked, a stranger, negative minutes, a day before hire", async () => {
    const cell = await buildCell();
    const stranger = await buildWorker({ site: cell.site });
    const client = await signInAs(cell.officer);
    const issuesOf = async (row: object, date = yesterday) => {
      const { body } = await client.post(`/crews/${cell.crew.id}/day`, { date, rows: [row] });
      return body.refused[0]?.issues.map(({ code }: { code: string }) => code);
    };
    expect(await issuesOf(worked(cell, cell.kept.id), daysFromToday(2))).toContain("in-the-future");
    const foreign = await buildTask();
    expect(
      await issuesOf(
        worked(cell, cell.kept.id, { tasks: [{ taskId: foreign.id, durationMin: 10 }] }),
      ),
    ).toEqual(["task-unknown"]);
    // Long enough ago that it is over, whatever the time.
    expect(
      await issuesOf(worked(cell, cell.kept.id, { lengthMin: 1440 }), daysFromToday(-3)),
    ).toEqual(["whole-day-unconfirmed"]);
    expect(await issuesOf(worked(cell, cell.kept.id, { lengthMin: 0 }))).toEqual(["too_small"]);
    expect(await issuesOf(worked(cell, stranger.id))).toEqual(["not-in-crew"]);
    expect(
      await issuesOf(
        worked(cell, cell.kept.id, { tasks: [{ taskId: cell.runUp.id, durationMin: -5 }] }),
      ),
    ).toEqual(["too_small"]);
    expect(await issuesOf(worked(cell, cell.kept.id), "2019-06-03")).toEqual(["before-hire"]);
  });

  test("a shift that has not ended is asked about, once", async () => {
    const cell = await buildCell();
    const client = await signInAs(cell.officer);
    const zone = "Europe/London";
    const startedAt = new Date(Date.now() - 60_000);
    const save = (more: object) =>
      client.post(`/crews/${cell.crew.id}/day`, {
        date: localDate(startedAt, zone),
        rows: [
          worked(cell, cell.bare.id, {
            localStart: localTime(startedAt, zone),
            whichHour: "first",
            ...more,
          }),
        ],
      });
    const asked = await save({});
    expect(asked.body.refused[0].issues).toMatchObject([
      {
        path: ["lengthMin"],
        code: "open-end-unconfirmed",
        params: { time: expect.stringMatching(/^\d\d:\d\d$/) },
      },
    ]);
    const { body } = await save({ confirmsOpenEnd: true });
    expect(body.refused).toEqual([]);
    // The same again is no change, and not asked about.
    expect((await save({})).body).toMatchObject({ refused: [], conflicts: [] });
    const { shiftId, revision } = body.saved[0].shift;
    const correct = (more: object) =>
      client.send({
        method: "put",
        path: `/shifts/${shiftId}`,
        body: {
          localStart: localTime(startedAt, zone),
          whichHour: "first",
          lengthMin: 470,
          unaccounted: { how: "unknown" },
          tasks: [],
          reason: "shorter",
          ...more,
        },
        revision,
      });
    const open = await correct({});
    expect([open.status, open.body.issues?.[0]?.code]).toEqual([422, "open-end-unconfirmed"]);
    expect((await correct({ confirmsOpenEnd: true })).status).toBe(200);
  });

  test("a double click and a second tab change nothing; a newer revision is never overwritten", async () => {
    const cell = await buildCell();
    const client = await signInAs(cell.officer);
    const body = { date: yesterday, rows: [worked(cell, cell.kept.id)] };
    const first = await client.post(`/crews/${cell.crew.id}/day`, body, "the-same-key-1");
    const again = await client.post(`/crews/${cell.crew.id}/day`, body, "the-same-key-1");
    expect(again.body).toEqual(first.body);
    const otherBody = await client.post(
      `/crews/${cell.crew.id}/day`,
      { ...body, rows: [worked(cell, cell.bare.id)] },
      "the-same-key-1",
    );
    expect(otherBody.status).toBe(422);
    expect(otherBody.body.code).toBe("key-reused");

    const { shiftId, revision } = first.body.saved[0].shift;
    const change = (lengthMin: number) => ({
      date: yesterday,
      rows: [worked(cell, cell.kept.id, { shiftId, revision, lengthMin, reason: "stayed longer" })],
    });
    const mine = await client.post(`/crews/${cell.crew.id}/day`, change(500));
    expect(mine.body.saved[0].shift).toMatchObject({ revision: 2, lengthMin: 500 });
    const late = await client.post(`/crews/${cell.crew.id}/day`, change(510));
    expect(late.body.saved).toEqual([]);
    expect(late.body.conflicts[0].current).toMatchObject({ revision: 2, lengthMin: 500 });
    const [stored] = await select<{ count: string }>(
      "SELECT count(*) FROM shift_revisions WHERE shift_id = $1",
      [shiftId],
    );
    expect(stored?.count).toBe("2");
  });

  test("two savings at once of one worker's day: one stands, the other meets it", async () => {
    const cell = await buildCell();
    const client = await signInAs(cell.officer);
    const save = (lengthMin: number) =>
      client.post(`/crews/${cell.crew.id}/day`, {
        date: yesterday,
        rows: [worked(cell, cell.kept.id, { lengthMin })],
      });
    const answers = await Promise.all([save(480), save(490)]);
    expect(answers.map(({ status }) => status)).toEqual([201, 201]);
    expect(answers.flatMap(({ body }) => body.saved)).toHaveLength(1);
    expect(answers.flatMap(({ body }) => body.conflicts)).toHaveLength(1);
  });

  test("a correction takes its finding and its unsent notice with it", async () => {
    const cell = await buildCell();
    const client = await signInAs(cell.officer);
    const first = await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [worked(cell, cell.bare.id)],
    });
    const { shiftId, revision } = first.body.saved[0].shift;
    const mended = worked(cell, cell.bare.id, {
      shiftId,
      revision,
      reason: "typed 120 for 1",
      tasks: [{ taskId: cell.control.id, durationMin: 480 }],
    });
    const second = await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [mended],
    });
    expect(second.body.saved[0].figures.verdictAtEar).toBe("under");
    const open = await client.get(`/findings?workerId=${cell.bare.id}`);
    expect(open.body.rows).toEqual([]);
    const states = await select<{ state: string }>(
      "SELECT DISTINCT state FROM notices WHERE organization_id = $1",
      [cell.organizationId],
    );
    expect(states).toEqual([{ state: "withdrawn" }]);
    // And typed back again: the finding is new, not one that came back.
    const third = await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [worked(cell, cell.bare.id, { shiftId, revision: 2, reason: "it was 120 after all" })],
    });
    expect(third.body.saved[0].figures.verdictAtEar).toBe("over");
    const again = await client.get(`/findings?workerId=${cell.bare.id}`);
    expect(again.body.rows.map((row: { state: string }) => row.state)).toEqual(["new", "new"]);
  });

  test("a closed finding comes back only for a day after its closing", async () => {
    const cell = await buildCell();
    const client = await signInAs(cell.officer);
    await client.post(`/crews/${cell.crew.id}/day`, {
      date: daysFromToday(-3),
      rows: [worked(cell, cell.bare.id)],
    });
    const open = await client.get(`/findings?workerId=${cell.bare.id}&kind=no-protector`);
    const [finding] = open.body.rows;
    const closed = await client.send({
      method: "post",
      path: `/findings/${finding.id}/steps`,
      body: { kind: "close", text: "left the cell for good" },
      revision: finding.revision,
    });
    expect(closed.body.state).toBe("closed");
    const stale = await client.send({
      method: "post",
      path: `/findings/${finding.id}/steps`,
      body: { kind: "comment", text: "late" },
      revision: finding.revision,
    });
    expect(stale.status).toBe(412);
    expect(stale.body.current.state).toBe("closed");
    await insert("finding_steps", {
      organizationId: cell.organizationId,
      findingId: finding.id,
      kind: "comment",
      text: "kept",
    });
    await select("UPDATE findings SET closed_on = $2 WHERE id = $1", [
      finding.id,
      daysFromToday(-2),
    ]);
    await client.post(`/crews/${cell.crew.id}/day`, {
      date: daysFromToday(-2),
      rows: [worked(cell, cell.bare.id)],
    });
    expect(
      (await client.get(`/findings?workerId=${cell.bare.id}&kind=no-protector`)).body.rows,
    ).toEqual([]);
    await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [worked(cell, cell.bare.id)],
    });
    const back = await client.get(`/findings?workerId=${cell.bare.id}&kind=no-protector`);
    expect(back.body.rows).toMatchObject([{ state: "came-back", daysCount: 1 }]);
  });

  test("a reading under the criterion's own settings governs, and its gap to the tasks is a finding", async () => {
    const cell = await buildCell();
    const instrument = await buildInstrument({ site: cell.site });
    const client = await signInAs(cell.officer);
    const settings = {
      criterionLevelDb: 85,
      exchangeRateDb: 3,
      thresholdDb: null,
      weighting: "A",
      response: "slow",
    };
    const run = {
      instrumentId: instrument.id,
      durationMin: 480,
      covers: "shift",
      readings: [{ settings, averageDb: 86 }],
    };
    const saved = await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [worked(cell, cell.kept.id, { run })],
    });
    expect(saved.body.refused).toEqual([]);
    expect(saved.body.saved[0].figures.outsideDb).toBeCloseTo(86, 9);
    const kinds = (await client.get(`/findings?workerId=${cell.kept.id}`)).body.rows.map(
      (row: { kind: string }) => row.kind,
    );
    expect(kinds).toContain("reading-gap");
    const result = await client.get(`/workers/${cell.kept.id}/days/${yesterday}`);
    expect(result.body.evaluation.tasksDb).toBeCloseTo(93.9924, 3);
    expect(result.body.input.shifts[0].readings).toHaveLength(1);
  });

  test("a run with several settings rows is stored with the shift, and corrected row by row", async () => {
    const cell = await buildCell();
    const instrument = await buildInstrument({ site: cell.site });
    const client = await signInAs(cell.officer);
    const settings = (thresholdDb: number) => ({
      criterionLevelDb: 90,
      exchangeRateDb: 5,
      thresholdDb,
      weighting: "A",
      response: "slow",
    });
    const run = { instrumentId: instrument.id, durationMin: 480, covers: "shift" };
    const save = (more: object) =>
      client.post(`/crews/${cell.crew.id}/day`, {
        date: yesterday,
        rows: [worked(cell, cell.kept.id, more)],
      });
    const first = await save({
      run: {
        ...run,
        readings: [
          { settings: settings(80), dosePct: 62 },
          { settings: settings(90), dosePct: 41, lasMaxDb: 108 },
        ],
      },
    });
    expect(first.body.refused).toEqual([]);
    const [saved] = first.body.saved;
    expect(saved.readings).toMatchObject([
      { settings: settings(80), dosePct: 62, runRevision: 1 },
      { settings: settings(90), dosePct: 41, lasMaxDb: 108, runRevision: 1 },
    ]);
    const { runId } = saved.readings[0];
    expect(saved.readings[1].runId).toBe(runId);

    const { shiftId, revision } = saved.shift;
    const changed = {
      shiftId,
      revision,
      reason: "second row misread",
      run: {
        ...run,
        runId,
        runRevision: 1,
        readings: [
          { settings: settings(80), dosePct: 62 },
          { settings: settings(90), dosePct: 44, lasMaxDb: 108 },
        ],
      },
    };
    const again = await save(changed);
    expect(again.body.saved[0].readings).toMatchObject([
      { dosePct: 62, runRevision: 2 },
      { dosePct: 44, lasMaxDb: 108, runRevision: 2 },
    ]);

    const empty = await save({
      ...changed,
      run: { ...run, readings: [{ settings: settings(80) }] },
    });
    expect(empty.body.refused[0].issues).toMatchObject([
      { path: ["run", "readings", 0], code: "reading-empty" },
    ]);
  });

  test("absent, and present again", async () => {
    const cell = await buildCell();
    const client = await signInAs(cell.officer);
    await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [{ kind: "absent", workerId: cell.kept.id }],
    });
    const grid = await client.get(`/crews/${cell.crew.id}/day?date=${yesterday}`);
    expect(
      grid.body.rows.find((row: { worker: { id: string } }) => row.worker.id === cell.kept.id)
        .isAbsent,
    ).toBe(true);
    await client.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [{ kind: "not-absent", workerId: cell.kept.id }],
    });
    expect(
      (await client.get(`/crews/${cell.crew.id}/day?date=${yesterday}`)).body.rows[0].isAbsent,
    ).toBe(false);
  });

  test("the crew sheet's last shift is the latest recorded day, today's too", async () => {
    const cell = await buildCell();
    const officer = await signInAs(cell.officer);
    const dates: string[] = [];
    const { today } = (await officer.get(`/crews/${cell.crew.id}/day?date=${yesterday}`)).body;
    for (const date of [yesterday, today]) {
      await officer.post(`/crews/${cell.crew.id}/day`, {
        date,
        rows: [worked(cell, cell.kept.id, { confirmsOpenEnd: true })],
      });
      dates.push((await officer.get(`/crews/${cell.crew.id}/sheet`)).body.last.date);
    }
    expect(dates).toEqual([yesterday, today]);
  });

  test("the supervisor sees own crew's sheet with one order a worker, and another crew is not there", async () => {
    const cell = await buildCell();
    const officer = await signInAs(cell.officer);
    await officer.post(`/crews/${cell.crew.id}/day`, {
      date: yesterday,
      rows: [worked(cell, cell.kept.id), worked(cell, cell.bare.id)],
    });
    const client = await signInAs(cell.supervisor);
    const sheet = await client.get(`/crews/${cell.crew.id}/sheet`);
    expect(sheet.status).toBe(200);
    expect(sheet.body.last.rows).toHaveLength(2);
    expect(sheet.body.last.rows[0].order.kind).toBe("no-protector");
    expect(sheet.body.expected.rows[0].figures.outsideDb).toBeCloseTo(93.9924, 3);
    const other = await buildCrew({ site: cell.site });
    expect((await client.get(`/crews/${other.id}/sheet`)).status).toBe(404);
    expect((await client.get("/crews/junk/sheet")).body.code).toBe("not-found");
    expect((await client.get(`/crews/${cell.crew.id}/day?date=${yesterday}`)).status).toBe(403);
    const { findingId, revision } = sheet.body.last.rows[0].order;
    const done = await client.send({
      method: "post",
      path: `/findings/${findingId}/steps`,
      body: { kind: "mark-done", text: "given a muff" },
      revision,
    });
    expect(done.body.state).toBe("done");
    const closing = await client.send({
      method: "post",
      path: `/findings/${findingId}/steps`,
      body: { kind: "close", text: "all is well" },
      revision: done.body.revision,
    });
    expect(closing.status).toBe(403);
  });
});
