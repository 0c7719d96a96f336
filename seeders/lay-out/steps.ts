import { addCrewMember } from "../../server/commands/add-crew-member";
import { addProtectorRevision } from "../../server/commands/add-protector-revision";
import { addSiteSettings } from "../../server/commands/add-site-settings";
import { assignProtector } from "../../server/commands/assign-protector";
import { correctShift } from "../../server/commands/correct-shift";
import { handleFinding } from "../../server/commands/handle-finding";
import { reportProblem } from "../../server/commands/report-problem";
import { execute } from "../../server/lib/db";
import { Finding } from "../../server/models/finding";
import { Shift } from "../../server/models/shift";
import { savedShifts } from "../../server/queries/saved-shifts";
import type { FindingStepInput } from "../../shared/schemas/finding";
import { ProtectorRevisionInput } from "../../shared/schemas/protector";
import { addDays } from "../../shared/time/zone";
import { CREWS } from "../demo/programme";
import { PROTECTORS } from "../demo/protectors";
import type { About } from "../demo/story";
import { measureTaskAnew } from "./measurements";
import { type Demo, known, taskKey } from "./programme";
import type { DatedStep } from "./story";

const PATHS = {
  field: (name: string) => [name],
  worker: (index: number, name: string) => [index, name],
};

/** One step of the story, by the application's own command. */
export async function takeStep(demo: Demo, step: DatedStep, now: Date): Promise<void> {
  const calendar = demo.calendar(step.site);
  const instant = new Date(
    Math.min(calendar.instant(step.date, step.at).getTime(), now.getTime() - 30_000),
  );
  // Its samples and its levels were recorded at times of their own.
  if ("measureAnew" in step) await measureTaskAnew(demo, step.site, step.date, step.measureAnew);
  else await demo.at(instant, () => perform(demo, step));
}

async function perform(
  demo: Demo,
  step: Exclude<DatedStep, { measureAnew: unknown }>,
): Promise<void> {
  const actor = known(demo.actors, step.by);
  const crew = CREWS.find(({ name }) => name === step.crew)!;
  const dateOf = (day: number) => demo.calendar(step.site).workdayAgo(crew, day)!;
  if ("assign" in step) {
    const { workers, inner, outer, task, area, toDay } = step.assign;
    await assignProtector(
      actor,
      workers.map((number) => known(demo.workers, number)),
      {
        innerModelId: known(demo.models, inner).id,
        outerModelId: outer ? known(demo.models, outer).id : null,
        taskId: task ? known(demo.tasks, taskKey(step.site, task)).id : null,
        areaId: area ? known(demo.areas, area).id : null,
        fromDate: step.date,
        toDate: toDay === undefined ? null : dateOf(toDay),
        size: null,
        audioDb: null,
      },
      PATHS,
    );
  } else if ("protectorData" in step) {
    const { model, data, fromDay, reason } = step.protectorData;
    const facts =
      data === "as at first" ? PROTECTORS.find(({ name }) => name === model)!.data : data;
    await addProtectorRevision(
      actor,
      known(demo.models, model),
      ProtectorRevisionInput.parse({ ...facts, effectiveFrom: dateOf(fromDay), reason }),
    );
  } else if ("rules" in step) {
    const { site, governing, comparison, reason } = step.rules;
    await addSiteSettings(actor, known(demo.sites, site), {
      effectiveFrom: step.date,
      governingRuleSet: governing,
      comparisonRuleSets: [...comparison],
      wearFromDb: 85,
      creditsActivePart: false,
      usesUncertainty: false,
      reason,
    });
  } else if ("finding" in step) {
    await handle(demo, step, await openFinding(demo, step.finding));
  } else if ("closeAll" in step) {
    const { site, criterionOf, except } = step.closeAll;
    const found = await Finding.findAll({ where: { siteId: known(demo.sites, site).id } });
    const concerned = found.filter(
      ({ state, kind, criterion }) =>
        state !== "closed" && criterion.startsWith(`${criterionOf}:`) && !except.includes(kind),
    );
    for (const finding of concerned) {
      await handleFinding(actor, finding, { kind: "close", text: step.reason }, finding.revision);
      await dateClosing(finding.id, step.date);
    }
  } else if ("correct" in step) {
    const { worker, day, minutes, unaccounted, reason } = step.correct;
    const { shift, stored } = await shiftOf(demo, worker, dateOf(day));
    const wornOf = (taskId: string) =>
      stored.tasks.find((task) => task.taskId === taskId)?.wornPct ?? null;
    const tasks = minutes
      ? Object.entries(minutes).map(([name, durationMin]) => {
          const taskId = known(demo.tasks, taskKey(step.site, name)).id;
          return { taskId, durationMin, wornPct: wornOf(taskId), wornIsShiftWide: false };
        })
      : stored.tasks;
    const given =
      unaccounted ??
      (stored.how === "quiet"
        ? { how: "quiet" as const, levelDb: stored.quietDb! }
        : { how: stored.how });
    await correctShift(
      actor,
      shift,
      {
        isVoid: false,
        reason,
        confirmsWholeDay: false,
        confirmsOpenEnd: false,
        localStart: stored.localStart,
        whichHour: null,
        lengthMin: stored.lengthMin,
        note: stored.note,
        tasks,
        unaccounted: given,
      },
      shift.revision,
    );
  } else if ("voidShift" in step) {
    const { shift } = await shiftOf(demo, step.voidShift.worker, dateOf(step.voidShift.day));
    await correctShift(
      actor,
      shift,
      { isVoid: true, reason: step.voidShift.reason },
      shift.revision,
    );
  } else if ("loan" in step) {
    const worker = known(demo.workers, step.loan.worker);
    await addCrewMember(actor, known(demo.crews, step.loan.crew), worker, {
      workerId: worker.id,
      fromDate: step.date,
      toDate: dateOf(step.loan.toDay),
      isLoan: true,
    });
  } else {
    const id = await reportProblem(
      actor,
      known(demo.workers, step.report.worker),
      step.report.text,
    );
    await execute(
      "UPDATE findings SET first_date = $2, last_date = $2, due_on = $3 WHERE id = $1",
      [id, step.date, addDays(step.date, 3)],
    );
  }
}

