import type { Criterion, RuleSetVersion } from "../../shared/acoustics/types";
import { dayOf, type Placed, slotShare, timetableGoals } from "../../shared/planning/slot-shares";
import { SLOT_MIN } from "../../shared/planning/timetable";
import { ruleSetVersion } from "../../shared/rule-sets";
import type { TrySubject } from "../../shared/schemas/plan";
import type {
  TimetableQuery,
  TimetableScope,
  TimetableSubject,
} from "../../shared/schemas/timetable";
import { row, rows } from "../lib/db";
import type { Actor } from "../lib/policy";
import { lastWearing } from "./day-grid";
import { contextOf, trySubject } from "./try-subject";

/** What a timetable rests on: people with their protectors and how long they wear them, tasks with their noise. */
export interface TimetableMaterial extends TrySubject {
  readonly placed: readonly Placed[];
}

export async function timetableMaterial(
  actor: Actor,
  scope: TimetableScope,
  on: string | null = null,
): Promise<TimetableMaterial> {
  const subject = await trySubject(actor, scope, on);
  const worn = await lastWearing(
    `{${subject.workers.map(({ id }) => id).join(",")}}`,
    subject.date,
  );
  return {
    ...subject,
    placed: subject.workers.map((worker) => ({ ...worker, wornPct: worn.get(worker.id) ?? {} })),
  };
}

/** The criterion that a timetable is made for; null where its shares don't add up over a day. */
export function goalOf(
  material: Pick<TrySubject, "ruleSetKey" | "ruleSetVersion">,
  goal: string | undefined,
): { governing: RuleSetVersion; criterion: Criterion | null } {
  const governing = ruleSetVersion(material.ruleSetKey, material.ruleSetVersion);
  if (!governing) throw new Error("a rule set in force has a version");
  const goals = timetableGoals(governing).map(({ id }) => id);
  const id = goal === undefined ? goals[0] : goals.find((one) => one === goal);
  return { governing, criterion: governing.criteria.find((one) => one.id === id) ?? null };
}

/** Since when each task has the level that it has on a date. */
export async function levelDates(siteId: string, date: string): Promise<Map<string, string>> {
  const found = await rows<{ taskId: string; from: string }>(
    `SELECT DISTINCT ON (l.task_id) l.task_id AS "taskId", l.effective_from::text AS "from" FROM task_levels l JOIN tasks k ON k.id = l.task_id
     WHERE k.site_id = :siteId AND l.effective_from <= CAST(:date AS date) ORDER BY l.task_id, l.effective_from DESC, l.number DESC`,
    { siteId, date },
  );
  return new Map(found.map(({ taskId, from }) => [taskId, from]));
}

/** A person who is wholly at one task, as the engine takes it. */
export const wholeDayAt = (
  material: TimetableMaterial,
  person: Placed,
  taskId: string,
  lengthMin: number,
  wornPct: number | null,
) =>
  dayOf(person, [{ taskId, durationMin: lengthMin }], lengthMin, contextOf(material), {
    wornPct,
    quietDb: null,
  });

/** The people of a crew or a group and, by task, what an hour of it takes of each one's limit. */
export async function timetableSubject(
  actor: Actor,
  { goal, wornPct, ...scope }: TimetableQuery,
): Promise<TimetableSubject> {
  const material = await timetableMaterial(actor, scope);
  const { governing, criterion } = goalOf(material, goal);
  const { siteId } = material.scope;
  const crew =
    scope.scopeKind === "crew"
      ? await row<{ startsAt: string; lengthMin: number }>(
          `SELECT to_char(usual_start, 'HH24:MI') AS "startsAt", usual_length_min AS "lengthMin" FROM crews WHERE id = :id`,
          { id: scope.scopeId },
        )
      : null;
  const dates = await levelDates(siteId, material.date);
  const theirs = new Set(
    material.workers.flatMap(({ tasks }) => tasks.map(({ taskId }) => taskId)),
  );
  const lengthMin = crew?.lengthMin ?? 480;
  return {
    scope: { ...material.scope, ...scope },
    date: material.date,
    ruleSetKey: governing.key,
    ruleSetVersion: governing.version,
    goal: criterion?.id ?? "",
    startsAt: crew?.startsAt ?? "06:00",
    slots: Math.max(4, Math.round(lengthMin / SLOT_MIN)),
    people: material.workers.map(({ id, name, employeeNumber }) => ({ id, name, employeeNumber })),
    tasks: material.tasks.map(({ id, name, level }) => {
      const shares = material.placed.map((person) =>
        criterion === null
          ? { share: null, isUpper: false }
          : slotShare(
              wholeDayAt(material, person, id, lengthMin, wornPct ?? null),
              lengthMin,
              governing,
              criterion,
            ),
      );
      return {
        id,
        name,
        levelDb: level?.levelDb ?? null,
        levelFrom: dates.get(id) ?? null,
        isTheirs: theirs.has(id),
        hourPct: shares.map(({ share }) => share && (100 * share * 60) / SLOT_MIN),
        isUpper: shares.some(({ isUpper }) => isUpper),
      };
    }),
    withoutDay: material.withoutDay,
    hasMore: material.hasMore,
  };
}
