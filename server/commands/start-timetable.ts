import { randomUUID } from "node:crypto";
import { METHOD_VERSION } from "../../shared/acoustics/methods";
import type { Criterion, RuleSetVersion } from "../../shared/acoustics/types";
import { dayOf, type Placed, slotShare } from "../../shared/planning/slot-shares";
import { SLOT_MIN } from "../../shared/planning/timetable";
import type { ProblemIssue } from "../../shared/schemas/problem";
import type { TimetableBasis, TimetableInput } from "../../shared/schemas/timetable";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import { addJob } from "../lib/jobs";
import type { Actor } from "../lib/policy";
import type { Timetable } from "../models/plan";
import {
  goalOf,
  levelDates,
  type TimetableMaterial,
  wholeDayAt,
} from "../queries/timetable-subject";
import { contextOf } from "../queries/try-subject";

/**
 * Orders a search for a timetable, on what is on record of these people and tasks today.
 *
 * @throws AppError invalid, where it speaks of what is not of this scope, or a task's noise is not known
 */
export async function startTimetable(
  actor: Actor,
  material: TimetableMaterial,
  input: TimetableInput,
): Promise<string> {
  const { governing, criterion } = goalOf(material, input.goal);
  const basis = basisOf(material, input, governing, criterion, [
    ...(await levelDates(material.scope.siteId, material.date)),
  ]);
  const id = randomUUID();
  await execute(
    `INSERT INTO timetables (id, organization_id, site_id, scope_kind, scope_id, base_date, governing_rule_set, governing_version, method_version, request, basis, subject, state, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10::jsonb, $11::jsonb, $12::jsonb, 'working', $13)`,
    [
      id,
      actor.organizationId,
      material.scope.siteId,
      input.scopeKind,
      input.scopeId,
      material.date,
      governing.key,
      governing.version,
      METHOD_VERSION,
      JSON.stringify(input),
      JSON.stringify(basis),
      JSON.stringify(subjectOf(material, input)),
      actor.userId,
    ],
  );
  await addJob(
    "solve-timetable",
    { organizationId: actor.organizationId, timetableId: id },
    { key: `solve-timetable:${id}`, queue: "timetables", maxAttempts: 3 },
  );
  await recordAudit(actor, {
    action: "start-timetable",
    subjectKind: "timetable",
    subjectId: id,
    values: { ...input },
  });
  return id;
}

/** Whatever is at work on it finds out at its next step. @throws AppError wrong-state once there is an answer */
export async function cancelTimetable(actor: Actor, timetable: Timetable): Promise<void> {
  if (timetable.state !== "working") throw new AppError("wrong-state", 409);
  await execute(
    "UPDATE timetables SET state = 'cancelled', updated_at = now(), revision = revision + 1 WHERE id = $1",
    [timetable.id],
  );
  await recordAudit(actor, {
    action: "cancel-timetable",
    subjectKind: "timetable",
    subjectId: timetable.id,
    values: {},
  });
}

/** What the engine needs to judge these people's days with the timetable and without. */
export type TimetableStock = Pick<
  TimetableMaterial,
  "date" | "site" | "tasks" | "models" | "pairs" | "placed"
>;

function subjectOf(material: TimetableMaterial, input: TimetableInput): TimetableStock {
  const placed = input.personIds.map((id) => material.placed.find((one) => one.id === id)!);
  const taskIds = new Set([
    ...input.tasks.map(({ taskId }) => taskId),
    ...placed.flatMap(({ tasks }) => tasks.map(({ taskId }) => taskId)),
    input.restTaskId,
  ]);
  const modelIds = new Set(
    placed.flatMap(({ assignments }) =>
      assignments.flatMap(({ innerModelId, outerModelId }) => [innerModelId, outerModelId]),
    ),
  );
  return {
    date: material.date,
    site: material.site,
    tasks: material.tasks.filter(({ id }) => taskIds.has(id)),
    models: material.models.filter(({ modelId }) => modelIds.has(modelId)),
    pairs: [],
    placed,
  };
}

