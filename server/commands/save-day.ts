import { randomUUID } from "node:crypto";
import type { ProblemIssue } from "../../shared/schemas/problem";
import { isEmptyReading } from "../../shared/schemas/run";
import { shiftDoubt } from "../../shared/schemas/run-doubts";
import {
  checkShiftFacts,
  DayRowInput,
  type DaySaveView,
  type WorkedRowInput,
} from "../../shared/schemas/shift";
import { addDays } from "../../shared/time/zone";
import { recordAuditMany } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { execute, row, rows } from "../lib/db";
import { AppError, issue } from "../lib/errors";
import { groupBy } from "../lib/group-by";
import type { Actor } from "../lib/policy";
import { Run } from "../models/instrument";
import type { Crew } from "../models/worker";
import { calibrationsOn } from "../queries/calibrations";
import { dayFiguresOf } from "../queries/day-figures";
import { entryNotices } from "../queries/entry-notices";
import {
  presentSavedShift,
  readingsOfDay,
  type SavedShiftRow,
  savedShifts,
} from "../queries/saved-shifts";
import {
  employmentIssues,
  futureIssues,
  isSameShift,
  lockWorkers,
  openEndIssues,
  overlapIssues,
  startOf,
  unknownTaskIssues,
  wholeDayIssues,
} from "./check-shift";
import { recomputeDays } from "./recompute-days";
import { correctRun, recordRun } from "./record-run";
import { scheduleNotices } from "./schedule-notices";
import { type CheckedShift, storeShifts } from "./store-shifts";

interface Member {
  workerId: string;
  hiredOn: string;
  leftOn: string | null;
  isMember: boolean;
}

interface Candidate {
  index: number;
  row: WorkedRowInput;
}

/**
 * Stores the rows of a crew's day that stand, in one transaction, and says of the others what is wrong. Nothing of a
 * refused row is written; nobody's newer revision is overwritten.
 */
