import { addDays, atOrAfterLocalTime, localDate } from "../../shared/time/zone";
import { rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { addJob } from "../lib/jobs";

/** After a standstill of some hours the morning's mail is of no use any more. */
const LATE_AT_MOST_MS = 3 * 3_600_000;

interface ChosenRow {
  userId: string;
  siteId: string;
  timeZone: string;
  hour: number;
  chosenAt: Date;
}

/**
 * Orders the daily mails whose hour has come at their site: the first instant at which its clock shows that hour or, where
 * the hour does not come on that day, the next one there is. Whoever chooses an hour that is past has it from the day after.
 */
export async function orderDigests(organizationId: string, now: Date): Promise<void> {
  const chosen = await rows<ChosenRow>(
    `SELECT c.user_id AS "userId", s.id AS "siteId", s.time_zone AS "timeZone", c.hour, c.chosen_at AS "chosenAt"
     FROM digest_choices c JOIN users u ON u.id = c.user_id JOIN sites s ON s.organization_id = c.organization_id
     WHERE c.hour IS NOT NULL AND u.revoked_at IS NULL AND u.email IS NOT NULL AND EXISTS (
       SELECT 1 FROM role_grants g WHERE g.user_id = u.id AND ${inForce("g")} AND g.year IS NULL AND (g.site_id IS NULL OR g.site_id = s.id)
         AND (g.role = 'officer' OR (g.role = 'supervisor' AND EXISTS (SELECT 1 FROM crews k JOIN crew_supervisors v ON v.crew_id = k.id
           WHERE k.site_id = s.id AND v.user_id = u.id AND v.valid @> current_date))))`,
  );
  const today = (timeZone: string) => localDate(now, timeZone);
  const due = chosen.flatMap(({ userId, siteId, timeZone, hour, chosenAt }) =>
    // Yesterday's too: its hour may lie beyond midnight, or its job past it.
    [addDays(today(timeZone), -1), today(timeZone)].flatMap((date) => {
      const at = atOrAfterLocalTime(date, `${String(hour).padStart(2, "0")}:00`, timeZone);
      const lateMs = now.getTime() - at.getTime();
      return lateMs >= 0 && lateMs < LATE_AT_MOST_MS && chosenAt < at
        ? [{ userId, siteId, date }]
        : [];
    }),
  );
  if (due.length === 0) return;
  const ordered = await rows<{ id: string }>(
    `INSERT INTO digests (organization_id, user_id, site_id, date)
     SELECT :organizationId, x."userId", x."siteId", x.date FROM jsonb_to_recordset(CAST(:due AS jsonb)) AS x("userId" uuid, "siteId" uuid, date date)
     ON CONFLICT (user_id, site_id, date) DO NOTHING RETURNING id`,
    { organizationId, due: JSON.stringify(due) },
  );
  for (const { id } of ordered)
    await addJob("send-digest", { organizationId, digestId: id }, { key: `digest:${id}` });
}
