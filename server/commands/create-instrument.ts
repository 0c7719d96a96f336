import type { InstrumentInput } from "../../shared/schemas/run";
import { recordAudit } from "../lib/audit";
import { dateIssues } from "../lib/calendar";
import { unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { Instrument } from "../models/instrument";

/** @throws AppError invalid, where the laboratory calibration is due on a day nobody means. */
export function checkCalibration({ calibrationDueOn }: InstrumentInput): void {
  const issues = dateIssues(["calibrationDueOn"], calibrationDueOn, 3660);
  if (issues.length > 0) throw unprocessable(issues);
}

export async function createInstrument(actor: Actor, input: InstrumentInput): Promise<Instrument> {
  checkCalibration(input);
  const instrument = await Instrument.create({ organizationId: actor.organizationId, ...input });
  await recordAudit(actor, {
    action: "create-instrument",
    subjectKind: "instrument",
    subjectId: instrument.id,
    values: input,
  });
  return instrument;
}
