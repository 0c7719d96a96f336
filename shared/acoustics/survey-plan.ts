import type { SurveyStrategy } from "./types";
import { minimumGroupMeasuringH } from "./uncertainty";

/** Spread of the samples of a task or of full days from which the standard asks for more, dB. */
export const LARGE_SPREAD_DB = 3;

const TASK_SAMPLES = 3;
const TASK_MORE_SAMPLES = 3;
const TASK_SAMPLE_MIN = 5;
const LEAST_CYCLES = 3;
const JOB_SAMPLES = 5;
const FULL_DAYS = 3;
const FULL_DAYS_MORE = 2;

/** Why a plan is what it is; a code, put into words by the screen. */
export type PlanReason =
  | "three-samples"
  | "whole-short-task"
  | "five-minutes"
  | "whole-cycles"
  | "longer-for-fluctuating"
  | "large-spread"
  | "group-size"
  | "split-large-group"
  | "five-samples"
  | "spread-over-shift"
  | "three-days"
  | "whole-day";

export interface PlanStep {
  readonly code: PlanReason;
  /** Clause of ISO 9612:2009, from memory. */
  readonly clause: string;
  /** The third edition of 2025 revised the clause. Its numbers are not known here; the plan is that of 2009. */
  readonly isRevisedIn2025: boolean;
}

/** By the published summary of the third edition. */
const REVISED_IN_2025 = ["9.3", "10.2", "11.3"];

type Step = Pick<PlanStep, "code" | "clause">;

export interface SamplingPlan {
  readonly strategy: SurveyStrategy;
  readonly sampleCount: number;
  /** Least length of a sample, minutes. */
  readonly sampleMin: number;
  /** Least length of all together, minutes. */
  readonly totalMin: number;
  /** Samples still to take. */
  readonly missingCount: number;
  readonly reasons: readonly PlanStep[];
}

/** Greatest less least, dB; null below two samples. */
export function spreadDb(samplesDb: readonly number[]): number | null {
  return samplesDb.length < 2 ? null : Math.max(...samplesDb) - Math.min(...samplesDb);
}

/**
 * True where samples differ by 3 dB or more, so that the standard asks for more of them, longer ones, or (for a task)
 * to divide it.
 *
 * @source iso-9612-2009 9.3, 11.3
 */
export function asksForMore(samplesDb: readonly number[]): boolean {
  const spread = spreadDb(samplesDb);
  // 85.3 − 82.3 is a little less than 3 in binary.
  return spread !== null && spread >= LARGE_SPREAD_DB - 1e-9;
}

export type NoisePattern = "steady" | "cyclic" | "fluctuating";

/**
 * Samples of a task: three of at least 5 min, or of the whole task where it is shorter; of cyclic noise whole cycles,
 * three or more of them; of noise that fluctuates by chance as long as it takes, for which the standard has no number:
 * here a third of the task for each sample, together its whole length. Three more where those taken differ by 3 dB or
 * more.
 *
 * @throws RangeError for a task without length.
 * @source iso-9612-2009 9.3
 */
export function planTaskSampling(task: {
  readonly durationMin: number;
  readonly pattern: NoisePattern;
  /** Length of a cycle, minutes; null where not known. */
  readonly cycleMin: number | null;
  readonly samplesDb: readonly number[];
}): SamplingPlan {
  const { durationMin, pattern, cycleMin, samplesDb } = task;
  if (!(durationMin > 0)) throw new RangeError("A task takes some time");
  const clause = "9.3";
  const reasons: Step[] = [{ code: "three-samples", clause }];
  let sampleMin = TASK_SAMPLE_MIN;
  if (durationMin <= TASK_SAMPLE_MIN) {
    sampleMin = durationMin;
    reasons.push({ code: "whole-short-task", clause });
  } else if (pattern === "cyclic" && cycleMin !== null && cycleMin > 0) {
    // The last bit must not ask for a cycle more.
    const cycles = Math.max(LEAST_CYCLES, Math.ceil(TASK_SAMPLE_MIN / cycleMin - 1e-9));
    sampleMin = Math.min(durationMin, cycles * cycleMin);
    reasons.push({ code: "whole-cycles", clause });
  } else if (pattern === "fluctuating") {
    sampleMin = Math.max(TASK_SAMPLE_MIN, durationMin / TASK_SAMPLES);
    reasons.push({ code: "longer-for-fluctuating", clause });
  } else {
    reasons.push({ code: "five-minutes", clause });
  }
  let sampleCount = TASK_SAMPLES;
  // Six that still differ are what the standard asked for; their spread is in the uncertainty.
  if (asksForMore(samplesDb)) {
    sampleCount += TASK_MORE_SAMPLES;
    reasons.push({ code: "large-spread", clause });
  }
  return plan("task", sampleCount, sampleMin, sampleCount * sampleMin, samplesDb, reasons);
}

