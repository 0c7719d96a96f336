import { isDeepStrictEqual } from "node:util";
import { lawOf } from "../../shared/acoustics/exchange-law";
import {
  describeGroup,
  type GroupSample,
  groupBelonging,
  probabilityPlot,
  workerOutliers,
} from "../../shared/acoustics/group-statistics";
import { isSameFigure, outsideCriterion } from "../../shared/acoustics/outside-criterion";
import type { Criterion, RuleSetVersion, TaskLevel } from "../../shared/acoustics/types";
import {
  budgetOfGroup,
  type GroupSurvey,
  whatNarrowsMost,
} from "../../shared/acoustics/uncertainty";
import { levelOf, ruleSetInForce } from "../../shared/rule-sets";
import type {
  GroupBlock,
  GroupBudgetView,
  GroupStatistics,
  GroupView,
} from "../../shared/schemas/group";
import type { ObservedDuration, SurveySample } from "../../shared/schemas/survey";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, visible } from "../lib/policy";
import type { Job } from "../models/task";
import { workerPolicy } from "../policies";
import { LEVEL_COLUMNS, toTaskLevel } from "./day-inputs";
import { durationUncertaintyMin, observedDurations } from "./observed-durations";
import { type NominalTask, nominalDay, shiftMinOf } from "./survey-plan";
import { resultOf, samplesOfSurveys } from "./survey-samples";
import { type MeasuredSurvey, surveyHead } from "./surveys";

const MONTHS = 12;
const REFERENCE_MIN = 480;
/** Surveys shown beside the nominal day. */
const MOST_SURVEYS = 5;

interface Sample extends GroupSample {
  workerName: string | null;
}

/** Days measured on the group's workers themselves, as each of these criteria judged them. */
async function measuredDays(
  actor: Actor,
  jobId: string,
  ruleSet: RuleSetVersion,
  criteria: readonly Criterion[],
) {
  return rows<{
    workerId: string;
    workerName: string | null;
    criterionId: string;
    levelDb: number | null;
    dosePct: number | null;
    bound: string;
  }>(
    `SELECT d.worker_id AS "workerId", CASE WHEN ${visible(workerPolicy, actor, "w")} THEN w.name END AS "workerName",
       c."criterionId", c."levelDb", c."dosePct", c.bound
     FROM workers w JOIN days d ON d.worker_id = w.id JOIN day_results r ON r.id = d.current_result_id
     CROSS JOIN LATERAL jsonb_to_recordset((r.criteria->'governing') || coalesce(r.criteria->'comparison', '[]'))
       AS c("ruleSetKey" text, "criterionId" text, "levelDb" float8, "dosePct" float8, bound text)
     WHERE w.job_id = :jobId AND r.grade = 'measured-worker' AND c."ruleSetKey" = :ruleSetKey AND c."criterionId" IN (:criteria)
       AND d.date > current_date - make_interval(months => ${MONTHS})
     ORDER BY d.date, d.worker_id`,
    { jobId, ruleSetKey: ruleSet.key, criteria: criteria.map(({ id }) => id) },
  );
}

/** Criteria that judge a day without protection by one figure each: action values and limits of one law together. */
function figuresOf(ruleSet: RuleSetVersion): { criterion: Criterion; all: Criterion[] }[] {
  const first = outsideCriterion(ruleSet);
  const judged = ruleSet.criteria.filter(
    ({ kind, quantity, judged: how }) =>
      (kind === "action" || kind === "limit") &&
      (quantity === "lex-8h" || quantity === "dose" || quantity === "table-dose") &&
      how === first.judged,
  );
  const figures: { criterion: Criterion; all: Criterion[] }[] = [];
  for (const criterion of judged) {
    const known = figures.find((figure) => isSameFigure(figure.criterion, criterion));
    if (known) known.all.push(criterion);
    else figures.push({ criterion, all: [criterion] });
  }
  return figures;
}

/** Each level that these criteria set, once. */
function thresholds(criteria: readonly Criterion[]) {
  const levels = criteria.map((one) => ({ levelDb: levelOf(one), label: one.label }));
  return levels.filter(
    ({ levelDb }, index) => levels.findIndex((other) => other.levelDb === levelDb) === index,
  );
}

type Figure = Pick<GroupBlock, "quantity" | "exchangeRateDb" | "thresholdDb">;
const LEX: Figure = { quantity: "lex-8h", exchangeRateDb: null, thresholdDb: null };

function figureOf(criterion: Criterion): Figure {
  if (criterion.quantity !== "dose" && criterion.quantity !== "table-dose") return LEX;
  const { exchangeRateDb, thresholdDb } = lawOf(criterion);
  return { quantity: criterion.quantity, exchangeRateDb, thresholdDb };
}

