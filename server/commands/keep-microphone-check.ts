import type { Ear, EarBands, FitFacts, FitTestChange } from "../../shared/schemas/fit";
import {
  type CheckAnalysis,
  type CheckKeep,
  isKeepable,
} from "../../shared/schemas/microphone-check";
import { recordAudit } from "../lib/audit";
import { execute, row } from "../lib/db";
import { AppError, issue, notFound, unprocessable } from "../lib/errors";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { FitTest, type MicrophoneCheck } from "../models/fit";
import type { Worker } from "../models/worker";
import { fitPolicy } from "../policies";
import { rulesOn } from "../queries/site-settings";
import { workerNoise } from "../queries/worker-noise";
import { correctFitTest, recordFitTest } from "./record-fit-test";

const METHOD = "two-microphones";

/**
 * A check that gave a personal attenuation becomes a fit test of its own, or the other ear of one of the same day. One
 * that only says whether the active part does its work does so too, without a trial: nothing is rated by it. Where no
 * need is stated, the rating is held against what the worker's noise asks for. Check and
 * worker are locked. Returns the fit test's id.
 *
 * @throws AppError wrong-state where it is not analysed or gave neither; invalid, not-found.
 */
export async function keepMicrophoneCheck(
  actor: Actor,
  check: MicrophoneCheck,
  worker: Worker,
  keep: CheckKeep,
): Promise<string> {
  const { analysis, state } = check;
  if (state !== "analysed" || !analysis || !isKeepable(analysis))
    throw new AppError("wrong-state", 409);
  const fitTestId =
    keep.joinFitTestId === null
      ? await keepAlone(actor, check, worker, analysis, keep)
      : await join(actor, check, worker, analysis, keep, keep.joinFitTestId);
  await execute(
    "UPDATE microphone_checks SET state = 'kept', fit_test_id = $2, updated_at = now(), revision = revision + 1 WHERE id = $1",
    [check.id, fitTestId],
  );
  await recordAudit(actor, {
    action: "keep-microphone-check",
    subjectKind: "microphone-check",
    subjectId: check.id,
    values: { workerId: check.workerId, fitTestId, ...keep },
  });
  return fitTestId;
}

async function keepAlone(
  actor: Actor,
  { modelId, ear, siteId }: MicrophoneCheck,
  worker: Worker,
  analysis: CheckAnalysis,
  { testedOn, size, needDb }: CheckKeep,
): Promise<string> {
  const site = await row<Pick<FitTestChange, "confidencePct">>(
    `SELECT fit_confidence_pct AS "confidencePct" FROM sites WHERE id = :siteId`,
    { siteId },
  );
  if (!site) throw notFound();
  const facts = withEar(null, ear, analysis);
  const { id } = await recordFitTest(
    actor,
    worker,
    {
      modelId,
      testedOn,
      method: METHOD,
      size,
      facts,
      ...site,
      // Without a rating there is nothing to hold against it.
      needDb: analysis.parDb === null ? null : (needDb ?? (await needOf(worker, testedOn))),
      note: "",
    },
    analysis.active?.hasPassed ?? null,
  );
  return id;
}

/** What the noise asked for on that day, as at the fitting desk, dB; null: it isn't known, or the site had no rules yet. */
const needOf = async (worker: Worker, date: string): Promise<number | null> =>
  (await rulesOn(worker.siteId, date)) ? (await workerNoise(worker, date)).need.needDb : null;

interface Kept extends Omit<FitTestChange, "reason"> {
  activePassed: boolean | null;
}

/** A new revision of the other ear's test. Its size, confidence, and the need that it states stay. */
async function join(
  actor: Actor,
  { ear, modelId }: MicrophoneCheck,
  worker: Worker,
  analysis: CheckAnalysis,
  { testedOn }: CheckKeep,
  fitTestId: string,
): Promise<string> {
  const test = await findVisible(FitTest, fitPolicy, fitTestId, actor, { lock: true });
  authorize(fitPolicy, actor, "change", test);
  const kept = await row<Kept>(
    `SELECT v.method, v.size, v.facts, v.confidence_pct AS "confidencePct", v.need_db AS "needDb", v.note, v.active_passed AS "activePassed"
     FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id WHERE f.id = :id`,
    { id: test.id },
  );
  if (!kept) throw notFound();
  const { activePassed, ...statement } = kept;
  const isOther =
    test.workerId === worker.id &&
    test.modelId === modelId &&
    test.testedOn === testedOn &&
    !test.isVoid &&
    statement.method === METHOD &&
    isEarOpen(statement.facts, ear) &&
    isRated(statement.facts) === (analysis.parDb !== null);
  if (!isOther) throw unprocessable([issue(["joinFitTestId"], "not-the-other-ear")]);
  const needDb =
    statement.needDb ?? (analysis.parDb === null ? null : await needOf(worker, testedOn));
  await correctFitTest(
    actor,
    test,
    { ...statement, needDb, facts: withEar(statement.facts, ear, analysis), reason: "other-ear" },
    bothEars(activePassed, analysis.active?.hasPassed ?? null),
  );
  return test.id;
}

/** Nothing is on record of this ear, neither rated nor checked. */
const isEarOpen = ({ leftDb, rightDb, bands }: FitFacts, ear: Ear) =>
  (ear === "left" ? leftDb : rightDb).length === 0 && (bands?.[ear] ?? null) === null;

const isRated = ({ leftDb, rightDb }: FitFacts) => leftDb.length + rightDb.length > 0;

/** One ear that failed fails the check; it is passed where both were checked and passed. */
function bothEars(one: boolean | null, other: boolean | null): boolean | null {
  if (one === false || other === false) return false;
  return one === null || other === null ? null : true;
}

/** What was found, laid beside what is known of the other ear. */
function withEar(
  earlier: FitFacts | null,
  ear: Ear,
  { parDb, ear: bands, methodSdDb }: CheckAnalysis,
): FitFacts {
  const trials = parDb === null ? [] : [parDb];
  const own = (side: Ear, given: number[]) => (side === ear ? trials : given);
  const bandsOf = (side: Ear): EarBands | null =>
    side === ear ? bands : (earlier?.bands?.[side] ?? null);
  return {
    leftDb: own("left", earlier?.leftDb ?? []),
    rightDb: own("right", earlier?.rightDb ?? []),
    // The larger of the two: the trials share one figure.
    methodSdDb: Math.max(methodSdDb, earlier?.methodSdDb ?? 0),
    bands: { left: bandsOf("left"), right: bandsOf("right") },
  };
}
