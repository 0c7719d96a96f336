import { rows } from "../lib/db";

/** Of workers who would have left on a day, the last day after it on which a shift of theirs stands. */
export async function daysAfterLeaving(
  leavers: readonly { readonly id: string; readonly leftOn: string }[],
): Promise<ReadonlyMap<string, string>> {
  if (leavers.length === 0) return new Map();
  const found = await rows<{ id: string; lastOn: string }>(
    `SELECT x.id, max(s.date)::text AS "lastOn" FROM jsonb_to_recordset(CAST(:leavers AS jsonb)) AS x(id uuid, "leftOn" date)
     JOIN shifts s ON s.worker_id = x.id AND s.date > x."leftOn" AND NOT s.is_void GROUP BY x.id`,
    { leavers: JSON.stringify(leavers.map(({ id, leftOn }) => ({ id, leftOn }))) },
  );
  return new Map(found.map(({ id, lastOn }) => [id, lastOn]));
}
