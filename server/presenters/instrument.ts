import type { InstrumentView } from "../../shared/schemas/run";
import { type Actor, abilities } from "../lib/policy";
import { programmePolicy } from "../policies";
import type { InstrumentRow } from "../queries/instruments";

export function presentInstrument(actor: Actor, row: InstrumentRow): InstrumentView {
  return {
    id: row.id,
    siteId: row.siteId,
    kind: row.kind,
    class: row.class,
    serialNumber: row.serialNumber,
    name: row.name,
    calibrationDueOn: row.calibrationDueOn,
    calibrationFailedOn: row.calibrationFailedOn,
    presets: row.presets,
    isArchived: row.isArchived,
    revision: row.revision,
    can: abilities(programmePolicy, actor, row),
  };
}
