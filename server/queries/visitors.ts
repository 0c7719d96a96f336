import type { z } from "zod";
import type { VisitorList } from "../../shared/schemas/visitor";
import { rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { type Actor, visible } from "../lib/policy";
import { visitPolicy } from "../policies";

type Row = Omit<z.input<typeof VisitorList>["rows"][number], "grantedAt" | "endsAt"> & {
  grantedAt: Date;
  endsAt: Date;
};

/** Visits that are over and are still listed, days. */
const LISTED_FOR_DAYS = 90;

/** Visitors of the sites that the actor administers: those who may come in, then those whose visit is over. */
export async function listVisitors(
  actor: Actor,
  id: string | null = null,
): Promise<z.input<typeof VisitorList>["rows"]> {
  const found = await rows<Row>(
    `SELECT x.* FROM (
     SELECT g.id, u.id AS "userId", u.name, u.email, s.id AS "siteId", s.name AS "siteName", s.time_zone AS "timeZone", g.year,
       g.granted_at AS "grantedAt", b.name AS "grantedBy", least(g.ends_at, g.revoked_at, u.revoked_at) AS "endsAt",
       CASE WHEN NOT ${inForce("g")} OR u.revoked_at IS NOT NULL THEN 'over' WHEN u.last_sign_in_at > g.granted_at THEN 'here' ELSE 'expected' END AS state
     FROM role_grants g JOIN users u ON u.id = g.user_id JOIN sites s ON s.id = g.site_id LEFT JOIN users b ON b.id = g.granted_by
     WHERE g.year IS NOT NULL AND ${visible(visitPolicy, actor, "g")} AND (CAST(:id AS uuid) IS NULL OR g.id = :id)
       AND (CAST(:id AS uuid) IS NOT NULL OR least(g.ends_at, g.revoked_at) > now() - interval '${LISTED_FOR_DAYS} days')) x
     ORDER BY x.state = 'over', CASE WHEN x.state <> 'over' THEN x."endsAt" END, x."endsAt" DESC, x.id LIMIT 500`,
    { id },
  );
  return found.map(({ grantedAt, endsAt, ...visit }) => ({
    ...visit,
    grantedAt: grantedAt.toISOString(),
    endsAt: endsAt.toISOString(),
  }));
}
