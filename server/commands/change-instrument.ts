import type { InstrumentInput } from "../../shared/schemas/run";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import type { Actor } from "../lib/policy";
import type { Instrument } from "../models/instrument";
import { checkCalibration } from "./create-instrument";

export async function changeInstrument(
  actor: Actor,
  instrument: Instrument,
  input: InstrumentInput,
): Promise<void> {
  checkCalibration(input);
  const changes = changesBetween(instrument, input);
  if (isUnchanged(changes)) return;
  await instrument.update({ ...input, revision: instrument.revision + 1 });
  await recordAudit(actor, {
    action: "change-instrument",
    subjectKind: "instrument",
    subjectId: instrument.id,
    values: changes,
  });
}
