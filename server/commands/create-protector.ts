import type { z } from "zod";
import type { NewProtectorInput } from "../../shared/schemas/protector";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import { ProtectorModel } from "../models/protector";
import { addProtectorRevision } from "./add-protector-revision";

export async function createProtector(
  actor: Actor,
  input: z.infer<typeof NewProtectorInput>,
): Promise<ProtectorModel> {
  const { data, ...facts } = input;
  const model = await ProtectorModel.create({ organizationId: actor.organizationId, ...facts });
  await recordAudit(actor, {
    action: "create-protector",
    subjectKind: "protector",
    subjectId: model.id,
    values: facts,
  });
  await addProtectorRevision(actor, model, data, ["data"]);
  return model;
}
