import { addPlanStep, markPlanStep } from "../../server/commands/change-plan-step";
import { keepPlan } from "../../server/commands/keep-plan";
import { keepTimetable } from "../../server/commands/keep-timetable";
import { startTimetable } from "../../server/commands/start-timetable";
import { searchTimetable } from "../../server/jobs/search-timetable";
import { Finding } from "../../server/models/finding";
import { Plan } from "../../server/models/plan";
import { findingsToMend, stepsOf } from "../../server/queries/plan-steps";
import { goalOf, timetableMaterial } from "../../server/queries/timetable-subject";
import { timetableView } from "../../server/queries/timetables";
import { trySubject } from "../../server/queries/try-subject";
import { goalsOf } from "../../shared/planning/try-changes";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { PlanChange } from "../../shared/schemas/plan";
import { addDays } from "../../shared/time/zone";
import { PLAN_STEPS, PLANS, TIMETABLE } from "../demo/plans";
import { type Demo, known, taskKey } from "./programme";

/** Plans, by the application's own arithmetic, for the rule's daily limit. */
export async function layOutPlans(demo: Demo): Promise<void> {
  for (const { site, job, name, daysAgo, changes } of PLANS) {
    const calendar = demo.calendar(site);
    const officer = demo.officer(site);
    const taskId = (task: string) => known(demo.tasks, taskKey(site, task)).id;
    const toChange = (change: (typeof changes)[number]): PlanChange => {
      switch (change.kind) {
        case "noise":
          return { kind: "noise", taskId: taskId(change.task), byDb: change.byDb, bandsDb: null };
        case "duration":
          return {
            kind: "duration",
            taskId: taskId(change.task),
            durationMin: change.minutes,
            otherTaskId: taskId(change.other),
          };
        case "wearing":
          return { kind: "wearing", taskId: taskId(change.task), wornPct: change.wornPct };
      }
    };
    await demo.at(calendar.instant(calendar.daysAgo(daysAgo), "14:10"), async () => {
      const scope = { scopeKind: "job" as const, scopeId: known(demo.jobs, job).id };
      const subject = await trySubject(officer, scope, calendar.daysAgo(daysAgo));
      const governing = ruleSetVersion(subject.ruleSetKey, subject.ruleSetVersion);
      const goal = governing && goalsOf(governing)[0]?.id;
      if (!goal) throw new Error(`the rules of ${site} have no limit to plan for`);
      await keepPlan(officer, subject, { ...scope, name, goal, changes: changes.map(toChange) });
    });
  }
}

/** A timetable by the application's own search, kept, and turned into steps. */
export async function layOutTimetable(demo: Demo): Promise<void> {
  const { site, crew, name, daysAgo, startsAt, slots, tasks, rest } = TIMETABLE;
  const calendar = demo.calendar(site);
  const officer = demo.officer(site);
  const date = calendar.daysAgo(daysAgo);
  const taskId = (task: string) => known(demo.tasks, taskKey(site, task)).id;
  const scope = { scopeKind: "crew" as const, scopeId: known(demo.crews, crew).id };
  const timetableId = await demo.at(calendar.instant(date, "10:05"), async () => {
    const material = await timetableMaterial(officer, scope, date);
    const goal = goalOf(material, undefined).criterion?.id;
    if (!goal) throw new Error(`the rules of ${site} have no limit to plan for`);
    return startTimetable(officer, material, {
      ...scope,
      goal,
      startsAt,
      slots,
      mostPct: 100,
      wornPct: null,
      personIds: material.placed.map(({ id }) => id),
      tasks: tasks.map(({ task, staffing, longestStay }) => ({
        taskId: taskId(task),
        staffing: staffing.map((line) => ({ ...line })),
        qualifiedIds: null,
        longestStay,
        longestTotal: null,
      })),
      restTaskId: taskId(rest),
      quietDb: null,
    });
  });
  await searchTimetable({ organizationId: demo.organizationId, timetableId });
  await demo.at(calendar.instant(date, "10:20"), async () => {
    const view = await timetableView(officer, timetableId);
    const planId = await keepTimetable(officer, view, name);
    const plan = await Plan.findByPk(planId);
    if (!plan) throw new Error("a plan just kept is there");
    const [mended] = await findingsToMend(
      officer,
      view.basis.people.map(({ id }) => id),
    );
    const finding = mended ? await Finding.findByPk(mended.id) : null;
    const before = new Set<string>();
    for (const { what, dueInDays, mends, isDone, because } of PLAN_STEPS) {
      await addPlanStep(
        officer,
        plan,
        {
          what,
          ownerId: officer.userId,
          dueOn: addDays(calendar.today, dueInDays),
          mends: mends && finding ? { findingId: finding.id, control: "organise" } : null,
        },
        mends ? finding : null,
      );
      const step = (await stepsOf(planId)).find(({ id }) => !before.has(id));
      if (!step) throw new Error("a step just entered is there");
      before.add(step.id);
      if (isDone) await markPlanStep(officer, plan, step, { state: "done", reason: null }, null);
      if (because !== undefined)
        await markPlanStep(officer, plan, step, { state: "cannot", reason: because }, null);
    }
  });
}