/**
 * Samples of a job: the total time that Table 1 asks of the group's size, in at least five samples over workers and
 * shift. The length of a sample follows from their number; more samples where one would exceed the shift.
 *
 * @param sampleCount Number wished for; five or more.
 * @throws RangeError for an empty group, a shift without length, or fewer than five samples.
 * @source iso-9612-2009 10.2 Table 1
 */
export function planJobSampling(job: {
  readonly groupSize: number;
  readonly shiftMin: number;
  readonly samplesDb: readonly number[];
  readonly sampleCount?: number;
}): SamplingPlan {
  const { groupSize, shiftMin, samplesDb } = job;
  const wished = job.sampleCount ?? JOB_SAMPLES;
  if (!(shiftMin > 0)) throw new RangeError("A shift takes some time");
  if (!(wished >= JOB_SAMPLES)) throw new RangeError("A job is measured by at least five samples");
  const totalMin = 60 * minimumGroupMeasuringH(groupSize);
  const sampleCount = Math.max(wished, Math.ceil(totalMin / shiftMin - 1e-9));
  const reasons: Step[] = [
    { code: "group-size", clause: "10.2 Table 1" },
    { code: "five-samples", clause: "10.2" },
    { code: "spread-over-shift", clause: "10.2" },
  ];
  if (groupSize > 40) reasons.push({ code: "split-large-group", clause: "10.2 Table 1" });
  return plan("job", sampleCount, totalMin / sampleCount, totalMin, samplesDb, reasons);
}

/**
 * Samples of full days: three, two more where they differ by 3 dB or more, each over the shift or as much of it as can
 * be.
 *
 * @throws RangeError for a shift without length.
 * @source iso-9612-2009 11.2, 11.3
 */
export function planFullDaySampling(day: {
  readonly shiftMin: number;
  readonly samplesDb: readonly number[];
}): SamplingPlan {
  const { shiftMin, samplesDb } = day;
  if (!(shiftMin > 0)) throw new RangeError("A shift takes some time");
  const reasons: Step[] = [
    { code: "three-days", clause: "11.3" },
    { code: "whole-day", clause: "11.2" },
  ];
  let sampleCount = FULL_DAYS;
  if (asksForMore(samplesDb)) {
    sampleCount += FULL_DAYS_MORE;
    reasons.push({ code: "large-spread", clause: "11.3" });
  }
  return plan("full-day", sampleCount, shiftMin, sampleCount * shiftMin, samplesDb, reasons);
}

function plan(
  strategy: SurveyStrategy,
  sampleCount: number,
  sampleMin: number,
  totalMin: number,
  samplesDb: readonly number[],
  steps: readonly Step[],
): SamplingPlan {
  const missingCount = Math.max(0, sampleCount - samplesDb.length);
  const reasons = steps.map((step) => ({
    ...step,
    isRevisedIn2025: REVISED_IN_2025.some((clause) => step.clause.startsWith(clause)),
  }));
  return { strategy, sampleCount, sampleMin, totalMin, missingCount, reasons };
}

/** Kinds of work that the standard tells apart when it suggests a strategy. */
export type WorkPattern =
  | "fixed-simple"
  | "fixed-complex"
  | "mobile-few-tasks"
  | "mobile-many-tasks"
  | "mobile-unpredictable"
  | "tasks-without-durations"
  | "no-assigned-tasks";

