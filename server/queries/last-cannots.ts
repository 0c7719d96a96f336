import type { Cannot } from "../../shared/schemas/finding";
import { rows } from "../lib/db";

/** What was said last as Can't of each of these findings, unless it was undone. */
export async function lastCannots(
  findingIds: readonly string[],
): Promise<ReadonlyMap<string, Cannot>> {
  if (findingIds.length === 0) return new Map();
  const found = await rows<Omit<Cannot, "at"> & { findingId: string; at: Date }>(
    `SELECT DISTINCT ON (s.finding_id) s.finding_id AS "findingId", s.text, coalesce(u.name, '') AS "byName", s.created_at AS at
     FROM finding_steps s LEFT JOIN users u ON u.id = s.author_id
     WHERE s.finding_id = ANY (CAST(:ids AS uuid[])) AND s.kind = 'cannot'
       AND coalesce((SELECT n.kind FROM finding_steps n WHERE n.finding_id = s.finding_id AND n.created_at > s.created_at ORDER BY n.created_at, n.id LIMIT 1), '') <> 'undone'
     ORDER BY s.finding_id, s.created_at DESC, s.id`,
    { ids: `{${findingIds.join(",")}}` },
  );
  return new Map(
    found.map(({ findingId, text, byName, at }) => [
      findingId,
      { text, byName, at: at.toISOString() },
    ]),
  );
}