function describe(
  samples: readonly Sample[],
  levels: readonly { levelDb: number; label: string }[],
  isEnergy: boolean,
): GroupStatistics | null {
  if (samples.length === 0) return null;
  const nameOf = new Map(samples.map(({ workerId, workerName }) => [workerId, workerName]));
  const named = <One extends { workerId: string | null }>(one: One) => {
    const workerName = nameOf.get(one.workerId) ?? null;
    return { ...one, workerName, workerId: workerName === null ? null : one.workerId };
  };
  const { exceedances, reasons, ...figures } = describeGroup(
    samples,
    levels.map(({ levelDb }) => levelDb),
    isEnergy,
  );
  const outliers = workerOutliers(samples);
  const {
    leftAsideIds: _,
    degreesBetween: __,
    degreesWithin: ___,
    ...belonging
  } = groupBelonging(samples);
  return {
    ...figures,
    exceedances: exceedances.map((one, index) => ({ ...one, label: levels[index]!.label })),
    reasons: [...reasons],
    plot: probabilityPlot(samples).map(named),
    outliers: {
      workers: outliers.workers.map(named),
      critical: outliers.critical,
      leftAsideCount: outliers.leftAsideIds.length,
    },
    belonging,
  };
}

type LevelOfTask = TaskLevel & { taskId: string };

async function levelsInForce(taskIds: readonly string[], siteId: string): Promise<LevelOfTask[]> {
  if (taskIds.length === 0) return [];
  const found = await rows<Parameters<typeof toTaskLevel>[0] & { taskId: string }>(
    `SELECT DISTINCT ON (l.task_id) l.task_id AS "taskId", ${LEVEL_COLUMNS("l")} FROM task_levels l, sites s
     WHERE l.task_id IN (:taskIds) AND s.id = :siteId AND l.effective_from <= (now() AT TIME ZONE s.time_zone)::date
     ORDER BY l.task_id, l.effective_from DESC, l.number DESC`,
    { taskIds, siteId },
  );
  return found.map(({ taskId, ...level }) => ({ ...toTaskLevel(level), taskId }));
}

interface Part {
  taskId: string;
  durationMin: number;
  samplesDb: readonly number[];
  instrument: TaskLevel["instrument"];
  strategy: GroupSurvey["strategy"];
  isEnergy: boolean;
  keptReasons: readonly string[];
  belowRangeCount: number;
}

/** The budget of a nominal day out of what is known of each of its tasks, or why there is none. */
function budgetOf(
  parts: readonly Part[],
  observed: ReadonlyMap<string, ObservedDuration>,
): Pick<GroupBudgetView, "budget" | "reason" | "lackingTaskIds"> {
  const none = (reason: string, lacking: readonly Part[] = []) => ({
    budget: null,
    reason,
    lackingTaskIds: lacking.map(({ taskId }) => taskId),
  });
  const [first] = parts;
  if (!first) return none("no-tasks");
  if (parts.some(({ strategy }) => strategy !== first.strategy)) return none("mixed-strategies");
  if (first.strategy !== "task" && parts.length > 1) return none("mixed-strategies");
  const noEnergy = parts.filter(({ isEnergy }) => !isEnergy);
  if (noEnergy.length > 0) return none("not-an-energy-level", noEnergy);
  const few = parts.filter(
    ({ samplesDb }) => samplesDb.length < (first.strategy === "task" ? 2 : 3),
  );
  if (few.length > 0) return none("too-few-samples", few);
  const unmeasured = parts.filter(({ instrument }) => instrument === null);
  if (unmeasured.length > 0) return none("no-instrument", unmeasured);
  const survey: GroupSurvey =
    first.strategy === "task"
      ? {
          strategy: "task",
          tasks: parts.map(({ taskId, samplesDb, durationMin, instrument }) => ({
            taskId,
            samplesDb,
            durationMin,
            durationUncertaintyMin: durationUncertaintyMin(observed.get(taskId)),
            instrument: instrument!,
          })),
        }
      : {
          strategy: first.strategy,
          samplesDb: first.samplesDb,
          effectiveMin: first.durationMin,
          instrument: first.instrument!,
        };
  const found = budgetOfGroup(survey);
  if (typeof found === "string") return none(found);
  const { dominant: _, items, ...figures } = found;
  return {
    budget: {
      ...figures,
      items: [...items],
      narrowings: whatNarrowsMost(survey).map((one) => ({ ...one })),
    },
    reason: null,
    lackingTaskIds: [],
  };
}

const belowRangeOf = (parts: readonly Part[]) =>
  parts.reduce((sum, { belowRangeCount }) => sum + belowRangeCount, 0);

const keptOf = (parts: readonly Part[]) => [
  ...new Set(parts.flatMap(({ keptReasons }) => keptReasons)),
];

