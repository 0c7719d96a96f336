import { describe, expect, test } from "vitest";
import { searchTimetable } from "../../server/jobs/search-timetable";
import {
  buildCrew,
  buildFinding,
  buildJob,
  buildSite,
  buildTask,
  buildUser,
  buildWorker,
  daysFromToday,
  insert,
  type Site,
  select,
  signInAs,
} from "../factories";
import { describeEndpoint } from "./five-cases";

/** A crew of three with a nominal day, a loud task and a quiet one. */
async function buildShop(site: Site) {
  const loud = await buildTask({ site, levelDb: 91 });
  const quiet = await buildTask({ site, levelDb: 70 });
  const job = await buildJob({ site, tasks: [{ taskId: quiet.id, durationMin: 480 }] });
  const people = [];
  for (const name of ["Ash", "Birch", "Cedar"])
    people.push(await buildWorker({ site, jobId: job.id, name }));
  const crew = await buildCrew({ site, members: people });
  return { loud, quiet, crew, people };
}

type Shop = Awaited<ReturnType<typeof buildShop>>;

const inputOf = ({ loud, quiet, crew, people }: Shop) => ({
  scopeKind: "crew",
  scopeId: crew.id,
  goal: "limit",
  startsAt: "06:00",
  slots: 32,
  mostPct: 100,
  wornPct: null,
  personIds: people.map(({ id }) => id),
  tasks: [
    {
      taskId: loud.id,
      staffing: [{ from: 0, to: 32, people: 1 }],
      qualifiedIds: null,
      longestStay: 4,
      longestTotal: null,
    },
  ],
  restTaskId: quiet.id,
  quietDb: null,
});

const officerOf = async (site: Site) =>
  signInAs(await buildUser({ organizationId: site.organizationId, roles: ["officer"] }));

async function ordered(
  site: Site,
  change: (input: ReturnType<typeof inputOf>) => object = (x) => x,
) {
  const shop = await buildShop(site);
  const officer = await officerOf(site);
  const { body, status } = await officer.send({
    method: "post",
    path: "/timetables",
    body: change(inputOf(shop)),
  });
  return { shop, officer, body, status };
}

const working = async (site: Site): Promise<string> => {
  const { crew, quiet, people, loud } = await buildShop(site);
  return insert("timetables", {
    organizationId: site.organizationId,
    siteId: site.id,
    scopeKind: "crew",
    scopeId: crew.id,
    baseDate: daysFromToday(0),
    governingRuleSet: "uk-2005",
    governingVersion: 1,
    methodVersion: 1,
    request: JSON.stringify(inputOf({ crew, quiet, people, loud })),
    basis: JSON.stringify({
      people: people.map(({ id }) => ({ id, name: "Ash", employeeNumber: "1" })),
      tasks: [],
      rest: { name: null, levelDb: 70, slotPct: [0, 0, 0] },
    }),
    subject: "{}",
    state: "working",
  });
};

const found = {
  kind: "timetable",
  table: [[0], [-1], [-1]],
  sharesPct: [50, 1, 1],
  largestPct: 50,
  boundPct: 49,
  outcome: { workers: [] },
};

const answered = async (site: Site): Promise<string> => {
  const id = await working(site);
  await select("UPDATE timetables SET state = 'answered', answer = $2 WHERE id = $1 RETURNING id", [
    id,
    JSON.stringify(found),
  ]);
  return id;
};

