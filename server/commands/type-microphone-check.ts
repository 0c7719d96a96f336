import type { TypedCheckInput } from "../../shared/schemas/microphone-check";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import type { Worker } from "../models/worker";
import { statedActivePart } from "../queries/microphone-checks";
import { judgeCheck, typedParts } from "../recordings/judge-check";
import { checkBasis, insertCheck } from "./start-microphone-check";
import { storeAnalysis } from "./store-check-analysis";

/**
 * Octave bands off a meter at both microphones, typed in place of recordings: judged at once, without coherence or delay.
 *
 * @throws AppError invalid.
 */
export async function typeMicrophoneCheck(
  actor: Actor,
  worker: Worker,
  { bands, modelId, ear, ...given }: TypedCheckInput,
): Promise<string> {
  const basis = { ...(await checkBasis(given)), calibration: { kind: "typed" as const } };
  const id = await insertCheck(actor, worker, { modelId, ear, parts: [], ...basis });
  const active = await statedActivePart(modelId);
  await storeAnalysis(id, judgeCheck(typedParts(bands), { ...basis, active }));
  await recordAudit(actor, {
    action: "type-microphone-check",
    subjectKind: "microphone-check",
    subjectId: id,
    values: { workerId: worker.id, modelId, ear, ...basis, bands },
  });
  return id;
}
