import type { AreaInput } from "../../shared/schemas/site";
import { recordAudit } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { changesBetween, isUnchanged } from "../lib/changes";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Area, Site } from "../models/site";
import { markDaysStale } from "./mark-days-stale";

/** A new zone holds from the site's today on: what was judged before keeps the zone of its day. */
export async function changeArea(
  actor: Actor,
  area: Area,
  site: Site,
  input: AreaInput,
): Promise<void> {
  if (input.siteId !== area.siteId) throw unprocessable([issue(["siteId"], "site-fixed")]);
  const changes = changesBetween(area, input);
  if (isUnchanged(changes)) return;
  await area.update({ ...input, revision: area.revision + 1 });
  await recordAudit(actor, {
    action: "change-area",
    subjectKind: "area",
    subjectId: area.id,
    values: changes,
  });
  if (changes.zone) {
    await markDaysStale(actor.organizationId, {
      areaId: area.id,
      fromDate: todayAt(site.timeZone),
    });
  }
}