/** A plan that is a timetable. */
async function buildTimetablePlan(site: Site): Promise<string> {
  const shop = await buildShop(site);
  const { outcome, ...rest } = found;
  return insert("plans", {
    organizationId: site.organizationId,
    siteId: site.id,
    name: "Three in turn",
    kind: "timetable",
    scopeKind: "crew",
    scopeId: shop.crew.id,
    baseDate: daysFromToday(-1),
    governingRuleSet: "uk-2005",
    governingVersion: 1,
    methodVersion: 1,
    goal: "limit",
    changes: "[]",
    timetable: JSON.stringify({
      request: inputOf(shop),
      basis: {
        people: shop.people.map(({ id }, place) => ({
          id,
          name: ["Ash", "=Birch", "Cedar"][place],
          employeeNumber: String(place + 1),
        })),
        tasks: [
          {
            id: shop.loud.id,
            name: "Hammer",
            levelDb: 92,
            levelFrom: daysFromToday(-30),
            isUpper: false,
            slotPct: [5, 5, 5],
          },
        ],
        rest: { name: "Bench", levelDb: 70, slotPct: [0.1, 0.1, 0.1] },
      },
      found: rest,
    }),
    outcome: JSON.stringify(outcome),
  });
}

async function buildStep(site: Site): Promise<{ planId: string; stepId: string }> {
  const planId = await buildTimetablePlan(site);
  const stepId = await insert("plan_steps", {
    organizationId: site.organizationId,
    planId,
    what: "Tell the crew",
    dueOn: daysFromToday(7),
  });
  return { planId, stepId };
}

describeEndpoint({
  route: "GET /timetables/subject",
  as: "officer",
  not: "auditor",
  event: null,
  bad: { path: "-7" },
  call: async (site) => {
    const { crew } = await buildShop(site);
    return { method: "get", path: `/timetables/subject?scopeKind=crew&scopeId=${crew.id}` };
  },
});
describeEndpoint({
  route: "POST /timetables",
  as: "officer",
  not: "auditor",
  event: "start-timetable",
  bad: { body: { slots: 2 } },
  badField: "slots",
  call: async (site) => ({
    method: "post",
    path: "/timetables",
    body: inputOf(await buildShop(site)),
  }),
});
describeEndpoint({
  route: "GET /timetables/:id",
  as: "auditor",
  not: "worker",
  event: null,
  bad: { path: "-7" },
  call: async (site) => ({ method: "get", path: `/timetables/${await working(site)}` }),
});
describeEndpoint({
  route: "POST /timetables/:id/cancel",
  as: "officer",
  not: "auditor",
  event: "cancel-timetable",
  status: 200,
  bad: null,
  call: async (site) => ({ method: "post", path: `/timetables/${await working(site)}/cancel` }),
});
describeEndpoint({
  route: "POST /timetables/:id/keep",
  as: "officer",
  not: "auditor",
  event: "keep-plan",
  bad: { body: { name: "" } },
  badField: "name",
  call: async (site) => ({
    method: "post",
    path: `/timetables/${await answered(site)}/keep`,
    revision: 1,
    body: { name: "Three in turn" },
  }),
});
describeEndpoint({
  route: "GET /plans/:id/timetable.csv",
  as: "auditor",
  not: "worker",
  event: null,
  bad: null,
  call: async (site) => ({
    method: "get",
    path: `/plans/${await buildTimetablePlan(site)}/timetable.csv`,
  }),
});
describeEndpoint({
  route: "POST /plans/:id/steps",
  as: "officer",
  not: "auditor",
  event: "add-plan-step",
  bad: { body: { what: "" } },
  badField: "what",
  call: async (site) => ({
    method: "post",
    path: `/plans/${await buildTimetablePlan(site)}/steps`,
    body: { what: "Tell the crew", ownerId: null, dueOn: daysFromToday(7), mends: null },
  }),
});
describeEndpoint({
  route: "PUT /plans/:id/steps/:stepId",
  as: "officer",
  not: "auditor",
  event: "change-plan-step",
  bad: { body: { dueOn: "soon" } },
  badField: "dueOn",
  call: async (site) => {
    const { planId, stepId } = await buildStep(site);
    return {
      method: "put",
      path: `/plans/${planId}/steps/${stepId}`,
      revision: 1,
      body: { what: "Tell both crews", ownerId: null, dueOn: daysFromToday(9) },
    };
  },
});
describeEndpoint({
  route: "POST /plans/:id/steps/:stepId/mark",
  as: "officer",
  not: "auditor",
  event: "mark-plan-step",
  status: 200,
  bad: { body: { state: "cannot" } },
  badField: "reason",
  call: async (site) => {
    const { planId, stepId } = await buildStep(site);
    return {
      method: "post",
      path: `/plans/${planId}/steps/${stepId}/mark`,
      revision: 1,
      body: { state: "done", reason: null },
    };
  },
});