export interface StrategyChoice {
  readonly strategy: SurveyStrategy;
  /** Others that can be used. */
  readonly alternatives: readonly SurveyStrategy[];
  /** The work pattern is the reason. */
  readonly reason: WorkPattern;
  readonly clause: string;
}

/** Recommended first, then what can be used, from memory. */
const STRATEGIES: Readonly<Record<WorkPattern, readonly [SurveyStrategy, ...SurveyStrategy[]]>> = {
  "fixed-simple": ["task"],
  "fixed-complex": ["task", "job", "full-day"],
  "mobile-few-tasks": ["task", "job", "full-day"],
  "mobile-many-tasks": ["full-day", "job", "task"],
  "mobile-unpredictable": ["full-day", "job"],
  "tasks-without-durations": ["job", "full-day"],
  "no-assigned-tasks": ["job", "full-day"],
};

/**
 * The strategy that suits a pattern of work.
 *
 * @source iso-9612-2009 Annex B Table B.1
 */
export function preselectStrategy(pattern: WorkPattern): StrategyChoice {
  const [strategy, ...alternatives] = STRATEGIES[pattern];
  return { strategy, alternatives, reason: pattern, clause: "Annex B Table B.1" };
}

/** Most tasks that a job counts as having few of; the standard names no number. */
const FEW_TASKS = 5;

/**
 * The pattern of work that what is on record speaks for.
 *
 * @source iso-9612-2009 Annex B Table B.1
 */
export function workPattern(job: {
  readonly taskCount: number;
  readonly isMobile: boolean;
  /** Every task has a duration that holds from day to day. */
  readonly hasDurations: boolean;
  readonly isPredictable: boolean;
}): WorkPattern {
  if (job.taskCount === 0) return "no-assigned-tasks";
  if (!job.hasDurations) return "tasks-without-durations";
  if (!job.isMobile) return job.taskCount === 1 ? "fixed-simple" : "fixed-complex";
  if (!job.isPredictable) return "mobile-unpredictable";
  return job.taskCount <= FEW_TASKS ? "mobile-few-tasks" : "mobile-many-tasks";
}

export interface WorkerDraw {
  readonly drawn: readonly string[];
  /** Next in line, in this order. */
  readonly reserve: readonly string[];
}

/**
 * Draws workers by chance, and two more in reserve. The same list, in whatever order, and the same seed give the same
 * draw, so that it can be shown again.
 *
 * @throws RangeError when fewer than one is to be drawn.
 */
export function drawWorkers(
  workerIds: readonly string[],
  count: number,
  seed: string,
  reserveCount = 2,
): WorkerDraw {
  if (!(Number.isInteger(count) && count >= 1)) throw new RangeError("At least one is drawn");
  const ids = [...new Set(workerIds)].sort((a, b) => (a < b ? -1 : 1));
  const next = chance(seed);
  const wanted = Math.min(ids.length, count + reserveCount);
  for (let place = 0; place < wanted; place++) {
    const other = place + Math.floor(next() * (ids.length - place));
    [ids[place], ids[other]] = [ids[other]!, ids[place]!];
  }
  return { drawn: ids.slice(0, count), reserve: ids.slice(count, wanted) };
}

/**
 * Numbers from 0 up to 1 out of a seed: a Weyl sequence of 32 bits, scrambled by multiplication and shifts; the seed's
 * characters enter by FNV-1a. Good enough to draw people, and nothing that hangs on secrecy.
 */
function chance(seed: string): () => number {
  let state = 0x811c9dc5;
  for (const character of seed) {
    state = Math.imul(state ^ character.codePointAt(0)!, 0x01000193);
  }
  return () => {
    state = (state + 0x9e3779b9) | 0;
    let mixed = Math.imul(state ^ (state >>> 16), 0x21f0aaad);
    mixed = Math.imul(mixed ^ (mixed >>> 15), 0x735a2d97);
    return ((mixed ^ (mixed >>> 15)) >>> 0) / 2 ** 32;
  };
}
