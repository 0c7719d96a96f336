import type { z } from "zod";
import type {
  WorkplaceChangeFilter,
  WorkplaceChangePage,
  WorkplaceChangeView,
} from "../../shared/schemas/workplace-change";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { surveyPolicy } from "../policies";

type Found = Omit<WorkplaceChangeView, "can" | "createdAt"> & { createdAt: Date };

const SELECT_CHANGES = `SELECT c.id, c.site_id AS "siteId", c.area_id AS "areaId", c.task_id AS "taskId", c.job_id AS "jobId",
    coalesce(a.name, t.name, j.name) AS "subjectName", c.kind, c.happened_on::text AS "happenedOn", c.what,
    c.struck_reason AS "struckReason", u.name AS "authorName", c.created_at AS "createdAt", c.revision
  FROM workplace_changes c LEFT JOIN areas a ON a.id = c.area_id LEFT JOIN tasks t ON t.id = c.task_id
  LEFT JOIN jobs j ON j.id = c.job_id LEFT JOIN users u ON u.id = c.author_id`;

const present = (actor: Actor, { createdAt, ...change }: Found): WorkplaceChangeView => ({
  ...change,
  createdAt: createdAt.toISOString(),
  can: { change: abilities(surveyPolicy, actor, change).change },
});

export async function listWorkplaceChanges(
  actor: Actor,
  filter: z.output<typeof WorkplaceChangeFilter>,
): Promise<z.input<typeof WorkplaceChangePage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const conditions = [visible(surveyPolicy, actor, "c")];
  if (filter.siteId) conditions.push("c.site_id = :siteId");
  if (cursor)
    conditions.push("(c.happened_on, c.id) < (CAST(:beforeDate AS date), CAST(:beforeId AS uuid))");
  const found = await rows<Found>(
    `${SELECT_CHANGES} WHERE ${conditions.join(" AND ")} ORDER BY c.happened_on DESC, c.id DESC LIMIT :limit`,
    {
      siteId: filter.siteId,
      beforeDate: cursor?.[0] ?? null,
      beforeId: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(
    found.map((one) => present(actor, one)),
    filter.limit,
    ({ happenedOn, id }) => [happenedOn, id],
  );
}

export async function workplaceChangeView(actor: Actor, id: string): Promise<WorkplaceChangeView> {
  return present(actor, only(await rows<Found>(`${SELECT_CHANGES} WHERE c.id = :id`, { id })));
}
