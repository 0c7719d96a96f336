import { keepPlan } from "../../server/commands/keep-plan";
import { trySubject } from "../../server/queries/try-subject";
import { goalsOf } from "../../shared/planning/try-changes";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { PlanChange } from "../../shared/schemas/plan";
import { PLANS } from "../demo/plans";
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