function partsInForce(day: readonly NominalTask[], levels: readonly LevelOfTask[]): Part[] {
  const levelOfTask = new Map(levels.map((level) => [level.taskId, level]));
  return day.map(({ taskId, durationMin }): Part => {
    const level = levelOfTask.get(taskId);
    return {
      taskId,
      durationMin,
      samplesDb: level?.samplesDb ?? [],
      instrument: level?.instrument ?? null,
      strategy: level?.strategy ?? "task",
      isEnergy: level ? level.metric.kind !== "lavg" : true,
      keptReasons: level?.keptReasons ?? [],
      belowRangeCount: 0,
    };
  });
}

/** A survey's own samples in the nominal day; tasks that it did not sample are as they are in force. */
function partsOfSurvey(
  { strategy, targets, groupSize }: MeasuredSurvey,
  samples: readonly SurveySample[],
  inForce: readonly Part[],
): Part[] {
  const results = targets.map((target) => {
    const counted = samples.filter(
      ({ position, notCounted }) => position === target.position && notCounted === null,
    );
    return {
      target,
      result: resultOf(strategy, target, samples, groupSize),
      samplesDb: counted.map(({ laeqDb }) => laeqDb!),
      belowRangeCount: counted.filter(isUnderRange).length,
    };
  });
  const partOf = (
    { target, result, samplesDb, belowRangeCount }: (typeof results)[number],
    taskId: string,
  ): Part => ({
    taskId,
    durationMin: target.nominalMin,
    samplesDb,
    instrument: result.instrument,
    strategy,
    isEnergy: true,
    keptReasons: result.keptReasons,
    belowRangeCount,
  });
  if (strategy !== "task") return results.map((one) => partOf(one, ""));
  const ofTask = new Map(results.map((one) => [one.target.taskId, one]));
  return inForce.map((part) => {
    const own = ofTask.get(part.taskId);
    return own && own.samplesDb.length > 0 ? partOf(own, part.taskId) : part;
  });
}

/** A group's result with its uncertainty, and what its samples say of it. */
export async function groupView(
  actor: Actor,
  job: Job,
  surveyId: string | null,
): Promise<GroupView> {
  const head = only(
    await rows<{ siteName: string; today: string; governing: string; workersCount: number }>(
      `SELECT s.name AS "siteName", (now() AT TIME ZONE s.time_zone)::date::text AS today, t.governing_rule_set AS governing,
         (SELECT count(*)::int FROM workers w WHERE w.job_id = :jobId AND (w.left_on IS NULL OR w.left_on >= current_date)) AS "workersCount"
       FROM sites s JOIN LATERAL (SELECT * FROM site_settings x WHERE x.site_id = s.id
         ORDER BY (x.effective_from <= (now() AT TIME ZONE s.time_zone)::date) DESC, x.effective_from DESC, x.number DESC LIMIT 1) t ON TRUE
       WHERE s.id = :siteId`,
      { siteId: job.siteId, jobId: job.id },
    ),
  );
  const ruleSet = ruleSetInForce(head.governing, head.today);
  if (!ruleSet) throw new Error(`rule set ${head.governing} is not in force`);
  const figures = figuresOf(ruleSet);
  const day = await nominalDay(job.id);
  const observed = await observedDurations(job.id);
  const levels = await levelsInForce(
    day.map(({ taskId }) => taskId),
    job.siteId,
  );
  const listed = await rows<{ id: string }>(
    `SELECT id FROM surveys WHERE job_id = :jobId AND state IN ('measuring', 'done') ORDER BY from_date DESC, id LIMIT ${MOST_SURVEYS}`,
    { jobId: job.id },
  );
  const surveys: MeasuredSurvey[] = [];
  for (const { id } of listed) surveys.push(await surveyHead(id));
  const samplesOf = await samplesOfSurveys(surveys);
  const inForce = partsInForce(day, levels);
  const levelOfTask = new Map(levels.map((level) => [level.taskId, level.levelDb]));
  const whole = surveys.filter(({ strategy }) => strategy !== "task");
  const basisSurvey = whole.find(({ id }) => id === surveyId) ?? null;
  const basis = basisSurvey
    ? await fromSurvey(actor, basisSurvey, samplesOf.get(basisSurvey.id) ?? [], figures)
    : fromDays(
        await measuredDays(
          actor,
          job.id,
          ruleSet,
          figures.map(({ criterion }) => criterion),
        ),
        figures,
      );
  const ofInForce = budgetOf(inForce, observed);
  return {
    jobId: job.id,
    jobName: job.name,
    siteId: job.siteId,
    siteName: head.siteName,
    workersCount: head.workersCount,
    ruleSetTitle: ruleSet.title,
    nominalDay: day.map(({ areaId: _, ...task }) => ({
      ...task,
      levelDb: levelOfTask.get(task.taskId) ?? null,
      observed: observed.get(task.taskId) ?? null,
    })),
    budgets: [
      {
        surveyId: null,
        surveyName: null,
        ...ofInForce,
        keptReasons: keptOf(inForce),
        belowRangeCount: belowRangeOf(inForce),
        isAsInForce: false,
      },
      ...surveys.map((survey) => {
        const parts = partsOfSurvey(survey, samplesOf.get(survey.id) ?? [], inForce);
        const { budget, reason, lackingTaskIds } = budgetOf(parts, observed);
        return {
          surveyId: survey.id,
          surveyName: survey.head.name,
          budget,
          reason,
          lackingTaskIds: lackingTaskIds.filter((id) => id !== ""),
          keptReasons: keptOf(parts),
          belowRangeCount: belowRangeOf(parts),
          isAsInForce: budget !== null && isDeepStrictEqual(budget, ofInForce.budget),
        };
      }),
    ],
    surveys: whole.map(({ id, head: { name } }) => ({ id, name })),
    basis: {
      surveyId: basisSurvey?.id ?? null,
      fromDate: basisSurvey ? basisSurvey.head.fromDate : null,
      leftOutCount: basis.leftOutCount,
      keptReasons: basis.keptReasons,
    },
    isOtherQuantity: basis.isOtherQuantity,
    blocks: basis.blocks,
  };
}

