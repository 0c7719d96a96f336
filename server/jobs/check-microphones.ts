import type {
  CheckCalibration,
  CheckPart,
  MicrophoneCheckView,
} from "../../shared/schemas/microphone-check";
import { dropCheckAudio, storeAnalysis } from "../commands/store-check-analysis";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row } from "../lib/db";
import { fileStore } from "../lib/file-store";
import type { JobPayloads } from "../lib/jobs";
import { runWorker } from "../lib/run-worker";
import { statedActivePart } from "../queries/microphone-checks";
import { type CheckBasis, judgeCheck, measuredPart } from "../recordings/judge-check";
import type { PairReply, PairTask } from "../recordings/pair-job";
import { type Watch, whileBeating } from "./job-beat";

interface Ordered extends Omit<CheckBasis, "active"> {
  id: string;
  revision: number;
  workerId: string;
  modelId: string;
  parts: CheckPart[];
  /** Content of the files, by position, hex. */
  sha256s: string[];
}
type Failure = NonNullable<MicrophoneCheckView["failure"]>;

/** A check that ended a process so often is given up. */
const MOST_TRIES = 3;

/** Takes the check up, or says that there is nothing to do any more. */
async function claim(organizationId: string, checkId: string): Promise<Ordered | null> {
  const found = await row<Ordered & { tries: number }>(
    `SELECT c.id, c.revision, c.tries, c.worker_id AS "workerId", c.model_id AS "modelId", c.parts, c.calibration, c.correction, c.spectrum,
       ARRAY(SELECT encode(f.sha256, 'hex') FROM microphone_check_files k JOIN files f ON f.id = k.file_id WHERE k.check_id = c.id ORDER BY k.position) AS "sha256s"
     FROM microphone_checks c WHERE c.id = :checkId AND c.state = 'analysing' FOR UPDATE`,
    { checkId },
  );
  if (!found) return null;
  if (found.tries >= MOST_TRIES) {
    await refuse(organizationId, found, { code: "check-given-up", params: {} });
    return null;
  }
  await execute(
    "UPDATE microphone_checks SET tries = tries + 1, updated_at = now() WHERE id = $1",
    [checkId],
  );
  return found;
}

/**
 * Analyses the recordings of a two-microphone check. What comes of them is kept and the audio goes, as it does where they
 * can't be used. A retry begins anew and ends as the first would have; what was cancelled meanwhile ends without a trace.
 */
export async function checkMicrophones({
  organizationId,
  checkId,
}: JobPayloads["check-microphones"]): Promise<void> {
  const ordered = await inTransaction({ organizationId }, () => claim(organizationId, checkId));
  if (!ordered) return;
  await whileBeating(
    async (progressPct) => {
      const count = await inTransaction({ organizationId }, () =>
        execute(
          `UPDATE microphone_checks SET progress_pct = greatest(progress_pct, $3), updated_at = now() WHERE id = $1 AND state = 'analysing' AND revision = $2`,
          [checkId, ordered.revision, progressPct],
        ),
      );
      return count > 0;
    },
    (watch) => analyse(organizationId, ordered, watch),
  );
}

async function analyse(organizationId: string, ordered: Ordered, watch: Watch): Promise<void> {
  const task: PairTask = {
    paths: ordered.sha256s.map((sha256) => fileStore().pathOf(organizationId, sha256)),
    parts: ordered.parts,
    ...sensitivities(ordered.calibration),
  };
  const reply = await runWorker<PairReply>("pair-worker", task, watch);
  await inTransaction({ organizationId }, async () => {
    if (!(await stillOrdered(ordered))) return;
    if ("refused" in reply) {
      const { code, params } = reply.refused;
      await refuse(organizationId, ordered, { code, params: { ...params } });
      return;
    }
    const { calibration, correction, spectrum, parts } = ordered;
    const active = await statedActivePart(ordered.modelId);
    const measured = reply.readings.map((reading, index) =>
      measuredPart(parts[index]!.active, reading),
    );
    const analysis = judgeCheck(
      measured,
      { calibration, correction, spectrum, active },
      reply.warnings,
    );
    await storeAnalysis(ordered.id, analysis);
    await dropCheckAudio(organizationId, ordered.id);
    await recordAudit(
      { organizationId },
      {
        action: "analyse-microphone-check",
        subjectKind: "microphone-check",
        subjectId: ordered.id,
        values: { workerId: ordered.workerId, parDb: analysis.parDb, warnings: analysis.warnings },
      },
    );
  });
}

/** The row, locked, if the order is still the one that was taken up. */
const stillOrdered = ({ id, revision }: Ordered) =>
  row(
    `SELECT id FROM microphone_checks WHERE id = :id AND state = 'analysing' AND revision = :revision FOR UPDATE`,
    { id, revision },
  );

function sensitivities(calibration: CheckCalibration): Pick<PairTask, "outsidePa" | "insidePa"> {
  if (calibration.kind !== "sensitivity" && calibration.kind !== "tone")
    return { outsidePa: null, insidePa: null };
  const { outsidePa, insidePa } = calibration;
  return { outsidePa, insidePa };
}

/** It can't be used, and its audio goes. */
async function refuse(
  organizationId: string,
  { id, workerId }: Pick<Ordered, "id" | "workerId">,
  failure: Failure,
): Promise<void> {
  await execute(
    `UPDATE microphone_checks SET state = 'failed', failure = $2::jsonb, updated_at = now(), revision = revision + 1 WHERE id = $1`,
    [id, JSON.stringify(failure)],
  );
  await dropCheckAudio(organizationId, id);
  await recordAudit(
    { organizationId },
    {
      action: "refuse-microphone-check",
      subjectKind: "microphone-check",
      subjectId: id,
      values: { workerId, ...failure },
    },
  );
}
