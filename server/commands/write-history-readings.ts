import type { HistoryEvaluation } from "../../shared/acoustics/history";
import type { ReadingFacts } from "../../shared/schemas/evaluation";
import type { RunInput, StoredReading } from "../../shared/schemas/run";
import { historyReadings } from "../histories/history-readings";
import type { StoredLeftOut } from "../histories/left-out";
import { execute, rows } from "../lib/db";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import { insertRunRevision, type RunRevisionFacts } from "./record-run";

/** A run's present revision whole, as what its next one starts from. */
interface Present {
  number: number;
  durationMin: number | null;
  checkBeforeDb: number | null;
  checkAfterDb: number | null;
  covers: RunInput["covers"];
  keptReason: string | null;
  unusual: string | null;
  doubts: string[];
  outAt: string | null;
  backAt: string | null;
  readings: StoredReading[];
}

export async function presentRevision(runId: string): Promise<Present> {
  return only(
    await rows<Present>(
      `SELECT r.revision AS number, v.duration_min AS "durationMin", v.check_before_db AS "checkBeforeDb", v.check_after_db AS "checkAfterDb", v.covers,
         v.kept_reason AS "keptReason", v.unusual, v.doubts, ${isoInstant("v.out_at")} AS "outAt", ${isoInstant("v.back_at")} AS "backAt",
         coalesce((SELECT json_agg(json_build_object(
           'settings', json_build_object('criterionLevelDb', g.criterion_level_db, 'exchangeRateDb', g.exchange_rate_db, 'thresholdDb', g.threshold_db,
             'weighting', g.weighting, 'response', g.response),
           'dosePct', g.dose_pct, 'averageDb', g.average_db, 'lceqDb', g.lceq_db, 'lasMaxDb', g.las_max_db,
           'peak', CASE WHEN g.peak_db IS NOT NULL THEN json_build_object('levelDb', g.peak_db, 'weighting', g.peak_weighting) END,
           'octaveBandsDb', g.octave_bands_db, 'source', g.source) ORDER BY g.position)
           FROM readings g WHERE g.run_revision_id = v.id), '[]') AS readings
       FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id WHERE r.id = :runId`,
      { runId },
    ),
  );
}

const isUnder = (settings: ReadingFacts["settings"], other: ReadingFacts["settings"]) =>
  settings.criterionLevelDb === other.criterionLevelDb &&
  settings.exchangeRateDb === other.exchangeRateDb &&
  settings.thresholdDb === other.thresholdDb &&
  settings.weighting === other.weighting;

/** As many readings as a run may have. */
const MOST_READINGS = 12;

interface Change {
  reason: string;
  entryId: string;
  /** What is left out of the history by now. */
  leftOut: StoredLeftOut | null;
  /** Facts of the revision that change with the readings. */
  facts?: Partial<Pick<RunRevisionFacts, "covers" | "keptReason" | "doubts">>;
}

/**
 * The next revision of a run, with what its history gives in place of what it gave before. What the instrument itself
 * showed under other settings stays; under the same ones the history is the better evidence, for it can leave a part out.
 */
export async function writeHistoryReadings(
  actor: Pick<Actor, "organizationId" | "userId">,
  runId: string,
  evaluation: Pick<HistoryEvaluation, "counted">,
  settings: readonly ReadingFacts["settings"][],
  { reason, entryId, leftOut, facts = {} }: Change,
): Promise<void> {
  const present = await presentRevision(runId);
  const fresh = historyReadings(evaluation, settings).map((reading) => ({
    ...reading,
    octaveBandsDb: null,
    source: "history" as const,
  }));
  const kept = present.readings.filter(
    ({ source, settings: own }) =>
      source !== "history" && !fresh.some((reading) => isUnder(reading.settings, own)),
  );
  const { number, ...before } = present;
  const revisionId = await insertRunRevision(
    actor,
    runId,
    number + 1,
    {
      ...before,
      // Doses count over what is counted; only where the instrument's own figures stand beside them is its time theirs.
      durationMin: kept.length > 0 ? before.durationMin : evaluation.counted.durationS / 60,
      ...facts,
      leftOut,
      readings: [...fresh, ...kept].slice(0, MOST_READINGS),
    },
    { reason, entryId },
  );
  await execute("UPDATE runs SET revision = $2, current_revision_id = $3 WHERE id = $1", [
    runId,
    number + 1,
    revisionId,
  ]);
}
