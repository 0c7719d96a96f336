import { type Actor, abilities } from "../lib/policy";
import { programmePolicy } from "../policies";
import type { AreaRow } from "../queries/areas";

export function presentArea(actor: Actor, row: AreaRow) {
  return {
    id: row.id,
    siteId: row.siteId,
    name: row.name,
    zone: row.zone,
    isArchived: row.isArchived,
    revision: row.revision,
    can: abilities(programmePolicy, actor, row),
  };
}
