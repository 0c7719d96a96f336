import { randomUUID } from "node:crypto";
import type { WarningSignalInput } from "../../shared/schemas/warning-signal";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { type Actor, findVisible } from "../lib/policy";
import type { WarningSignal } from "../models/shop-floor";
import { Area } from "../models/site";
import { programmePolicy } from "../policies";

async function checkArea(actor: Actor, { areaId, siteId }: WarningSignalInput): Promise<void> {
  if (areaId === null) return;
  const area = await findVisible(Area, programmePolicy, areaId, actor);
  if (area.siteId !== siteId) throw unprocessable([issue(["areaId"], "area-of-other-site")]);
}

/** A new signal of a site. @throws AppError not-found, invalid (also where the name is taken). */
export async function createWarningSignal(
  actor: Actor,
  input: WarningSignalInput,
): Promise<string> {
  await checkArea(actor, input);
  const id = randomUUID();
  await execute(
    `INSERT INTO warning_signals (id, organization_id, site_id, area_id, name, meaning, octave_bands_db, is_archived)
     VALUES ($1, $2, $3, $4, $5, $6, $7::float8[], $8)`,
    [id, actor.organizationId, ...columnsOf(input)],
  );
  await recordAudit(actor, {
    action: "create-warning-signal",
    subjectKind: "warning-signal",
    subjectId: id,
    values: { ...input },
  });
  return id;
}

/** The signal as it is from now on; its row is locked. */
export async function changeWarningSignal(
  actor: Actor,
  signal: WarningSignal,
  input: WarningSignalInput,
): Promise<void> {
  if (input.siteId !== signal.siteId) throw unprocessable([issue(["siteId"], "site-fixed")]);
  await checkArea(actor, input);
  await execute(
    `UPDATE warning_signals SET site_id = $2, area_id = $3, name = $4, meaning = $5, octave_bands_db = $6::float8[], is_archived = $7, revision = revision + 1
     WHERE id = $1`,
    [signal.id, ...columnsOf(input)],
  );
  await recordAudit(actor, {
    action: "change-warning-signal",
    subjectKind: "warning-signal",
    subjectId: signal.id,
    values: { ...input },
  });
}

const columnsOf = (input: WarningSignalInput) => [
  input.siteId,
  input.areaId,
  input.name,
  input.meaning,
  input.octaveBandsDb,
  input.isArchived,
];
