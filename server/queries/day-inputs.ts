import type {
  BandAttenuation,
  DayInput,
  MeterSettings,
  OctaveBandValues,
  ProtectorData,
  ReadingInput,
  RuleSetVersion,
  ShiftInput,
  TaskLevel,
  TimedTask,
  Unaccounted,
  WearingLooks,
  WornFrom,
  Zone,
} from "../../shared/acoustics/types";
import { ruleSetInForce, ruleSetVersion } from "../../shared/rule-sets";
import type { ProtectorFacts } from "../../shared/schemas/evaluation";
import { leftOutIn, type StoredLeftOut } from "../histories/left-out";
import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import {
  activeCheckInForce,
  combinationInForce,
  fitInForce,
  wearingSeen,
  wearingSeenFrom,
} from "./own-attenuation";

export interface DayKey {
  workerId: string;
  /** ISO date. */
  date: string;
}

/** The input revisions a result rests on: enough to build the whole input again, whatever has changed since. */
export interface DayRefs {
  settingsId: string;
  governing: [key: string, version: number];
  comparison: [key: string, version: number][];
  mustWear: boolean;
  targetDb: number | null;
  shifts: {
    revisionId: string;
    tasks: {
      id: string;
      levelId: string | null;
      zone: Zone;
      use: UseRefs | null;
      /** Times seen wearing it, and seen at all, where the shift itself says nothing. */
      seen?: [worn: number, seen: number];
      /** The same by source, with the latest round of each. Earlier results name none. */
      seenFrom?: SeenFrom[];
    }[];
    runRevisionIds: string[];
  }[];
}

type SeenFrom = [
  source: WearingLooks["source"],
  roundId: string,
  rounds: number,
  worn: number,
  seen: number,
];

/** What is worn, and what is known of it on this worker. What is not there is not named: earlier results name neither. */
export interface UseRefs {
  id: string;
  inner: string | null;
  outer: string | null;
  /** Revisions of fit tests. */
  fit?: string;
  check?: string;
  combination?: string;
  audioDb?: number;
}

export interface ResolvedDay extends DayKey {
  siteId: string;
  crewId: string | null;
  jobId: string | null;
  refs: DayRefs;
}

interface ShiftTaskRow {
  workerId: string;
  date: string;
  shiftId: string;
  revisionId: string;
  siteId: string;
  crewId: string | null;
  timedTaskId: string | null;
  levelId: string | null;
  zone: Zone;
  assignmentId: string | null;
  innerRevisionId: string | null;
  outerModelId: string | null;
  outerRevisionId: string | null;
  fitId: string | null;
  checkId: string | null;
  combinationId: string | null;
  audioDb: number | null;
  seen: [number, number] | null;
  seenFrom: SeenFrom[] | null;
}

/**
 * SQL: a run that says something about its worker's day. One that is out says nothing yet; a sample of a task speaks for
 * the task, and reaches the days of all who do it through the task's level.
 */
export const IS_OF_DAY = "NOT r.is_void AND NOT r.is_out AND r.task_id IS NULL";

const wanted = `wanted AS (SELECT "workerId" AS worker_id, date FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date))`;

/** SQL for the revision of a protector's data that is in force on a date. */
const modelRevision = (modelId: string) => `(SELECT p.id FROM protector_model_revisions p
  WHERE p.model_id = ${modelId} AND p.effective_from <= w.date ORDER BY p.effective_from DESC, p.number DESC LIMIT 1)`;

/**
 * Which revisions are in force for these days: shifts, task levels, zones, assignments, protector data, runs and the
 * site's settings. A day without a shift is left out.
 */
