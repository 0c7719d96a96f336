import type { DrawInput } from "../../shared/schemas/draw";
import { recordAudit } from "../lib/audit";
import { row } from "../lib/db";
import { AppError } from "../lib/errors";
import type { Actor } from "../lib/policy";

/**
 * Draws records of a site's year by a seed, and keeps what was drawn and from how many; gives the draw's id. Where there are
 * fewer than asked for all of them are drawn.
 *
 * @throws AppError nothing-to-do: no day of that year has a result.
 */
export async function drawRecords(
  actor: Actor,
  { siteId, year, seed, size }: DrawInput,
): Promise<string> {
  const drawn = await row<{ id: string; drawnFrom: number; drawnFromSha256: string }>(
    `WITH records AS (
       SELECT r.id, r.worker_id, r.date FROM days d JOIN day_results r ON r.id = d.current_result_id
       WHERE d.site_id = :siteId AND d.date BETWEEN make_date(:year, 1, 1) AND make_date(:year, 12, 31)),
     draw AS (
       INSERT INTO record_draws (organization_id, site_id, year, seed, drawn_from, drawn_from_sha256, author_id)
       SELECT CAST(:organizationId AS uuid), CAST(:siteId AS uuid), :year, :seed, count(*), sha256(convert_to(string_agg(id::text, E'\\n' ORDER BY id), 'UTF8')), CAST(:userId AS uuid)
       FROM records HAVING count(*) > 0 RETURNING id, organization_id, drawn_from, drawn_from_sha256),
     items AS (
       INSERT INTO record_draw_items (organization_id, draw_id, position, worker_id, date, result_id)
       SELECT draw.organization_id, draw.id, x.position, x.worker_id, x.date, x.id FROM draw CROSS JOIN (
         SELECT id, worker_id, date, row_number() OVER (ORDER BY sha256(convert_to(:seed || ' ' || id::text, 'UTF8'))) AS position FROM records) x
       WHERE x.position <= :size)
     SELECT id, drawn_from AS "drawnFrom", encode(drawn_from_sha256, 'hex') AS "drawnFromSha256" FROM draw`,
    { siteId, year, seed, size, organizationId: actor.organizationId, userId: actor.userId },
  );
  if (!drawn) throw new AppError("nothing-to-do", 422);
  const { id, ...from } = drawn;
  await recordAudit(actor, {
    action: "draw-records",
    subjectKind: "draw",
    subjectId: id,
    values: { year, seed, size, ...from },
  });
  return id;
}
