import type { z } from "zod";
import type { ProtectorInput } from "../../shared/schemas/protector";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import { row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { ProtectorModel } from "../models/protector";

/** Name and archive. The kind decides a derating by type, so that it stays once somebody has worn the model. */
export async function changeProtector(
  actor: Actor,
  model: ProtectorModel,
  input: z.infer<typeof ProtectorInput>,
): Promise<void> {
  const changes = changesBetween(model, input);
  if (isUnchanged(changes)) return;
  if (changes.kind) {
    const worn = await row(
      "SELECT 1 AS one FROM assignments WHERE :id IN (inner_model_id, outer_model_id) LIMIT 1",
      { id: model.id },
    );
    if (worn) throw unprocessable([issue(["kind"], "kind-fixed")]);
  }
  await model.update({ ...input, revision: model.revision + 1 });
  await recordAudit(actor, {
    action: "change-protector",
    subjectKind: "protector",
    subjectId: model.id,
    values: changes,
  });
}