export async function resolveDays(days: readonly DayKey[]): Promise<ResolvedDay[]> {
  if (days.length === 0) return [];
  const parameter = [JSON.stringify(days.map(({ workerId, date }) => ({ workerId, date })))];
  const tasks = await rows<ShiftTaskRow>(
    `WITH ${wanted}
     SELECT w.worker_id AS "workerId", w.date::text AS date, s.id AS "shiftId", s.current_revision_id AS "revisionId", s.site_id AS "siteId",
       s.crew_id AS "crewId", t.id AS "timedTaskId", coalesce(a.zone, 'none') AS zone,
       (SELECT l.id FROM task_levels l WHERE l.task_id = t.task_id AND l.effective_from <= w.date
        ORDER BY l.effective_from DESC, l.number DESC LIMIT 1) AS "levelId",
       u.id AS "assignmentId", ${modelRevision("u.inner_model_id")} AS "innerRevisionId",
       u.outer_model_id AS "outerModelId", ${modelRevision("u.outer_model_id")} AS "outerRevisionId", u.audio_db AS "audioDb",
       CASE WHEN u.outer_model_id IS NULL THEN ${fitInForce("w.worker_id", "u.inner_model_id", "u.size", "w.date")} END AS "fitId",
       CASE WHEN u.outer_model_id IS NULL THEN ${activeCheckInForce("w.worker_id", "u.inner_model_id", "u.size", "w.date")} END AS "checkId",
       CASE WHEN u.outer_model_id IS NOT NULL THEN ${combinationInForce("u.inner_model_id", "u.outer_model_id", "w.date")} END AS "combinationId",
       CASE WHEN t.worn_pct IS NULL AND u.id IS NOT NULL THEN ${wearingSeen("w.worker_id", "t.task_id", "w.date")} END AS seen,
       CASE WHEN t.worn_pct IS NULL AND u.id IS NOT NULL THEN ${wearingSeenFrom("w.worker_id", "t.task_id", "w.date")} END AS "seenFrom"
     FROM wanted w
     JOIN shifts s ON s.worker_id = w.worker_id AND s.date = w.date AND NOT s.is_void
     LEFT JOIN shift_tasks t ON t.shift_revision_id = s.current_revision_id
     LEFT JOIN tasks k ON k.id = t.task_id
     LEFT JOIN areas a ON a.id = k.area_id
     LEFT JOIN LATERAL (
       SELECT x.id, x.inner_model_id, x.outer_model_id, x.size, x.audio_db FROM assignments x
       WHERE x.worker_id = w.worker_id AND x.valid @> w.date
         AND (x.task_id = t.task_id OR x.area_id = k.area_id OR (x.task_id IS NULL AND x.area_id IS NULL))
       ORDER BY (x.task_id IS NOT NULL) DESC, (x.area_id IS NOT NULL) DESC LIMIT 1) u ON TRUE
     ORDER BY w.worker_id, w.date, s.starts_at, t.position`,
    parameter,
  );
  if (tasks.length === 0) return [];
  const runs = await rows<{
    workerId: string;
    date: string;
    shiftId: string | null;
    revisionId: string;
  }>(
    `WITH ${wanted}
     SELECT w.worker_id AS "workerId", w.date::text AS date, r.shift_id AS "shiftId", r.current_revision_id AS "revisionId"
     FROM wanted w JOIN runs r ON r.worker_id = w.worker_id AND r.date = w.date AND ${IS_OF_DAY}
     JOIN run_revisions v ON v.id = r.current_revision_id AND (v.doubts = '{}' OR v.kept_reason IS NOT NULL)
     ORDER BY r.id`,
    parameter,
  );
  const workers = await rows<{
    id: string;
    jobId: string | null;
    mustWear: boolean;
    targetDb: number | null;
  }>(
    `SELECT id, job_id AS "jobId", must_wear AS "mustWear", personal_target_db AS "targetDb" FROM workers WHERE id = ANY ($1::uuid[])`,
    [[...new Set(days.map(({ workerId }) => workerId))]],
  );
  const siteDays = [...new Set(tasks.map(({ siteId, date }) => `${siteId} ${date}`))].map((key) => {
    const [siteId, date] = key.split(" ");
    return { siteId, date };
  });
  const settings = await rows<{
    siteId: string;
    date: string;
    id: string;
    governing: string;
    comparison: string[];
  }>(
    `SELECT x."siteId", x.date::text AS date, s.id, s.governing_rule_set AS governing, s.comparison_rule_sets AS comparison
     FROM jsonb_to_recordset($1::jsonb) AS x("siteId" uuid, date date)
     JOIN LATERAL (SELECT * FROM site_settings t WHERE t.site_id = x."siteId" AND t.effective_from <= x.date
       ORDER BY t.effective_from DESC, t.number DESC LIMIT 1) s ON TRUE`,
    [JSON.stringify(siteDays)],
  );

  const settingsOf = new Map(settings.map((row) => [`${row.siteId} ${row.date}`, row]));
  const workerOf = new Map(workers.map((row) => [row.id, row]));
  const runsOf = groupBy(runs, ({ workerId, date }) => `${workerId} ${date}`);
  return [...groupBy(tasks, ({ workerId, date }) => `${workerId} ${date}`)].flatMap(
    ([key, ofDay]) => {
      const { workerId, date, siteId, crewId } = ofDay[0]!;
      const site = settingsOf.get(`${siteId} ${date}`);
      const worker = workerOf.get(workerId);
      if (!site || !worker) return [];
      const governing = ruleSetInForce(site.governing, date);
      if (!governing) return [];
      const comparison = site.comparison.flatMap((name): [string, number][] => {
        const found = ruleSetInForce(name, date);
        return found ? [[found.key, found.version]] : [];
      });
      const ofShifts = [...groupBy(ofDay, ({ shiftId }) => shiftId)];
      const runsOfDay = runsOf.get(key) ?? [];
      const shifts = ofShifts.map(([shiftId, ofShift]) => ({
        revisionId: ofShift[0]!.revisionId,
        tasks: ofShift.flatMap((row) =>
          row.timedTaskId === null
            ? []
            : [
                {
                  id: row.timedTaskId,
                  levelId: row.levelId,
                  zone: row.zone,
                  use: refsOfUse(row),
                  ...(row.seen && { seen: row.seen }),
                  ...(row.seenFrom && { seenFrom: row.seenFrom }),
                },
              ],
        ),
        // A run that names no shift belongs to the only one of its day.
        runRevisionIds: runsOfDay
          .filter(
            (run) => run.shiftId === shiftId || (run.shiftId === null && ofShifts.length === 1),
          )
          .map(({ revisionId }) => revisionId),
      }));
      const refs: DayRefs = {
        settingsId: site.id,
        governing: [governing.key, governing.version],
        comparison,
        mustWear: worker.mustWear,
        targetDb: worker.targetDb,
        shifts,
      };
      return [{ workerId, date, siteId, crewId, jobId: worker.jobId, refs }];
    },
  );
}

