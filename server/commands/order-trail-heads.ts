import { addDays, atOrAfterLocalTime, localDate } from "../../shared/time/zone";
import { row, rows } from "../lib/db";
import { addJob } from "../lib/jobs";

/** By the clock of the chosen zone, on Mondays. */
const GOES_AT = "07:00";

/** The Monday of a date's week, ISO. */
export function mondayOf(date: string): string {
  const sinceMonday = (new Date(`${date}T00:00:00Z`).getUTCDay() + 6) % 7;
  return addDays(date, -sinceMonday);
}

export const queueTrailMail = (organizationId: string, mailId: string) =>
  addJob("send-trail-mail", { organizationId, mailId }, { key: `trail-mail:${mailId}` });

/**
 * Orders the week's mail with the trail's head once its hour has come, however late that is noticed: a head that comes on
 * Thursday is still one. A week's goes to an address once, and none goes before there is a seal.
 */
export async function orderTrailHeads(organizationId: string, now: Date): Promise<void> {
  const keeper = await row<{
    name: string | null;
    email: string | null;
    language: string;
    timeZone: string;
  }>(
    `SELECT name, email, language, time_zone AS "timeZone" FROM trail_keepers k
     WHERE organization_id = :organizationId AND EXISTS (SELECT 1 FROM audit_seals s WHERE s.organization_id = k.organization_id)
     ORDER BY number DESC LIMIT 1`,
    { organizationId },
  );
  if (!keeper || keeper.email === null) return;
  const { name, email, language, timeZone } = keeper;
  const thisWeek = mondayOf(localDate(now, timeZone));
  // On Monday before the hour, it is still the week before that is owed.
  const week =
    atOrAfterLocalTime(thisWeek, GOES_AT, timeZone) <= now ? thisWeek : addDays(thisWeek, -7);
  const ordered = await rows<{ id: string }>(
    `INSERT INTO trail_mails (organization_id, kind, week, name, email, language, time_zone)
     VALUES ($1, 'head', $2, $3, $4, $5, $6) ON CONFLICT (organization_id, week, lower(email)) WHERE kind = 'head' DO NOTHING RETURNING id`,
    [organizationId, week, name, email, language, timeZone],
  );
  for (const { id } of ordered) await queueTrailMail(organizationId, id);
}
