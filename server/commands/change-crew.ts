import type { CrewInput } from "../../shared/schemas/crew";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Crew } from "../models/worker";

export async function changeCrew(actor: Actor, crew: Crew, input: CrewInput): Promise<void> {
  if (input.siteId !== crew.siteId) throw unprocessable([issue(["siteId"], "site-fixed")]);
  // The column is a time with seconds; people mean hours and minutes.
  const before = { ...crew.get(), usualStart: crew.usualStart.slice(0, 5) };
  const changes = changesBetween<CrewInput>(before, input);
  if (isUnchanged(changes)) return;
  await crew.update({ ...input, revision: crew.revision + 1 });
  await recordAudit(actor, {
    action: "change-crew",
    subjectKind: "crew",
    subjectId: crew.id,
    values: changes,
  });
}