describe("a search", () => {
  test("says what an hour takes of the limit: an eighth of it at the limit’s own level", async () => {
    const site = await buildSite();
    const { loud, crew } = await buildShop(site);
    const officer = await officerOf(site);
    const { body } = await officer.send({
      method: "get",
      path: `/timetables/subject?scopeKind=crew&scopeId=${crew.id}`,
    });
    const task = body.tasks.find(({ id }: { id: string }) => id === loud.id);
    // LEX,8h against 87 dB: an hour at 91 dB is 1/8 · 10^((91 − 87)/10) of it.
    for (const pct of task.hourPct) expect(pct).toBeCloseTo((100 / 8) * 10 ** 0.4, 9);
    expect(body.slots).toBe(32);
    expect(body.startsAt).toBe("06:00");
  });

  test("finds a table in which nobody is over, judged by the engine, and becomes a plan once", async () => {
    const site = await buildSite();
    const { officer, body, shop } = await ordered(site);
    expect(body.state).toBe("working");
    await searchTimetable({ organizationId: site.organizationId, timetableId: body.id });
    const { body: view } = await officer.send({ method: "get", path: `/timetables/${body.id}` });
    expect(view.state).toBe("answered");
    expect(view.answer.kind).toBe("timetable");
    // 32 slots over three people: somebody has 11 at the least.
    const slot = (levelDb: number) => (100 / 32) * 10 ** ((levelDb - 87) / 10);
    expect(view.answer.largestPct).toBeCloseTo(11 * slot(91) + 21 * slot(70), 6);
    expect(view.answer.boundPct).toBeCloseTo(view.answer.largestPct, 4);
    for (const [place, worker] of view.answer.outcome.workers.entries()) {
      expect(worker.workerId).toBe(shop.people[place]!.id);
      // The engine’s own level of that day is the share that the search added up.
      expect(worker.after.outsideDb).toBeCloseTo(
        87 + 10 * Math.log10(view.answer.sharesPct[place] / 100),
        6,
      );
    }
    const keep = () =>
      officer.send({
        method: "post",
        path: `/timetables/${body.id}/keep`,
        revision: view.revision,
        body: { name: "Three in turn" },
      });
    const { body: plan } = await keep();
    expect(plan).toMatchObject({ kind: "timetable", changesCount: 0 });
    expect(plan.timetable.found.table).toEqual(view.answer.table);
    expect((await keep()).status).toBe(412);
    const { text } = await officer.send({ method: "get", path: `/plans/${plan.id}/timetable.csv` });
    const lines = text.trim().split("\r\n");
    expect(lines[0]).toMatch(/^employee_number,worker,from,to,minutes,task,level_db/);
    const minutes = lines.slice(1).map((line) => Number(line.split(",")[4]));
    expect(minutes.reduce((sum, one) => sum + one, 0)).toBe(3 * 480);
  });

  test("says what contradicts: the limit and a place that is too loud for all", async () => {
    const site = await buildSite();
    const { officer, body } = await ordered(site, (input) => ({ ...input, mostPct: 20 }));
    await searchTimetable({ organizationId: site.organizationId, timetableId: body.id });
    const { body: view } = await officer.send({ method: "get", path: `/timetables/${body.id}` });
    expect(view.answer).toEqual({
      kind: "contradiction",
      isSmallest: true,
      demands: [
        { kind: "limit", people: [0, 1, 2] },
        { kind: "staffing", task: 0, line: 0 },
      ],
    });
    const { status, body: refused } = await officer.send({
      method: "post",
      path: `/timetables/${body.id}/keep`,
      revision: view.revision,
      body: { name: "None" },
    });
    expect([status, refused.code]).toEqual([409, "wrong-state"]);
  });

  test("that was given up ends without an answer", async () => {
    const site = await buildSite();
    const { officer, body } = await ordered(site);
    await officer.send({ method: "post", path: `/timetables/${body.id}/cancel` });
    await searchTimetable({ organizationId: site.organizationId, timetableId: body.id });
    const { body: view } = await officer.send({ method: "get", path: `/timetables/${body.id}` });
    expect([view.state, view.answer]).toEqual(["cancelled", null]);
  });

  test("names at its place what can’t be: nobody who may, no level, another site’s task, too many places", async () => {
    const site = await buildSite();
    const unmeasured = await buildTask({ site, levelDb: null });
    const foreign = await buildTask();
    const { body, status } = await ordered(site, (input) => {
      const [task] = input.tasks;
      return {
        ...input,
        tasks: [
          { ...task, qualifiedIds: [] },
          { ...task, taskId: unmeasured.id, staffing: [{ from: 0, to: 40, people: 9 }] },
        ],
      };
    });
    expect(status).toBe(422);
    const codes = (issues: { path: string[]; code: string }[]) =>
      issues.map(({ path, code }) => [path.join("."), code]);
    expect(codes(body.issues)).toEqual([
      ["tasks.0.qualifiedIds", "task-nobody-may"],
      ["tasks.1.staffing.0.to", "staffing-outside"],
      ["tasks.1.staffing.0.people", "staffing-more-than-people"],
    ]);
    const again = await ordered(site, (input) => {
      const [task] = input.tasks;
      return {
        ...input,
        tasks: [
          { ...task, taskId: unmeasured.id },
          { ...task, taskId: foreign.id },
        ],
      };
    });
    expect(codes(again.body.issues)).toEqual([
      ["tasks.0.taskId", "task-not-measured"],
      ["tasks.1.taskId", "task-of-other-site"],
    ]);
  });
});