function refsOfUse(row: ShiftTaskRow): UseRefs | null {
  if (row.assignmentId === null) return null;
  return {
    id: row.assignmentId,
    inner: row.innerRevisionId,
    outer: row.outerRevisionId,
    ...(row.fitId !== null && { fit: row.fitId }),
    ...(row.checkId !== null && { check: row.checkId }),
    ...(row.combinationId !== null && { combination: row.combinationId }),
    ...(row.audioDb !== null && { audioDb: row.audioDb }),
  };
}

interface LevelRow
  extends Omit<
    TaskLevel,
    "revisionId" | "peak" | "octaveBandsDb" | "strategy" | "keptReasons" | "impulseType"
  > {
  impulseType: 1 | 2 | 3 | null;
  id: string;
  strategy: NonNullable<TaskLevel["strategy"]>;
  keptReasons: string[];
  octaveBandsDb: OctaveBandValues | null;
  peakDb: number | null;
  peakWeighting: "A" | "C" | "Z" | null;
}

export const LEVEL_COLUMNS = (
  l: string,
) => `${l}.id, ${l}.metric, ${l}.level_db AS "levelDb", ${l}.lc_minus_la_db AS "lcMinusLaDb",
  ${l}.octave_bands_db AS "octaveBandsDb", ${l}.las_max_db AS "lasMaxDb", ${l}.peak_db AS "peakDb", ${l}.peak_weighting AS "peakWeighting",
  ${l}.samples_db AS "samplesDb", ${l}.instrument_class AS instrument, ${l}.grade, ${l}.strategy, ${l}.kept_reasons AS "keptReasons", ${l}.impulse_type AS "impulseType"`;