export async function saveDay(
  actor: Actor,
  crew: Crew,
  date: string,
  given: readonly Record<string, unknown>[],
): Promise<DaySaveView> {
  const entryId = randomUUID();
  const site = await row<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: crew.siteId },
  );
  if (!site) throw new AppError("not-found", 404);
  const today = todayAt(site.timeZone);
  const refused: DaySaveView["refused"] = [];
  const conflicts: DaySaveView["conflicts"] = [];
  const worked: Candidate[] = [];
  const absences: { index: number; workerId: string; isAbsent: boolean }[] = [];

  given.forEach((value, index) => {
    const parsed = DayRowInput.safeParse(value);
    const workerId = typeof value.workerId === "string" ? value.workerId : null;
    if (!parsed.success) {
      refused.push({
        index,
        workerId,
        issues: parsed.error.issues.map((found) => ({
          path: found.path as (string | number)[],
          code: found.code,
          params: boundsOf(found),
        })),
      });
      return;
    }
    if (parsed.data.kind !== "worked") {
      absences.push({
        index,
        workerId: parsed.data.workerId,
        isAbsent: parsed.data.kind === "absent",
      });
      return;
    }
    const shape: {
      value: WorkedRowInput;
      issues: {
        path: (string | number)[];
        params: Record<string, string | number> & { code: string };
      }[];
    } = { value: parsed.data, issues: [] };
    checkShiftFacts(shape);
    if (shape.issues.length > 0) {
      refused.push({
        index,
        workerId,
        issues: shape.issues.map(({ path, params: { code, ...params } }) => ({
          path,
          code,
          params,
        })),
      });
    } else worked.push({ index, row: parsed.data });
  });

  const workerIds = [
    ...new Set([
      ...worked.map(({ row: { workerId } }) => workerId),
      ...absences.map(({ workerId }) => workerId),
    ]),
  ];
  await lockWorkers(workerIds);
  const members = await membersOf(crew.id, date, workerIds);
  const taskIds = await knownTasks(
    crew.siteId,
    worked.flatMap(({ row: { tasks } }) => tasks.map(({ taskId }) => taskId)),
  );
  const instruments = await knownInstruments(
    worked.flatMap(({ row: { run } }) => (run ? [run.instrumentId] : [])),
  );
  const nearby =
    workerIds.length === 0
      ? []
      : await savedShifts(
          "s.worker_id = ANY (CAST(:workerIds AS uuid[])) AND s.date BETWEEN CAST(:from AS date) AND CAST(:to AS date)",
          { workerIds: `{${workerIds.join(",")}}`, from: addDays(date, -2), to: addDays(date, 2) },
        );
  const doubtful = await doubtfulRuns(date, worked);
  const shiftsByWorker = groupBy(nearby, ({ workerId }) => workerId);
  const shiftsOf = (workerId: string) => shiftsByWorker.get(workerId) ?? [];

  const accepted: {
    index: number;
    row: WorkedRowInput;
    shift: CheckedShift | null;
    current: SavedShiftRow | null;
  }[] = [];
  const taken = new Set<string>();
  for (const { index, row: one } of worked) {
    const issues: ProblemIssue[] = [];
    const member = members.get(one.workerId);
    if (!member?.isMember) issues.push(issue(["workerId"], "not-in-crew"));
    else issues.push(...employmentIssues(date, member));
    issues.push(...futureIssues(date, today));
    if (taken.has(one.workerId)) issues.push(issue(["workerId"], "worker-twice"));
    taken.add(one.workerId);
    issues.push(
      ...wholeDayIssues(one.lengthMin, one.confirmsWholeDay),
      ...unknownTaskIssues(one.tasks, taskIds),
    );
    if (one.run && !instruments.has(one.run.instrumentId))
      issues.push(issue(["run", "instrumentId"], "instrument-unknown"));
    issues.push(...(doubtful.get(index) ?? []));
    one.run?.readings.forEach((reading, at) => {
      if (isEmptyReading(reading)) issues.push(issue(["run", "readings", at], "reading-empty"));
    });

    const own =
      shiftsOf(one.workerId).find((shift) =>
        one.shiftId
          ? shift.shiftId === one.shiftId
          : shift.crewId === crew.id && shift.date === date,
      ) ?? null;
    const isStale = one.shiftId === null ? own !== null : own?.revision !== one.revision;
    if (isStale && !(own && isSameShift(one, own))) {
      conflicts.push({
        index,
        workerId: one.workerId,
        current: own ? presentSavedShift(own) : null,
      });
      continue;
    }

    const startsAt = startOf(date, one, site.timeZone, issues);
    if (startsAt) {
      const others = shiftsOf(one.workerId).filter((shift) => shift.shiftId !== own?.shiftId);
      issues.push(...overlapIssues({ startsAt, lengthMin: one.lengthMin }, others));
    }
    const isUnchanged = own !== null && isSameShift(one, own);
    if (startsAt && !isUnchanged) {
      const span = { startsAt, lengthMin: one.lengthMin };
      issues.push(...openEndIssues(span, site.timeZone, one.confirmsOpenEnd));
    }
    if (own && !isUnchanged && one.reason === null)
      issues.push(issue(["reason"], "reason-missing"));
    if (issues.length > 0 || !startsAt) {
      refused.push({ index, workerId: one.workerId, issues });
      continue;
    }
    const shift: CheckedShift | null = isUnchanged
      ? null
      : {
          shiftId: own?.shiftId ?? null,
          number: (own?.revision ?? 0) + 1,
          siteId: crew.siteId,
          workerId: one.workerId,
          crewId: crew.id,
          date,
          timeZone: site.timeZone,
          localStart: one.localStart,
          lengthMin: one.lengthMin,
          startsAt,
          unaccounted: one.unaccounted,
          tasks: one.tasks,
          note: one.note,
          reason: own ? one.reason : null,
        };
    accepted.push({ index, row: one, shift, current: own });
  }

  const toStore = accepted.filter(
    (one): one is typeof one & { shift: CheckedShift } => one.shift !== null,
  );
  const ids = await storeShifts(
    actor,
    entryId,
    toStore.map(({ shift }) => shift),
  );
  const idOf = new Map(toStore.map(({ index }, place) => [index, ids[place] as string]));
  for (const { index, row: one, current } of accepted) {
    if (one.run)
      await storeRun(
        actor,
        crew.siteId,
        date,
        one,
        idOf.get(index) ?? current?.shiftId ?? null,
        entryId,
      );
  }
  const absent = await storeAbsences(actor, crew, date, absences, members, nearby, refused);

  const keys = accepted
    .filter(({ shift, row: { run } }) => shift !== null || run !== null)
    .map(({ row: { workerId } }) => ({ workerId, date }));
  const recomputed = await recomputeDays(actor.organizationId, keys);
  await scheduleNotices({
    organizationId: actor.organizationId,
    author: actor,
    entryId,
    siteId: crew.siteId,
    recomputed,
  });

  const savedIds = accepted.map(({ row: { workerId } }) => workerId);
  const figures = await dayFiguresOf(savedIds, date);
  const readings = await readingsOfDay(savedIds, date);
  const current =
    savedIds.length === 0
      ? []
      : await savedShifts(
          "s.worker_id = ANY (CAST(:ids AS uuid[])) AND s.crew_id = :crewId AND s.date = :date",
          { ids: `{${savedIds.join(",")}}`, crewId: crew.id, date },
        );
  const currentOf = new Map(current.toReversed().map((shift) => [shift.workerId, shift]));
  return {
    entryId,
    saved: [
      ...accepted.map(({ index, row: { workerId } }) => {
        const stored = currentOf.get(workerId);
        return {
          index,
          workerId,
          shift: stored ? presentSavedShift(stored) : null,
          figures: figures.get(workerId) ?? null,
          readings: readings.get(workerId) ?? [],
        };
      }),
      ...absent.map(({ index, workerId }) => ({
        index,
        workerId,
        shift: null,
        figures: null,
        readings: [],
      })),
    ].sort((a, b) => a.index - b.index),
    refused: refused.sort((a, b) => a.index - b.index),
    conflicts,
    notices: await entryNotices(entryId),
  };
}

