import type { AreaInput } from "../../shared/schemas/site";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import { Area } from "../models/site";

export async function createArea(actor: Actor, input: AreaInput): Promise<Area> {
  const area = await Area.create({ organizationId: actor.organizationId, ...input });
  await recordAudit(actor, {
    action: "create-area",
    subjectKind: "area",
    subjectId: area.id,
    values: input,
  });
  return area;
}
