import type { InstrumentView } from "../../shared/schemas/run";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { programmePolicy } from "../policies";
import { FAILED_ON } from "./calibrations";

export type InstrumentRow = Omit<InstrumentView, "can">;

export async function listInstruments(
  actor: Actor,
  { id = null, siteId = null }: { id?: string | null; siteId?: string | null },
): Promise<InstrumentRow[]> {
  return rows<InstrumentRow>(
    `SELECT i.id, i.site_id AS "siteId", i.kind, i.class, i.serial_number AS "serialNumber", i.name,
       i.calibration_due_on::text AS "calibrationDueOn", ${FAILED_ON("i.id")} AS "calibrationFailedOn", i.presets, i.is_archived AS "isArchived", i.revision
     FROM instruments i WHERE ${visible(programmePolicy, actor, "i")}
       AND (CAST(:id AS uuid) IS NULL OR i.id = :id) AND (CAST(:siteId AS uuid) IS NULL OR i.site_id = :siteId)
     ORDER BY i.is_archived, i.name, i.serial_number`,
    { id, siteId },
  );
}
