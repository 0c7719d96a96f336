import { evaluateDay } from "../../shared/acoustics/day";
import { assignmentFor, buildDayInput } from "../../shared/day/build-day-input";
import type { IssueSlip } from "../../shared/schemas/choice";
import { todayAt } from "../lib/calendar";
import { rows } from "../lib/db";
import { notFound } from "../lib/errors";
import { groupBy } from "../lib/group-by";
import { type Actor, visible } from "../lib/policy";
import { workerPolicy } from "../policies";
import { assignmentsOn, gridTasks, modelsOn } from "./day-grid";
import { fitInForce } from "./own-attenuation";
import { settingsInForce } from "./site-settings";

interface PersonRow {
  id: string;
  name: string;
  employeeNumber: string;
  crewName: string | null;
  siteId: string;
  siteName: string;
  timeZone: string;
  language: string;
  mustWear: boolean;
  personalTargetDb: number | null;
  nominal: { taskId: string; durationMin: number }[];
}

interface DeviceRow {
  assignmentId: string;
  workerId: string;
  innerName: string;
  outerName: string | null;
  size: string | null;
  kind: string;
  outerKind: string | null;
  useName: string | null;
  fit: { testedOn: string; hasPassed: boolean | null; needDb: number | null } | null;
  issuedOn: string | null;
  cushionsDueOn: string | null;
  tipsDueOn: string | null;
}

/**
 * A slip for each of these workers, in the order asked for.
 *
 * @throws AppError not-found, where the actor doesn't see one of them.
 */
