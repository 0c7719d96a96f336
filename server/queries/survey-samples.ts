import { asLaw, levelFactor } from "../../shared/acoustics/exchange-law";
import { energyMeanDb } from "../../shared/acoustics/exposure";
import { evaluateHistory } from "../../shared/acoustics/history";
import {
  type NoisePattern,
  planFullDaySampling,
  planJobSampling,
  planTaskSampling,
  type SamplingPlan,
  spreadDb,
} from "../../shared/acoustics/survey-plan";
import type { SurveyStrategy } from "../../shared/acoustics/types";
import {
  INSTRUMENT_DB,
  jobSamplingUncertaintyDb,
  LARGE_SCATTER_DB,
} from "../../shared/acoustics/uncertainty";
import { OctaveBands } from "../../shared/schemas/evaluation";
import type { HistoryChannel, HistoryStretch } from "../../shared/schemas/history";
import type { SurveySample, TargetResult } from "../../shared/schemas/survey";
import { rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { instrumentClass } from "./day-inputs";
import { toStretches } from "./histories";
import { levelsFromChunks, type StoredChunk } from "./history-levels";

export interface Target {
  position: number;
  taskId: string | null;
  taskName: string | null;
  samplesCount: number;
  sampleMin: number;
  pattern: NoisePattern;
  cycleMin: number | null;
  /** Nominal minutes of the task, or of the day. */
  nominalMin: number;
}

interface RunRow {
  surveyId: string;
  runId: string;
  runRevisionId: string;
  taskId: string | null;
  workerId: string | null;
  workerName: string | null;
  place: string | null;
  date: string;
  isOut: boolean;
  durationMin: number | null;
  kind: string;
  class: string;
  serialNumber: string;
  checkBeforeDb: number | null;
  checkAfterDb: number | null;
  doubts: string[];
  keptReason: string | null;
  unusual: string | null;
  criterionLevelDb: number | null;
  averageDb: number | null;
  dosePct: number | null;
  lceqDb: number | null;
  lasMaxDb: number | null;
  peakDb: number | null;
  peakWeighting: "A" | "C" | "Z" | null;
  octaveBandsDb: SurveySample["octaveBandsDb"];
}

interface HistoryRow {
  id: string;
  runId: string;
  intervalMs: number;
  valuesCount: number;
  channels: HistoryChannel[];
  stretches: HistoryStretch[];
}

/** Readings of LAeq: energy, no threshold, A. What the time weighting was makes no difference to energy. */
const IS_LAEQ = "g.exchange_rate_db = 3 AND g.threshold_db IS NULL AND g.weighting = 'A'";

async function runsOfSurveys(surveyIds: readonly string[]): Promise<RunRow[]> {
  return rows<RunRow>(
    `SELECT r.survey_id AS "surveyId", r.id AS "runId", v.id AS "runRevisionId", r.task_id AS "taskId", r.worker_id AS "workerId",
       w.name AS "workerName", r.place, r.date::text AS date, r.is_out AS "isOut", v.duration_min AS "durationMin", i.kind, i.class,
       i.serial_number AS "serialNumber", v.check_before_db AS "checkBeforeDb", v.check_after_db AS "checkAfterDb", v.doubts,
       v.kept_reason AS "keptReason", v.unusual, e.criterion_level_db AS "criterionLevelDb", e.average_db AS "averageDb", e.dose_pct AS "dosePct",
       (SELECT max(g.lceq_db) FROM readings g WHERE g.run_revision_id = v.id) AS "lceqDb",
       (SELECT max(g.las_max_db) FROM readings g WHERE g.run_revision_id = v.id) AS "lasMaxDb",
       p.peak_db AS "peakDb", p.peak_weighting AS "peakWeighting", o.octave_bands_db AS "octaveBandsDb"
     FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id JOIN instruments i ON i.id = r.instrument_id
     LEFT JOIN workers w ON w.id = r.worker_id
     LEFT JOIN LATERAL (SELECT * FROM readings g WHERE g.run_revision_id = v.id AND ${IS_LAEQ}
       ORDER BY g.average_db IS NULL, g.position LIMIT 1) e ON TRUE
     LEFT JOIN LATERAL (SELECT * FROM readings g WHERE g.run_revision_id = v.id AND g.peak_db IS NOT NULL
       ORDER BY g.peak_weighting = 'C' DESC, g.peak_db DESC LIMIT 1) p ON TRUE
     LEFT JOIN LATERAL (SELECT * FROM readings g WHERE g.run_revision_id = v.id AND g.octave_bands_db IS NOT NULL
       ORDER BY g.position LIMIT 1) o ON TRUE
     WHERE r.survey_id = ANY ($1::uuid[]) AND NOT r.is_void ORDER BY r.date, lower(r.span), r.id`,
    [surveyIds],
  );
}

/** Level of a run by its energy: the mean as read, or what its dose without a threshold comes to. */
function laeqOf(run: RunRow): number | null {
  if (run.averageDb !== null) return run.averageDb;
  const { dosePct, durationMin, criterionLevelDb } = run;
  if (dosePct === null || dosePct <= 0 || durationMin === null || criterionLevelDb === null)
    return null;
  const law = asLaw({
    criterionLevelDb,
    exchangeRateDb: 3,
    thresholdDb: null,
    weighting: "A",
    response: "none",
  });
  return (
    criterionLevelDb +
    levelFactor(law) * Math.log10((dosePct / 100) * (law.referenceMin / durationMin))
  );
}

type Unplaced = Omit<SurveySample, "position" | "notCounted"> & {
  surveyId: string;
  isOut: boolean;
};

const fromRun = (run: RunRow): Unplaced => {
  const {
    kind,
    class: meterClass,
    criterionLevelDb: _,
    averageDb: __,
    dosePct: ___,
    ...facts
  } = run;
  return {
    ...facts,
    fromS: null,
    toS: null,
    laeqDb: laeqOf(run),
    instrument: instrumentClass(kind, meterClass),
  };
};

/** Brackets of time histories, each a sample of its task over its own time. */
async function fromBrackets(runs: readonly RunRow[]): Promise<Unplaced[]> {
  const worn = runs.filter(({ taskId, isOut }) => taskId === null && !isOut);
  if (worn.length === 0) return [];
  const histories = await rows<HistoryRow>(
    `SELECT h.id, h.run_id AS "runId", h.interval_ms AS "intervalMs", h.values_count AS "valuesCount", h.channels, v.stretches
     FROM time_histories h JOIN time_history_revisions v ON v.id = h.current_revision_id
     WHERE h.run_id = ANY ($1::uuid[]) AND NOT h.is_void AND v.stretches @> '[{"kind": "task"}]'`,
    [worn.map(({ runId }) => runId)],
  );
  if (histories.length === 0) return [];
  const chunks = await rows<StoredChunk & { historyId: string }>(
    `SELECT history_id AS "historyId", channel, position, values_count AS "valuesCount", packed FROM time_history_chunks
     WHERE history_id = ANY ($1::uuid[])`,
    [histories.map(({ id }) => id)],
  );
  const chunksOf = groupBy(chunks, ({ historyId }) => historyId);
  const runOf = new Map(worn.map((run) => [run.runId, run]));
  return histories.flatMap((history) => {
    const { id, runId, intervalMs, valuesCount, channels, stretches } = history;
    const levels = levelsFromChunks(chunksOf.get(id) ?? [], {
      channels,
      fromIndex: 0,
      toIndex: valuesCount,
    });
    const { stretches: parts } = evaluateHistory(
      levels,
      intervalMs / 1000,
      toStretches(stretches, history),
      [],
    );
    const run = fromRun(runOf.get(runId)!);
    return stretches.flatMap((stretch, index): Unplaced[] => {
      const part = parts[index];
      if (stretch.kind !== "task" || !part) return [];
      const peak = part.peaks.find(({ weighting }) => weighting === "C") ?? part.peaks[0];
      return [
        {
          ...run,
          fromS: stretch.fromS,
          toS: stretch.toS,
          taskId: stretch.taskId,
          durationMin: part.durationS / 60,
          laeqDb: part.laeq?.bound === "exact" ? part.laeq.levelDb : null,
          lceqDb: part.lceq?.levelDb ?? null,
          lasMaxDb: part.maxSlow?.bound === "exact" ? part.maxSlow.levelDb : null,
          peakDb: peak?.levelDb ?? null,
          peakWeighting: peak?.weighting ?? null,
          octaveBandsDb: null,
        },
      ];
    });
  });
}

/** Which target a sample speaks for. By job every sample is one of the job; a full day is a run on a worker. */
function positionOf(
  { taskId, workerId }: Unplaced,
  strategy: SurveyStrategy,
  targets: readonly Target[],
): number | null {
  if (strategy === "full-day" && (taskId !== null || workerId === null)) return null;
  const target = targets.find((one) => strategy !== "task" || one.taskId === taskId);
  return target?.position ?? null;
}

export interface SurveyHead {
  id: string;
  strategy: SurveyStrategy;
  targets: readonly Target[];
}

/** The samples of these surveys: taken by hand, come back from a worker, or bracketed under a time history. */
export async function samplesOfSurveys(
  surveys: readonly SurveyHead[],
): Promise<Map<string, SurveySample[]>> {
  if (surveys.length === 0) return new Map();
  const surveyOf = new Map(surveys.map((survey) => [survey.id, survey]));
  const runs = await runsOfSurveys([...surveyOf.keys()]);
  const byTask = (surveyId: string) => surveyOf.get(surveyId)?.strategy === "task";
  const brackets = await fromBrackets(runs.filter(({ surveyId }) => byTask(surveyId)));
  const bracketed = new Set(brackets.map(({ runId }) => runId));
  const all = [...runs.filter(({ runId }) => !bracketed.has(runId)).map(fromRun), ...brackets].map(
    (sample): SurveySample & { surveyId: string } => {
      const { strategy, targets } = surveyOf.get(sample.surveyId)!;
      const { isOut, ...facts } = sample;
      const position = positionOf(sample, strategy, targets);
      const notCounted = isOut
        ? "still-out"
        : position === null
          ? "of-no-target"
          : sample.doubts.length > 0 && sample.keptReason === null
            ? "refused"
            : sample.laeqDb === null
              ? "no-laeq"
              : null;
      return { ...facts, position, notCounted };
    },
  );
  const grouped = groupBy(all, ({ surveyId }) => surveyId);
  return new Map(
    [...grouped].map(([id, samples]) => [id, samples.map(({ surveyId: _, ...sample }) => sample)]),
  );
}

/** The mean by energy of what the samples have; null where none has it. */
const energyMeanOf = (levels: readonly (number | null)[]): number | null => {
  const known = levels.filter((levelDb) => levelDb !== null);
  return known.length === 0 ? null : energyMeanDb(known);
};

function bandsOf(samples: readonly SurveySample[]): TargetResult["octaveBandsDb"] {
  const spectra = samples.flatMap(({ octaveBandsDb }) => (octaveBandsDb ? [octaveBandsDb] : []));
  if (spectra.length === 0) return null;
  const band = (index: number) => energyMeanOf(spectra.map((spectrum) => spectrum[index]!));
  // 63 Hz may be missing in one of them: then the mean has none.
  const lowest = spectra.some(([first]) => first === null) ? null : band(0);
  const rest = [1, 2, 3, 4, 5, 6, 7].map((index) => band(index)!);
  return OctaveBands.parse([lowest, ...rest]) as TargetResult["octaveBandsDb"];
}

function planOf(
  strategy: SurveyStrategy,
  { nominalMin, samplesCount, pattern, cycleMin }: Target,
  samplesDb: readonly number[],
  groupSize: number,
): SamplingPlan {
  if (strategy === "task")
    return planTaskSampling({
      durationMin: nominalMin,
      pattern,
      cycleMin,
      samplesDb,
    });
  return strategy === "job"
    ? planJobSampling({
        groupSize: Math.max(1, groupSize),
        shiftMin: nominalMin,
        samplesDb,
        sampleCount: Math.max(5, samplesCount),
      })
    : planFullDaySampling({ shiftMin: nominalMin, samplesDb });
}

/** What the samples of a target come to, and what the standard asks for next. */
export function resultOf(
  strategy: SurveyStrategy,
  target: Target,
  samples: readonly SurveySample[],
  groupSize: number,
): TargetResult {
  const counted = samples.filter(
    ({ position, notCounted }) => position === target.position && notCounted === null,
  );
  const samplesDb = counted.map(({ laeqDb }) => laeqDb!);
  const plan = planOf(strategy, target, samplesDb, groupSize);
  const wantedCount = Math.max(target.samplesCount, plan.sampleCount);
  const missingCount = Math.max(0, wantedCount - samplesDb.length);
  const scatterDb =
    strategy !== "task" && samplesDb.length >= 3 ? jobSamplingUncertaintyDb(samplesDb) : null;
  const isScattered = scatterDb !== null && scatterDb > LARGE_SCATTER_DB;
  const isSpread = plan.reasons.some(({ code }) => code === "large-spread");
  const withLc = counted.filter(({ lceqDb }) => lceqDb !== null);
  const lc = energyMeanOf(withLc.map(({ lceqDb }) => lceqDb));
  const la = energyMeanOf(withLc.map(({ laeqDb }) => laeqDb));
  const peaks = counted.filter(({ peakDb }) => peakDb !== null);
  // Peaks under different weightings can't be compared: those under C count, where there are any.
  const weighting = peaks.some(({ peakWeighting }) => peakWeighting === "C")
    ? "C"
    : (peaks[0]?.peakWeighting ?? null);
  const ofWeighting = peaks.filter(({ peakWeighting }) => peakWeighting === weighting);
  const lasMax = counted.flatMap(({ lasMaxDb }) => (lasMaxDb === null ? [] : [lasMaxDb]));
  const [worst] = counted
    .map(({ instrument }) => instrument)
    .sort((a, b) => INSTRUMENT_DB[b] - INSTRUMENT_DB[a]);
  return {
    position: target.position,
    taskId: target.taskId,
    taskName: target.taskName,
    samplesCount: samplesDb.length,
    wantedCount,
    levelDb: samplesDb.length === 0 ? null : energyMeanDb(samplesDb),
    rangeDb: spreadDb(samplesDb),
    scatterDb,
    missingCount,
    asksFor: isScattered
      ? "plan-anew"
      : missingCount === 0
        ? null
        : isSpread
          ? "large-spread"
          : "more-samples",
    lcMinusLaDb: lc === null || la === null ? null : lc - la,
    octaveBandsDb: bandsOf(counted),
    lasMaxDb: lasMax.length === 0 ? null : Math.max(...lasMax),
    peakDb: ofWeighting.length === 0 ? null : Math.max(...ofWeighting.map(({ peakDb }) => peakDb!)),
    peakWeighting: ofWeighting.length === 0 ? null : weighting,
    instrument: worst ?? null,
    keptReasons: [
      ...new Set(counted.flatMap(({ keptReason }) => (keptReason === null ? [] : [keptReason]))),
    ],
  };
}
