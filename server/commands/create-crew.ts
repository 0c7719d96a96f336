import type { CrewInput } from "../../shared/schemas/crew";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import { Crew } from "../models/worker";

export async function createCrew(actor: Actor, input: CrewInput): Promise<Crew> {
  const crew = await Crew.create({ organizationId: actor.organizationId, ...input });
  await recordAudit(actor, {
    action: "create-crew",
    subjectKind: "crew",
    subjectId: crew.id,
    values: input,
  });
  return crew;
}