export async function issueSlips(actor: Actor, workerIds: readonly string[]): Promise<IssueSlip[]> {
  const people = await rows<PersonRow>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber", w.site_id AS "siteId", s.name AS "siteName", s.time_zone AS "timeZone",
       w.language, w.must_wear AS "mustWear", w.personal_target_db AS "personalTargetDb",
       (SELECT c.name FROM crew_memberships m JOIN crews c ON c.id = m.crew_id
        WHERE m.worker_id = w.id AND m.valid @> (now() AT TIME ZONE s.time_zone)::date ORDER BY lower(m.valid) DESC LIMIT 1) AS "crewName",
       coalesce((SELECT json_agg(json_build_object('taskId', j.task_id, 'durationMin', j.duration_min) ORDER BY j.position)
                 FROM job_tasks j WHERE j.job_id = w.job_id), '[]') AS nominal
     FROM workers w JOIN sites s ON s.id = w.site_id WHERE w.id IN (:ids) AND ${visible(workerPolicy, actor, "w")}`,
    { ids: workerIds },
  );
  if (people.length < new Set(workerIds).size) throw notFound();
  const slips = new Map<string, IssueSlip>();
  for (const [siteId, here] of groupBy(people, (person) => person.siteId))
    for (const slip of await slipsAt(siteId, here)) slips.set(slip.worker.id, slip);
  return workerIds.flatMap((id) => slips.get(id) ?? []);
}

async function slipsAt(siteId: string, people: readonly PersonRow[]): Promise<IssueSlip[]> {
  const date = todayAt(people[0]!.timeZone);
  const settings = await settingsInForce(siteId, date);
  const { governing } = settings;
  const { adequacy, targetDb } = governing.protection;
  const isByTask = adequacy === "en-458";
  const ids = `{${people.map(({ id }) => id).join(",")}}`;
  const assignments = groupBy(await assignmentsOn(ids, date), ({ workerId }) => workerId);
  const devices = groupBy(await devicesOn(ids, date), ({ workerId }) => workerId);
  const models = await modelsOn(
    [
      ...new Set(
        [...assignments.values()]
          .flat()
          .flatMap(({ innerModelId, outerModelId }) =>
            outerModelId ? [innerModelId, outerModelId] : [innerModelId],
          ),
      ),
    ],
    date,
  );
  const tasks = await gridTasks(siteId, date);
  const context = {
    tasks: new Map(tasks.map((task) => [task.id, task])),
    models: new Map(models.map((model) => [model.modelId, model])),
    site: settings,
  };
  return people.map((person): IssueSlip => {
    const own = assignments.get(person.id) ?? [];
    // The nominal day, and what somebody was given a protector for beside it: each is judged by itself while worn.
    const minutes = new Map(
      person.nominal.map(({ taskId, durationMin }) => [taskId, durationMin] as const),
    );
    for (const { taskId } of own)
      if (taskId !== null && !minutes.has(taskId)) minutes.set(taskId, 1);
    const entered = [...minutes].map(([taskId, durationMin]) => ({
      taskId,
      durationMin,
      wornPct: 100,
      wornIsShiftWide: false,
    }));
    const lengthMin = entered.reduce((sum, { durationMin }) => sum + durationMin, 0);
    const input = buildDayInput(
      person,
      date,
      entered.length === 0
        ? []
        : [
            {
              id: person.id,
              lengthMin,
              tasks: entered,
              unaccounted: { how: "unknown" },
              readings: [],
            },
          ],
      own,
      context,
    );
    const timed = input.shifts.flatMap((shift) => shift.tasks);
    const day = evaluateDay(input, governing, []);
    const worn = timed.flatMap((task, index) => {
      const known = context.tasks.get(task.taskId);
      const assignment = known ? assignmentFor(known, own) : null;
      const found = day.tasks[index];
      return assignment && found?.isWorn
        ? [{ assignmentId: assignment.id, taskName: task.name, ...found }]
        : [];
    });
    const worstOf = (assignmentId: string) =>
      worn
        .filter((task) => task.assignmentId === assignmentId)
        .toSorted((a, b) => RANK(a) - RANK(b) || (b.outsideDb ?? 0) - (a.outsideDb ?? 0))[0];
    return {
      worker: {
        id: person.id,
        name: person.name,
        employeeNumber: person.employeeNumber,
        crewName: person.crewName,
        siteId: person.siteId,
        siteName: person.siteName,
        language: person.language,
      },
      date,
      ruleSetKey: governing.key,
      ruleSetVersion: governing.version,
      actionDb: isByTask ? targetDb : null,
      protectors: (devices.get(person.id) ?? []).map(({ workerId: _, innerName, ...device }) => {
        const task = worstOf(device.assignmentId);
        const known = own.find(({ id }) => id === device.assignmentId);
        return {
          ...device,
          name: innerName,
          taskName: task?.taskName ?? null,
          outsideDb: task?.outsideDb ?? null,
          wornDb: task?.wornDb ?? null,
          word: (task && (isByTask ? task.word : day.word)) ?? null,
          batteryMin: known
            ? shortest(
                [known.innerModelId, known.outerModelId].map(
                  (id) => (id && context.models.get(id)?.active?.batteryMin) || null,
                ),
              )
            : null,
        };
      }),
    };
  });
}

const shortest = (minutes: readonly (number | null)[]): number | null => {
  const known = minutes.filter((one) => one !== null);
  return known.length === 0 ? null : Math.min(...known);
};

/** Too little first, then too much: the task that decides a word. */
const RANK = ({ word }: { word: string | null }): number =>
  word === "too-little" ? 0 : word === "too-much" ? 1 : 2;

/** What each worker has, where it is worn, whether it fits, and when its parts are due. */
const devicesOn = (ids: string, date: string): Promise<DeviceRow[]> =>
  rows<DeviceRow>(
    `WITH due AS (
       SELECT a.id AS assignment_id, x.issued_on + (d.data->>'cushionsEveryDays')::int AS cushions_on, x.issued_on + (d.data->>'tipsEveryDays')::int AS tips_on
       FROM assignments a CROSS JOIN LATERAL unnest(ARRAY[a.inner_model_id, a.outer_model_id]) AS worn (model_id)
       CROSS JOIN LATERAL (SELECT p.data FROM protector_model_revisions p WHERE p.model_id = worn.model_id AND p.effective_from <= CAST(:date AS date)
         ORDER BY p.effective_from DESC, p.number DESC LIMIT 1) d
       CROSS JOIN LATERAL (SELECT coalesce((SELECT max(m.moved_on) FROM stock_moves m WHERE m.issue_id = e.id AND m.kind = 'changed'), e.issued_on) AS issued_on
         FROM protector_issues e WHERE e.worker_id = a.worker_id AND e.model_id = worn.model_id AND e.ended_on IS NULL ORDER BY e.issued_on DESC LIMIT 1) x
       WHERE a.worker_id = ANY (CAST(:ids AS uuid[])) AND a.valid @> CAST(:date AS date))
     SELECT a.id AS "assignmentId", a.worker_id AS "workerId", i.name AS "innerName", o.name AS "outerName", i.kind, o.kind AS "outerKind", a.size, coalesce(t.name, r.name) AS "useName",
       (SELECT json_build_object('testedOn', f.tested_on::text, 'hasPassed', v.has_passed, 'needDb', v.need_db) FROM fit_test_revisions v JOIN fit_tests f ON f.id = v.fit_test_id
        WHERE a.outer_model_id IS NULL AND v.id = ${fitInForce("a.worker_id", "a.inner_model_id", "a.size", "CAST(:date AS date)")}) AS fit,
       (SELECT CASE WHEN count(DISTINCT e.model_id) = 1 + (a.outer_model_id IS NOT NULL)::int THEN max(e.issued_on)::text END FROM protector_issues e
        WHERE e.worker_id = a.worker_id AND e.model_id IN (a.inner_model_id, a.outer_model_id) AND e.ended_on IS NULL) AS "issuedOn",
       (SELECT min(d.cushions_on)::text FROM due d WHERE d.assignment_id = a.id) AS "cushionsDueOn",
       (SELECT min(d.tips_on)::text FROM due d WHERE d.assignment_id = a.id) AS "tipsDueOn"
     FROM assignments a JOIN protector_models i ON i.id = a.inner_model_id LEFT JOIN protector_models o ON o.id = a.outer_model_id
     LEFT JOIN tasks t ON t.id = a.task_id LEFT JOIN areas r ON r.id = a.area_id
     WHERE a.worker_id = ANY (CAST(:ids AS uuid[])) AND a.valid @> CAST(:date AS date)
     ORDER BY a.worker_id, a.task_id NULLS LAST, a.area_id NULLS LAST, i.name`,
    { ids, date },
  );