interface Basis {
  leftOutCount: number;
  keptReasons: string[];
  isOtherQuantity: boolean;
  blocks: GroupBlock[];
}

/** Days by each figure that the rules judge them by. A day without a dose stayed below that dose's threshold. */
function fromDays(
  days: Awaited<ReturnType<typeof measuredDays>>,
  figures: ReturnType<typeof figuresOf>,
): Basis {
  const blocks = figures.map(({ criterion, all }): GroupBlock => {
    const figure = figureOf(criterion);
    const own = days.filter(({ criterionId }) => criterionId === criterion.id);
    const samples = own.flatMap(({ workerId, workerName, levelDb, dosePct, bound }): Sample[] => {
      if (bound === "lower") return [];
      if (levelDb !== null) return [{ workerId, workerName, levelDb, isBelow: bound === "upper" }];
      return dosePct === 0 && figure.thresholdDb !== null
        ? [{ workerId, workerName, levelDb: figure.thresholdDb, isBelow: true }]
        : [];
    });
    return {
      ...figure,
      leftOutCount: own.filter(({ bound }) => bound === "lower").length,
      statistics: describe(samples, thresholds(all), figure.quantity === "lex-8h"),
    };
  });
  return { leftOutCount: 0, keptReasons: [], isOtherQuantity: false, blocks };
}

const isUnderRange = ({ doubts }: SurveySample) => doubts.includes("under-range");

/** Samples of a job or of full days as 8-hour levels, over the nominal day. Under range: below what was read. */
async function fromSurvey(
  actor: Actor,
  { nominal }: MeasuredSurvey,
  all: readonly SurveySample[],
  figures: ReturnType<typeof figuresOf>,
): Promise<Basis> {
  const counted = all.filter(({ notCounted }) => notCounted === null);
  const toLexDb = 10 * Math.log10(shiftMinOf(nominal) / REFERENCE_MIN);
  const samples = await seenNames(
    actor,
    counted.map(
      (sample): Sample => ({
        workerId: sample.workerId,
        workerName: sample.workerName,
        levelDb: sample.laeqDb! + toLexDb,
        isBelow: isUnderRange(sample),
      }),
    ),
  );
  // Energy levels: against a dose by another exchange rate they say nothing.
  const energy = figures.find(({ criterion }) => criterion.quantity === "lex-8h");
  return {
    leftOutCount: all.length - counted.length,
    keptReasons: [...new Set(counted.flatMap(({ keptReason }) => keptReason ?? []))],
    isOtherQuantity: energy === undefined,
    blocks: [
      {
        ...LEX,
        leftOutCount: 0,
        statistics: describe(samples, energy ? thresholds(energy.all) : [], true),
      },
    ],
  };
}

async function seenNames(actor: Actor, samples: readonly Sample[]): Promise<Sample[]> {
  const ids = [...new Set(samples.flatMap(({ workerId }) => workerId ?? []))];
  const seen =
    ids.length === 0
      ? []
      : await rows<{ id: string }>(
          `SELECT w.id FROM workers w WHERE w.id IN (:ids) AND ${visible(workerPolicy, actor, "w")}`,
          { ids },
        );
  const known = new Set(seen.map(({ id }) => id));
  return samples.map((sample) =>
    sample.workerId !== null && known.has(sample.workerId)
      ? sample
      : { ...sample, workerName: null },
  );
}