export function toTaskLevel(row: LevelRow): TaskLevel {
  const { id, peakDb, peakWeighting, ...facts } = row;
  return {
    ...facts,
    revisionId: id,
    peak:
      peakDb === null || peakWeighting === null
        ? null
        : { levelDb: peakDb, weighting: peakWeighting },
  };
}

interface ProtectorRow {
  id: string;
  modelId: string;
  name: string;
  kind: ProtectorData["kind"];
  data: ProtectorFacts;
}

export const PROTECTOR_COLUMNS = `p.id, p.model_id AS "modelId", m.name, m.kind, p.data`;

export function toProtector({ id, modelId, name, kind, data }: ProtectorRow): ProtectorData {
  return { modelId, revisionId: id, name, kind, ...data };
}

interface TimedRow {
  id: string;
  taskId: string;
  name: string;
  durationMin: number;
  wornPct: number | null;
  wornIsShiftWide: boolean;
}
interface RevisionRow {
  id: string;
  shiftId: string;
  lengthMin: number;
  startsMs: number;
  how: Unaccounted["how"];
  quietDb: number | null;
}
interface ReadingRow extends MeterSettings {
  id: string;
  runId: string;
  runRevisionId: string;
  durationMin: number;
  source: string;
  leftOut: StoredLeftOut | null;
  covers: ReadingInput["covers"];
  keptReason: string | null;
  kind: string;
  class: string;
  dosePct: number | null;
  averageDb: number | null;
  lceqDb: number | null;
  lasMaxDb: number | null;
  peakDb: number | null;
  peakWeighting: "A" | "C" | "Z" | null;
}

export const instrumentClass = (kind: string, meterClass: string): ReadingInput["instrument"] =>
  kind === "dosimeter" ? "dosimeter" : meterClass === "1" ? "class-1-meter" : "class-2-meter";

async function byId<Row extends { id: string }>(
  ids: Iterable<string | null>,
  text: string,
): Promise<Map<string, Row>> {
  const unique = [...new Set(ids)].filter((id) => id !== null);
  if (unique.length === 0) return new Map();
  const found = await rows<Row>(text, [unique]);
  return new Map(found.map((row) => [row.id, row]));
}