const boundsOf = (found: object): Record<string, string | number> =>
  Object.fromEntries(
    Object.entries(found).filter(
      ([name, value]) => ["minimum", "maximum"].includes(name) && typeof value === "number",
    ),
  );

async function membersOf(
  crewId: string,
  date: string,
  workerIds: readonly string[],
): Promise<Map<string, Member>> {
  const found =
    workerIds.length === 0
      ? []
      : await rows<Member>(
          `SELECT w.id AS "workerId", w.hired_on::text AS "hiredOn", w.left_on::text AS "leftOn",
       EXISTS (SELECT 1 FROM crew_memberships m WHERE m.crew_id = :crewId AND m.worker_id = w.id AND m.valid @> CAST(:date AS date)) AS "isMember"
     FROM workers w WHERE w.id = ANY (CAST(:ids AS uuid[]))`,
          { crewId, date, ids: `{${workerIds.join(",")}}` },
        );
  return new Map(found.map((member) => [member.workerId, member]));
}

async function knownTasks(siteId: string, taskIds: readonly string[]): Promise<Set<string>> {
  const found =
    taskIds.length === 0
      ? []
      : await rows<{ id: string }>(
          "SELECT id FROM tasks WHERE site_id = :siteId AND id = ANY (CAST(:ids AS uuid[]))",
          { siteId, ids: `{${[...new Set(taskIds)].join(",")}}` },
        );
  return new Set(found.map(({ id }) => id));
}

async function knownInstruments(ids: readonly string[]): Promise<Set<string>> {
  const found =
    ids.length === 0
      ? []
      : await rows<{ id: string }>(
          "SELECT id FROM instruments WHERE id = ANY (CAST(:ids AS uuid[]))",
          { ids: `{${[...new Set(ids)].join(",")}}` },
        );
  return new Set(found.map(({ id }) => id));
}

/**
 * What speaks against the runs of rows, by the row: an instrument without a certificate on that day, or a length that is
 * not the shift's. Not where somebody has said already why the run is kept.
 */
