import type { MeasureInput } from "../../shared/schemas/follow-up";
import { recordAudit } from "../lib/audit";
import { rows } from "../lib/db";
import type { Actor } from "../lib/policy";
import type { Finding } from "../models/finding";
import { checkMeasure } from "./check-measure";

/** A measure under one of the five kinds of control, planned or done; gives its id. */
export async function recordMeasure(
  actor: Actor,
  finding: Finding,
  input: MeasureInput,
): Promise<string> {
  await checkMeasure(finding, input);
  const [created] = await rows<{ id: string }>(
    `INSERT INTO finding_measures (organization_id, finding_id, control, what, owner_id, planned_on, done_on, author_id)
     VALUES (:organizationId, :findingId, :control, :what, :ownerId, :plannedOn, :doneOn, :authorId) RETURNING id`,
    {
      organizationId: actor.organizationId,
      findingId: finding.id,
      ...input,
      authorId: actor.userId,
    },
  );
  if (!created) throw new Error("a measure just stored has an id");
  await recordAudit(actor, {
    action: "record-measure",
    subjectKind: "finding",
    subjectId: finding.id,
    values: { measureId: created.id, ...input },
  });
  return created.id;
}
