import type { z } from "zod";
import type { AreaView } from "../../shared/schemas/site";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { programmePolicy } from "../policies";

export type AreaRow = Omit<z.infer<typeof AreaView>, "can">;

export async function listAreas(
  actor: Actor,
  { id = null, siteId = null }: { id?: string | null; siteId?: string | null },
): Promise<AreaRow[]> {
  return rows<AreaRow>(
    `SELECT a.id, a.site_id AS "siteId", a.name, a.zone, a.is_archived AS "isArchived", a.revision
     FROM areas a WHERE ${visible(programmePolicy, actor, "a")}
       AND (CAST(:id AS uuid) IS NULL OR a.id = :id) AND (CAST(:siteId AS uuid) IS NULL OR a.site_id = :siteId)
     ORDER BY a.is_archived, a.name, a.id`,
    { id, siteId },
  );
}