function basisOf(
  material: TimetableMaterial,
  input: TimetableInput,
  governing: RuleSetVersion,
  criterion: Criterion | null,
  dates: readonly (readonly [string, string])[],
): TimetableBasis {
  const issues: ProblemIssue[] = [];
  if (criterion === null) throw unprocessable([issue(["goal"], "criterion-unknown")]);
  const placed: Placed[] = [];
  for (const [index, id] of input.personIds.entries()) {
    const found = material.placed.find((one) => one.id === id);
    if (!found || input.personIds.indexOf(id) !== index)
      issues.push(issue(["personIds", index], found ? "worker-twice" : "worker-not-in-scope"));
    else placed.push(found);
  }
  const lengthMin = input.slots * SLOT_MIN;
  const from = new Map(dates);
  const known = new Map(material.tasks.map((task) => [task.id, task]));
  const sharesAt = (taskId: string) =>
    placed.map((person) =>
      slotShare(
        wholeDayAt(material, person, taskId, lengthMin, input.wornPct),
        lengthMin,
        governing,
        criterion,
      ),
    );
  const tasks = input.tasks.flatMap(({ taskId, qualifiedIds }, index): TimetableBasis["tasks"] => {
    const task = known.get(taskId);
    if (!task) issues.push(issue(["tasks", index, "taskId"], "task-of-other-site"));
    else if (!task.level) issues.push(issue(["tasks", index, "taskId"], "task-not-measured"));
    if (qualifiedIds?.some((id) => !input.personIds.includes(id)))
      issues.push(issue(["tasks", index, "qualifiedIds"], "worker-not-in-scope"));
    if (!task?.level) return [];
    const shares = sharesAt(taskId);
    const may = shares.filter(
      ({ share }, person) => share !== null && (qualifiedIds?.includes(placed[person]!.id) ?? true),
    );
    if (may.length === 0) issues.push(issue(["tasks", index, "taskId"], "task-unbounded"));
    return [
      {
        id: taskId,
        name: task.name,
        levelDb: task.level.levelDb,
        levelFrom: from.get(taskId) ?? null,
        isUpper: shares.some(({ isUpper }) => isUpper),
        slotPct: shares.map(({ share }) => share && 100 * share),
      },
    ];
  });
  const rest = restOf(material, input, governing, criterion, placed);
  if (rest === null)
    issues.push(
      issue(
        ["restTaskId"],
        known.has(input.restTaskId ?? "") ? "task-not-measured" : "task-of-other-site",
      ),
    );
  if (issues.length > 0 || rest === null) throw unprocessable(issues);
  return {
    people: placed.map(({ id, name, employeeNumber }) => ({ id, name, employeeNumber })),
    tasks,
    rest,
  };
}

/** What time at none of the tasks takes; null where it can't be said. */
function restOf(
  material: TimetableMaterial,
  { restTaskId, quietDb, slots, wornPct }: TimetableInput,
  governing: RuleSetVersion,
  criterion: Criterion,
  placed: readonly Placed[],
): TimetableBasis["rest"] | null {
  const lengthMin = slots * SLOT_MIN;
  const task = material.tasks.find(({ id }) => id === restTaskId);
  if (restTaskId !== null && !task?.level) return null;
  const levelDb = task?.level?.levelDb ?? quietDb;
  if (levelDb === null) return null;
  const shares = placed.map((person) =>
    slotShare(
      restTaskId === null
        ? dayOf(person, [], lengthMin, contextOf(material), { wornPct, quietDb })
        : wholeDayAt(material, person, restTaskId, lengthMin, wornPct),
      lengthMin,
      governing,
      criterion,
    ),
  );
  if (shares.some(({ share }) => share === null)) return null;
  return {
    name: task?.name ?? null,
    levelDb,
    slotPct: shares.map(({ share }) => 100 * share!),
  };
}
