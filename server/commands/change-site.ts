import type { SiteInput } from "../../shared/schemas/site";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import { checkTimeZone } from "./check-site";

/** Name, zone, language and delay. Days already recorded keep the zone they were worked in. */
export async function changeSite(actor: Actor, site: Site, input: SiteInput): Promise<void> {
  await checkTimeZone(input.timeZone);
  const changes = changesBetween(site, input);
  if (isUnchanged(changes)) return;
  await site.update({ ...input, revision: site.revision + 1 });
  await recordAudit(actor, {
    action: "change-site",
    subjectKind: "site",
    subjectId: site.id,
    values: changes,
  });
}
