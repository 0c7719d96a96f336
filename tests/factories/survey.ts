import { randomUUID } from "node:crypto";
import { daysFromToday } from "./days";
import { insert, next, select } from "./insert";
import { buildInstrument, type Instrument } from "./instrument";
import type { Site } from "./site";
import { buildJob } from "./task";

export interface BuiltSurvey {
  id: string;
  jobId: string;
}

interface SurveyOverrides {
  site: Site;
  jobId?: string;
  strategy?: "task" | "job" | "full-day";
  state?: "planned" | "measuring" | "done" | "struck";
  targets?: { taskId: string | null; samplesCount?: number; sampleMin?: number }[];
}

const answer = { answer: null, note: "" };
export const noRiskAnswers = {
  impulse: answer,
  vibration: answer,
  "ototoxic-substances": answer,
  "warning-signals": answer,
};

/** A survey under way, of a job that is made with it unless one is given. */
export async function buildSurvey(overrides: SurveyOverrides): Promise<BuiltSurvey> {
  const { site, strategy = "task", state = "measuring", targets = [] } = overrides;
  const { organizationId, id: siteId } = site;
  const jobId = overrides.jobId ?? (await buildJob({ site })).id;
  const id = await insert("surveys", {
    organizationId,
    siteId,
    jobId,
    name: `Survey ${next()}`,
    strategy,
    state,
    fromDate: daysFromToday(-5),
    toDate: daysFromToday(5),
    drawSeed: "seed",
    riskFactors: JSON.stringify(noRiskAnswers),
  });
  for (const [position, { taskId, samplesCount = 3, sampleMin = 5 }] of targets.entries())
    await insert("survey_targets", {
      organizationId,
      surveyId: id,
      position,
      taskId,
      samplesCount,
      sampleMin,
    });
  return { id, jobId };
}

interface RunOverrides {
  site: Site;
  surveyId?: string;
  taskId?: string;
  workerId?: string;
  instrument?: Instrument;
  date?: string;
  durationMin?: number;
  levelDb?: number;
  lceqDb?: number;
  octaveBandsDb?: number[];
  exchangeRateDb?: number;
  doubts?: string[];
  keptReason?: string;
  covers?: "shift" | "projected" | "part";
}

/** A run that is back, with one reading. Gives its id and its revision's. */
export async function buildRun(
  overrides: RunOverrides,
): Promise<{ id: string; revisionId: string }> {
  const { site, surveyId, taskId, workerId, levelDb = 90, exchangeRateDb = 3 } = overrides;
  const { organizationId, id: siteId } = site;
  const instrument = overrides.instrument ?? (await buildInstrument({ site }));
  const [id, revisionId] = [randomUUID(), randomUUID()];
  await select(
    `WITH v AS (INSERT INTO run_revisions (id, organization_id, run_id, number, duration_min, covers, doubts, kept_reason)
       VALUES ($2, $3, $1, 1, $4, $5, $6, $7) RETURNING id)
     INSERT INTO runs (id, organization_id, site_id, instrument_id, worker_id, task_id, survey_id, date, current_revision_id)
     SELECT $1, $3, $8, $9, $10, $11, $12, $13, id FROM v`,
    [
      id,
      revisionId,
      organizationId,
      overrides.durationMin ?? 10,
      overrides.covers ?? "part",
      overrides.doubts ?? [],
      overrides.keptReason ?? null,
      siteId,
      instrument.id,
      workerId ?? null,
      taskId ?? null,
      surveyId ?? null,
      overrides.date ?? daysFromToday(-1),
    ],
  );
  await insert("readings", {
    organizationId,
    runId: id,
    runRevisionId: revisionId,
    position: 0,
    criterionLevelDb: 85,
    exchangeRateDb,
    thresholdDb: exchangeRateDb === 3 ? null : 80,
    weighting: "A",
    response: "slow",
    averageDb: levelDb,
    lceqDb: overrides.lceqDb,
    octaveBandsDb: overrides.octaveBandsDb,
  });
  return { id, revisionId };
}
