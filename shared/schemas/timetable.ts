import { z } from "zod";
import { Can, IsoDate, LevelDb, Name, TimeOfDay } from "./common";
import { PlanOutcome } from "./tried";

export const MOST_PEOPLE = 60;
const MOST_TASKS = 20;
const MOST_LINES = 6;
/** A day of 16 hours. */
export const MOST_SLOTS = 64;

export const TimetableScope = z.object({ scopeKind: z.enum(["crew", "job"]), scopeId: z.uuid() });
export type TimetableScope = z.infer<typeof TimetableScope>;

export const TimetableQuery = TimetableScope.extend({
  goal: z.string().min(1).max(100).optional(),
  /** Where nothing is on record of how long a protector is worn, percent. */
  wornPct: z.coerce.number().min(0).max(100).optional(),
});
export type TimetableQuery = z.infer<typeof TimetableQuery>;

const Scope = TimetableScope.extend({ name: z.string(), siteId: z.uuid(), siteName: z.string() });
const Person = z.object({ id: z.uuid(), name: z.string(), employeeNumber: z.string() });

/** The people of a crew or a group, and what an hour of each task takes of each one's limit. */
export const TimetableSubject = z.object({
  scope: Scope,
  date: IsoDate,
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  goal: z.string(),
  startsAt: TimeOfDay,
  slots: z.number(),
  people: z.array(Person),
  tasks: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      levelDb: z.number().nullable(),
      levelFrom: IsoDate.nullable(),
      /** Some of the people have it in their nominal day. */
      isTheirs: z.boolean(),
      /** By person, in their order; null: not known, so that nobody can be put there. */
      hourPct: z.array(z.number().nullable()),
      /** Some of these are upper bounds. */
      isUpper: z.boolean(),
    }),
  ),
  withoutDay: z.array(z.object({ id: z.uuid(), name: z.string() })),
  hasMore: z.boolean(),
});
export type TimetableSubject = z.infer<typeof TimetableSubject>;

const Slots = z.number().int().min(1).max(MOST_SLOTS);

const StaffingInput = z.object({
  from: z.number().int().min(0).max(MOST_SLOTS),
  to: z.number().int().min(1).max(MOST_SLOTS),
  people: z.number().int().min(1).max(MOST_PEOPLE),
});

const TaskInput = z.object({
  taskId: z.uuid(),
  staffing: z.array(StaffingInput).min(1).max(MOST_LINES),
  /** Null: everybody. */
  qualifiedIds: z.array(z.uuid()).max(MOST_PEOPLE).nullable(),
  longestStay: Slots.nullable(),
  longestTotal: Slots.nullable(),
});
export type TimetableTaskInput = z.infer<typeof TaskInput>;

export const TimetableInput = TimetableScope.extend({
  goal: z.string().min(1).max(100),
  startsAt: TimeOfDay,
  slots: z.number().int().min(4).max(MOST_SLOTS),
  /** What nobody may go beyond, percent of the limit. */
  mostPct: z.number().min(1).max(100),
  wornPct: z.number().min(0).max(100).nullable(),
  personIds: z.array(z.uuid()).min(1).max(MOST_PEOPLE),
  tasks: z.array(TaskInput).min(1).max(MOST_TASKS),
  /** Whoever is at none of the tasks: at this one, or in quiet of this level. */
  restTaskId: z.uuid().nullable(),
  quietDb: LevelDb.nullable(),
}).check((context) => {
  const { slots, personIds, tasks, restTaskId, quietDb } = context.value;
  const fault = (
    path: (string | number)[],
    code: string,
    params: Record<string, string | number> = {},
  ) =>
    context.issues.push({
      code: "custom",
      input: context.value,
      path,
      params: { code, ...params },
    });
  if ((restTaskId === null) === (quietDb === null)) fault(["quietDb"], "rest-or-quiet");
  const seen = new Set(restTaskId === null ? [] : [restTaskId]);
  for (const [index, task] of tasks.entries()) {
    if (seen.has(task.taskId)) fault(["tasks", index, "taskId"], "task-twice");
    seen.add(task.taskId);
    const may = task.qualifiedIds?.filter((id) => personIds.includes(id)).length;
    if (may === 0) fault(["tasks", index, "qualifiedIds"], "task-nobody-may");
    let end = 0;
    for (const [line, { from, to, people }] of task.staffing.entries()) {
      const at = (field: string) => ["tasks", index, "staffing", line, field];
      if (to <= from || to > slots) fault(at("to"), "staffing-outside");
      else if (from < end) fault(at("from"), "staffing-overlaps");
      end = Math.max(end, to);
      if (people > personIds.length)
        fault(at("people"), "staffing-more-than-people", { count: personIds.length });
    }
  }
});
export type TimetableInput = z.infer<typeof TimetableInput>;

const Demand = z.discriminatedUnion("kind", [
  z.object({ kind: z.literal("staffing"), task: z.number(), line: z.number() }),
  z.object({ kind: z.literal("qualified"), task: z.number() }),
  z.object({ kind: z.literal("stay"), task: z.number() }),
  z.object({ kind: z.literal("total"), task: z.number() }),
  z.object({ kind: z.literal("limit"), people: z.array(z.number()) }),
]);
export type TimetableDemand = z.infer<typeof Demand>;

/** Who and what a timetable is about, as it was when it was asked for. People and tasks are known by their places. */
export const TimetableBasis = z.object({
  people: z.array(Person),
  tasks: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      levelDb: z.number(),
      levelFrom: IsoDate.nullable(),
      isUpper: z.boolean(),
      /** By person; null: can't be put there, for what reaches the ear is not known. */
      slotPct: z.array(z.number().nullable()),
    }),
  ),
  rest: z.object({
    name: z.string().nullable(),
    levelDb: z.number(),
    slotPct: z.array(z.number()),
  }),
});
export type TimetableBasis = z.infer<typeof TimetableBasis>;

/** Who is where when; −1 is at none of the tasks. */
export const TimetableFound = z.object({
  kind: z.literal("timetable"),
  table: z.array(z.array(z.number())),
  /** By person, percent of the limit. */
  sharesPct: z.array(z.number()),
  largestPct: z.number(),
  /** No timetable can have a smaller largest share, percent. */
  boundPct: z.number(),
  /** What the record's own engine makes of everybody's day. */
  outcome: PlanOutcome,
});
export type TimetableFound = z.infer<typeof TimetableFound>;

export const TimetableAnswer = z.discriminatedUnion("kind", [
  TimetableFound,
  z.object({
    kind: z.literal("contradiction"),
    demands: z.array(Demand),
    isSmallest: z.boolean(),
  }),
  z.object({ kind: z.literal("undecided") }),
]);
export type TimetableAnswer = z.infer<typeof TimetableAnswer>;

export const TimetableView = z.object({
  id: z.uuid(),
  scope: Scope,
  state: z.enum(["working", "answered", "cancelled", "failed"]),
  progressPct: z.number(),
  baseDate: IsoDate,
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  methodVersion: z.number(),
  request: TimetableInput,
  basis: TimetableBasis,
  answer: TimetableAnswer.nullable(),
  planId: z.uuid().nullable(),
  revision: z.number(),
  can: Can("keep"),
});
export type TimetableView = z.infer<typeof TimetableView>;

export const TimetableKeep = z.object({ name: Name(200) });

/** A timetable as a plan keeps it. */
export const KeptTimetable = z.object({
  request: TimetableInput,
  basis: TimetableBasis,
  found: TimetableFound.omit({ outcome: true }),
});
export type KeptTimetable = z.infer<typeof KeptTimetable>;