async function doubtfulRuns(
  date: string,
  worked: readonly { index: number; row: WorkedRowInput }[],
): Promise<Map<number, ProblemIssue[]>> {
  const given = worked.flatMap(({ index, row: { run, lengthMin } }) =>
    run ? [{ index, run, lengthMin }] : [],
  );
  const states = await calibrationsOn(
    given.map(({ run: { instrumentId } }) => ({ instrumentId, date })),
  );
  const doubtful = given.flatMap(({ index, run, lengthMin }, place) => {
    const { dueOn, failedOn } = states[place]!;
    const { durationMin, covers } = run;
    const ofShift = shiftDoubt({
      covers,
      durationMin,
      shift: { from: "", to: "", shiftMin: lengthMin, insideMin: null },
    });
    const issues = [
      ...(failedOn !== null || (dueOn !== null && dueOn < date)
        ? [issue(["run", "instrumentId"], "run-doubtful")]
        : []),
      ...(ofShift ? [issue(["run", "covers"], ofShift.code, { ...ofShift.params })] : []),
    ];
    return issues.length === 0 ? [] : [{ index, runId: run.runId, issues }];
  });
  const runIds = doubtful.flatMap(({ runId }) => runId ?? []);
  const kept = await rows<{ id: string }>(
    `SELECT r.id FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id
     WHERE r.id = ANY (CAST(:ids AS uuid[])) AND v.kept_reason IS NOT NULL`,
    { ids: `{${runIds.join(",")}}` },
  );
  const isKept = new Set(kept.map(({ id }) => id));
  return new Map(
    doubtful
      .filter(({ runId }) => runId === null || !isKept.has(runId))
      .map(({ index, issues }) => [index, issues]),
  );
}

async function storeRun(
  actor: Actor,
  siteId: string,
  date: string,
  one: WorkedRowInput,
  shiftId: string | null,
  entryId: string,
): Promise<void> {
  if (!one.run) return;
  const { instrumentId, runId, runRevision, durationMin, covers, readings } = one.run;
  const run = {
    durationMin,
    covers,
    checkBeforeDb: null,
    checkAfterDb: null,
    keptReason: null,
    unusual: null,
    readings,
  };
  if (runId === null) {
    await recordRun(
      actor,
      siteId,
      { ...run, instrumentId, workerId: one.workerId, date, shiftId },
      entryId,
    );
    return;
  }
  const existing = await Run.findOne({ where: { id: runId, workerId: one.workerId }, lock: true });
  if (!existing) throw new AppError("not-found", 404);
  if (existing.revision !== runRevision) throw new AppError("stale", 412);
  const kept = await row<{
    checkBeforeDb: number | null;
    checkAfterDb: number | null;
    keptReason: string | null;
    unusual: string | null;
  }>(
    `SELECT check_before_db AS "checkBeforeDb", check_after_db AS "checkAfterDb", kept_reason AS "keptReason", unusual FROM run_revisions WHERE id = :id`,
    { id: existing.currentRevisionId },
  );
  await correctRun(
    actor,
    existing,
    { ...run, ...kept, reason: one.reason ?? "corrected in the day's entry", isVoid: false },
    entryId,
    { isInGrid: true },
  );
}

async function storeAbsences(
  actor: Actor,
  crew: Crew,
  date: string,
  absences: readonly { index: number; workerId: string; isAbsent: boolean }[],
  members: Map<string, Member>,
  nearby: readonly SavedShiftRow[],
  refused: DaySaveView["refused"],
): Promise<{ index: number; workerId: string }[]> {
  const stored = absences.filter(({ index, workerId, isAbsent }) => {
    const issues: ProblemIssue[] = [];
    if (!members.get(workerId)?.isMember) issues.push(issue(["workerId"], "not-in-crew"));
    if (isAbsent && nearby.some((shift) => shift.workerId === workerId && shift.date === date))
      issues.push(issue(["kind"], "worked-that-day"));
    if (issues.length > 0) refused.push({ index, workerId, issues });
    return issues.length === 0;
  });
  if (stored.length === 0) return [];
  const ids = (isAbsent: boolean) =>
    stored.filter((one) => one.isAbsent === isAbsent).map(({ workerId }) => workerId);
  await execute(
    `INSERT INTO absences (organization_id, worker_id, date, crew_id, recorded_by) SELECT $1, unnest($2::uuid[]), $3::date, $4, $5 ON CONFLICT DO NOTHING`,
    [actor.organizationId, ids(true), date, crew.id, actor.userId],
  );
  await execute("DELETE FROM absences WHERE worker_id = ANY ($1::uuid[]) AND date = $2::date", [
    ids(false),
    date,
  ]);
  await recordAuditMany(
    actor,
    stored.map(({ workerId, isAbsent }) => ({
      action: isAbsent ? "record-absence" : "withdraw-absence",
      subjectKind: "worker",
      subjectId: workerId,
      values: { date },
    })),
  );
  return stored;
}
