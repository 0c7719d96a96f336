import { recordAudit } from "../lib/audit";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { MicrophoneCheck } from "../models/fit";
import { statedActivePart } from "../queries/microphone-checks";
import { judgeCheck, swappedParts } from "../recordings/judge-check";
import { storeAnalysis } from "./store-check-analysis";

/** Codes that the analysis itself finds; those of the recordings stay. */
const OF_RECORDINGS = ["lengths-differ", "channel-clipped"] as const;

/**
 * Takes the outside for the inside and the other way round, where the channels were named wrongly. The spectra hold all
 * that is needed, so that nothing has to be recorded again; each channel keeps the sensitivity that was given for it.
 *
 * @throws AppError wrong-state where it is not analysed, or does not look swapped.
 */
export async function swapMicrophoneCheck(actor: Actor, check: MicrophoneCheck): Promise<void> {
  const { analysis, calibration, correction, spectrum, state } = check;
  if (state !== "analysed" || !analysis?.warnings.includes("channels-swapped"))
    throw new AppError("wrong-state", 409);
  const warnings = OF_RECORDINGS.filter((code) => analysis.warnings.includes(code));
  const active = await statedActivePart(check.modelId);
  const parts = swappedParts(analysis.parts);
  await storeAnalysis(
    check.id,
    judgeCheck(parts, { calibration, correction, spectrum, active }, warnings),
  );
  await recordAudit(actor, {
    action: "swap-microphone-check",
    subjectKind: "microphone-check",
    subjectId: check.id,
    values: { workerId: check.workerId },
  });
}
