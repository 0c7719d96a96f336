import type { MappingView } from "../../shared/schemas/group-mapping";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { mappingPolicy } from "../policies";

/** Mappings in force that the actor may see; by its id one that has ended too. */
export const listMappings = (actor: Actor, id: string | null = null): Promise<MappingView[]> =>
  rows<MappingView>(
    `SELECT m.id, m.group_name AS "groupName", m.role, m.site_id AS "siteId", s.name AS "siteName", m.ended_at IS NOT NULL AS "isEnded",
       (SELECT count(DISTINCT g.user_id)::int FROM role_grants g JOIN users u ON u.id = g.user_id AND u.revoked_at IS NULL
        WHERE g.mapping_id = m.id AND g.revoked_at IS NULL) AS people
     FROM group_mappings m LEFT JOIN sites s ON s.id = m.site_id
     WHERE ${visible(mappingPolicy, actor, "m")} AND (m.id = :id OR (CAST(:id AS uuid) IS NULL AND m.ended_at IS NULL))
     ORDER BY m.group_name, m.role, s.name NULLS FIRST, m.id`,
    { id },
  );