async function handle(
  demo: Demo,
  taken: Extract<DatedStep, { finding: About }>,
  finding: Finding,
): Promise<void> {
  const { step, date, by } = taken;
  const input: FindingStepInput =
    "dueInDays" in step ? { kind: "take-in-hand", dueOn: addDays(date, step.dueInDays) } : step;
  await handleFinding(known(demo.actors, by), finding, input, finding.revision);
  if (input.kind === "close") await dateClosing(finding.id, date);
}

/** The command closes on the day of the clock; here that is the day of filling. */
const dateClosing = (findingId: string, date: string) =>
  execute("UPDATE findings SET closed_on = $2 WHERE id = $1 AND state = 'closed'", [
    findingId,
    date,
  ]);

/** @throws Error unless exactly one is open: the story and the engine disagree. */
async function openFinding(demo: Demo, { worker, job, kind, criterion }: About): Promise<Finding> {
  const found = await Finding.findAll({
    where: worker
      ? { workerId: known(demo.workers, worker).id, kind }
      : { jobId: known(demo.jobs, job!).id, kind },
  });
  const open = found.filter(
    (finding) =>
      finding.state !== "closed" && (criterion === undefined || finding.criterion === criterion),
  );
  if (open.length !== 1)
    throw new Error(
      `the story speaks of ${kind} of ${worker ?? job}, of which ${open.length} are open`,
    );
  return open[0]!;
}

async function shiftOf(demo: Demo, number: string, date: string) {
  const workerId = known(demo.workers, number).id;
  const shift = await Shift.findOne({ where: { workerId, date, isVoid: false } });
  const [stored] = await savedShifts("s.worker_id = :workerId AND s.date = :date", {
    workerId,
    date,
  });
  if (!shift || !stored)
    throw new Error(`the story speaks of a shift of ${number} on ${date}, which is not there`);
  return { shift, stored };
}