describe("a plan’s steps", () => {
  test("one that mends a finding is its measure, and done with it", async () => {
    const site = await buildSite();
    const planId = await buildTimetablePlan(site);
    const officer = await officerOf(site);
    const worker = await buildWorker({ site });
    const findingId = await buildFinding({ site, workerId: worker.id });
    const { body } = await officer.send({
      method: "post",
      path: `/plans/${planId}/steps`,
      body: {
        what: "Work by the timetable",
        ownerId: null,
        dueOn: daysFromToday(7),
        mends: { findingId, control: "organise" },
      },
    });
    const [step] = body.steps;
    expect(step.mends).toMatchObject({ findingId, control: "organise" });
    expect([body.stepsOpen, body.stepsCount]).toEqual([1, 1]);
    const measures = async () =>
      (await officer.send({ method: "get", path: `/findings/${findingId}/follow-up` })).body
        .measures;
    expect(await measures()).toMatchObject([{ what: "Work by the timetable", doneOn: null }]);
    const mark = (revision: number, state: string, reason: string | null) =>
      officer.send({
        method: "post",
        path: `/plans/${planId}/steps/${step.id}/mark`,
        revision,
        body: { state, reason },
      });
    expect((await mark(1, "done", null)).body.stepsOpen).toBe(0);
    expect((await measures())[0].doneOn).not.toBeNull();
    const { body: undone } = await mark(2, "cannot", "The line was moved.");
    expect(undone.steps[0]).toMatchObject({ state: "cannot", reason: "The line was moved." });
    expect((await measures())[0].doneOn).toBeNull();
    expect((await mark(2, "open", null)).status).toBe(412);
  });
});