/** The engine's inputs, built from the revisions that the refs name. In the order of the refs. */
export async function hydrateDays(
  days: readonly { workerId: string; date: string; refs: DayRefs }[],
): Promise<DayInput[]> {
  const shifts = days.flatMap(({ refs }) => refs.shifts);
  const tasks = shifts.flatMap((shift) => shift.tasks);
  const uses = tasks.flatMap(({ use }) => (use ? [use] : []));
  const revisions = await byId<RevisionRow>(
    shifts.map(({ revisionId }) => revisionId),
    `SELECT v.id, v.shift_id AS "shiftId", v.length_min AS "lengthMin", v.unaccounted_how AS how, v.unaccounted_level_db AS "quietDb",
       (1000 * extract(epoch FROM (s.date + v.local_start) AT TIME ZONE s.time_zone))::float8 AS "startsMs"
     FROM shift_revisions v JOIN shifts s ON s.id = v.shift_id WHERE v.id = ANY ($1::uuid[])`,
  );
  const timed = await byId<TimedRow>(
    tasks.map(({ id }) => id),
    `SELECT t.id, t.task_id AS "taskId", k.name, t.duration_min AS "durationMin", t.worn_pct AS "wornPct", t.worn_is_shift_wide AS "wornIsShiftWide"
     FROM shift_tasks t JOIN tasks k ON k.id = t.task_id WHERE t.id = ANY ($1::uuid[])`,
  );
  const levels = await byId<LevelRow>(
    tasks.map(({ levelId }) => levelId),
    `SELECT ${LEVEL_COLUMNS("l")} FROM task_levels l WHERE l.id = ANY ($1::uuid[])`,
  );
  const protectors = await byId<ProtectorRow>(
    uses.flatMap(({ inner, outer }) => [inner, outer]),
    `SELECT ${PROTECTOR_COLUMNS} FROM protector_model_revisions p JOIN protector_models m ON m.id = p.model_id WHERE p.id = ANY ($1::uuid[])`,
  );
  const tests = await byId<{
    id: string;
    parDb: number | null;
    activePassed: boolean | null;
    testedOn: string;
  }>(
    uses.flatMap(({ fit, check }) => [fit ?? null, check ?? null]),
    `SELECT v.id, v.par_db AS "parDb", v.active_passed AS "activePassed", f.tested_on::text AS "testedOn"
     FROM fit_test_revisions v JOIN fit_tests f ON f.id = v.fit_test_id WHERE v.id = ANY ($1::uuid[])`,
  );
  const rounds = await byId<{ id: string; seenOn: string }>(
    tasks.flatMap(({ seenFrom = [] }) => seenFrom.map(([, roundId]) => roundId)),
    `SELECT id, seen_on::text AS "seenOn" FROM wearing_rounds WHERE id = ANY ($1::uuid[])`,
  );
  const combinations = await byId<{ id: string; bands: BandAttenuation }>(
    uses.map(({ combination }) => combination ?? null),
    "SELECT id, bands FROM protector_combinations WHERE id = ANY ($1::uuid[])",
  );
  const settings = await byId<{
    id: string;
    wearFromDb: number;
    creditsActivePart: boolean;
    usesUncertainty: boolean;
    settingsFrom: string;
  }>(
    days.map(({ refs }) => refs.settingsId),
    `SELECT id, wear_from_db AS "wearFromDb", credits_active_part AS "creditsActivePart", uses_uncertainty AS "usesUncertainty",
       effective_from::text AS "settingsFrom" FROM site_settings WHERE id = ANY ($1::uuid[])`,
  );
  const runIds = [...new Set(shifts.flatMap(({ runRevisionIds }) => runRevisionIds))];
  const readings =
    runIds.length === 0
      ? []
      : await rows<ReadingRow>(
          `SELECT g.id, g.run_id AS "runId", g.run_revision_id AS "runRevisionId", v.duration_min AS "durationMin", g.source, v.left_out AS "leftOut",
       v.covers, v.kept_reason AS "keptReason", i.kind, i.class, g.criterion_level_db AS "criterionLevelDb", g.exchange_rate_db AS "exchangeRateDb", g.threshold_db AS "thresholdDb",
       g.weighting, g.response, g.dose_pct AS "dosePct", g.average_db AS "averageDb", g.lceq_db AS "lceqDb", g.las_max_db AS "lasMaxDb",
       g.peak_db AS "peakDb", g.peak_weighting AS "peakWeighting"
     FROM readings g JOIN run_revisions v ON v.id = g.run_revision_id JOIN runs r ON r.id = g.run_id JOIN instruments i ON i.id = r.instrument_id
     WHERE g.run_revision_id = ANY ($1::uuid[]) ORDER BY g.run_id, g.position`,
          [runIds],
        );
  const readingsOf = groupBy(readings, ({ runRevisionId }) => runRevisionId);

  const toTimed = ({
    id,
    levelId,
    zone,
    use,
    seen,
    seenFrom,
  }: DayRefs["shifts"][number]["tasks"][number]): TimedTask => {
    const task = timed.get(id)!;
    const level = levelId === null ? null : levels.get(levelId);
    const inner = use?.inner ? protectors.get(use.inner) : undefined;
    const outer = use?.outer ? protectors.get(use.outer) : undefined;
    const check = tests.get(use?.check ?? "");
    const wornFrom: WornFrom | undefined =
      task.wornPct !== null
        ? { how: "stated" }
        : seenFrom && {
            how: "looks",
            looks: seenFrom.map(([source, roundId, roundCount, wornCount, seenCount]) => ({
              source,
              roundId,
              lastOn: rounds.get(roundId)!.seenOn,
              roundCount,
              wornCount,
              seenCount,
            })),
          };
    return {
      id,
      taskId: task.taskId,
      name: task.name,
      durationMin: task.durationMin,
      level: level ? toTaskLevel(level) : null,
      zone,
      protection:
        use && inner
          ? {
              assignmentId: use.id,
              inner: toProtector(inner),
              outer: outer ? toProtector(outer) : null,
              combinationBands: combinations.get(use.combination ?? "")?.bands ?? null,
              ownFitDb: tests.get(use.fit ?? "")?.parDb ?? null,
              activeCheckPassed: check?.activePassed ?? false,
              ...(check && { activeCheckedOn: check.testedOn }),
              audioDb: use.audioDb ?? null,
            }
          : null,
      wornPct: task.wornPct ?? (seen ? (100 * seen[0]) / seen[1] : null),
      wornIsShiftWide: task.wornIsShiftWide,
      ...(wornFrom && { wornFrom }),
    };
  };
  return days.map(({ workerId, date, refs }) => {
    const site = settings.get(refs.settingsId)!;
    return {
      workerId,
      date,
      personalTargetDb: refs.targetDb,
      mustWear: refs.mustWear,
      site: {
        wearFromDb: site.wearFromDb,
        creditsActivePart: site.creditsActivePart,
        settingsFrom: site.settingsFrom,
        usesUncertainty: site.usesUncertainty,
      },
      shifts: refs.shifts.map(({ revisionId, tasks: shiftTasks, runRevisionIds }): ShiftInput => {
        const revision = revisions.get(revisionId)!;
        return {
          id: revision.shiftId,
          revisionId,
          lengthMin: revision.lengthMin,
          tasks: shiftTasks.map(toTimed),
          unaccounted:
            revision.how === "quiet"
              ? { how: "quiet", levelDb: revision.quietDb! }
              : { how: revision.how },
          readings: runRevisionIds
            .flatMap((runRevisionId) => readingsOf.get(runRevisionId) ?? [])
            .map((reading) => toReading(reading, revision)),
        };
      }),
    };
  });
}

