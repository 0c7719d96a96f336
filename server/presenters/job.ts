import { type Actor, abilities } from "../lib/policy";
import { programmePolicy } from "../policies";
import type { JobRow } from "../queries/jobs";

export function presentJob(actor: Actor, row: JobRow) {
  return {
    id: row.id,
    siteId: row.siteId,
    name: row.name,
    isArchived: row.isArchived,
    tasks: row.tasks,
    workersCount: row.workersCount,
    revision: row.revision,
    can: abilities(programmePolicy, actor, row),
  };
}