function toReading(
  row: ReadingRow,
  { startsMs, lengthMin }: Pick<RevisionRow, "startsMs" | "lengthMin">,
): ReadingInput {
  const stored = row.source === "history" ? row.leftOut : null;
  const leftOut =
    stored && leftOutIn(stored, { fromMs: startsMs, toMs: startsMs + lengthMin * 60_000 });
  const {
    id,
    runId,
    criterionLevelDb,
    exchangeRateDb,
    thresholdDb,
    weighting,
    response,
    durationMin,
    covers,
    keptReason,
  } = row;
  return {
    id,
    runId,
    durationMin: stored?.countedMin ?? durationMin,
    ...(leftOut && { leftOut }),
    covers,
    keptReason,
    settings: { criterionLevelDb, exchangeRateDb, thresholdDb, weighting, response },
    instrument: instrumentClass(row.kind, row.class),
    dosePct: row.dosePct,
    averageDb: row.averageDb,
    lceqDb: row.lceqDb,
    lasMaxDb: row.lasMaxDb,
    peak:
      row.peakDb === null || row.peakWeighting === null
        ? null
        : { levelDb: row.peakDb, weighting: row.peakWeighting },
  };
}

/**
 * The rule-set versions that a result names.
 *
 * @throws Error where one is unknown to this program: a version is never taken away.
 */
export function ruleSetsOf(refs: Pick<DayRefs, "governing" | "comparison">): {
  governing: RuleSetVersion;
  comparison: RuleSetVersion[];
} {
  const find = ([key, version]: [string, number]) => {
    const found = ruleSetVersion(key, version);
    if (!found) throw new Error(`rule set ${key} has no version ${version}`);
    return found;
  };
  return { governing: find(refs.governing), comparison: refs.comparison.map(find) };
}
