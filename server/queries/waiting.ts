import type { z } from "zod";
import { ruleSetInForce } from "../../shared/rule-sets";
import type { WaitingView } from "../../shared/schemas/waiting";
import { todayAt } from "../lib/calendar";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import { crewPolicy, noticePolicy, programmePolicy, sitePolicy } from "../policies";
import { PROGRESS_COLUMNS } from "./crew-progress";
import { findNotices, summarize } from "./entry-notices";
import { listFindings } from "./finding-view";
import { lettersWaiting } from "./letters";
import { nextShiftSql } from "./next-shift";
import { ownStepsDue } from "./plan-steps";

interface CrewRow {
  id: string;
  name: string;
  siteId: string;
  timeZone: string;
  date: string;
  nextDate: string;
  start: string;
  lengthMin: number;
  members: number;
  saved: number;
  absent: number;
}

/** The safety officer's start page: what needs a person, how far the crews' days are entered, what goes out, what is due. */
export async function waitingFor(
  actor: Actor,
  siteId: string | undefined,
): Promise<z.input<typeof WaitingView>> {
  const sites = await rows<{ id: string; name: string; timeZone: string }>(
    `SELECT s.id, s.name, s.time_zone AS "timeZone" FROM sites s WHERE ${visible(sitePolicy, actor, "s")} ${siteId ? "AND s.id = :siteId" : ""} ORDER BY s.name`,
    { siteId },
  );
  const days = sites.map(({ id, timeZone }) => ({
    siteId: id,
    date: todayAt(timeZone),
  }));
  const crews = await rows<CrewRow>(
    `SELECT c.id, c.name, c.site_id AS "siteId", s.time_zone AS "timeZone", x.date::text AS date, (${nextShiftSql("c.id", "x.date")})::text AS "nextDate", to_char(c.usual_start, 'HH24:MI') AS start, c.usual_length_min AS "lengthMin",
       ${PROGRESS_COLUMNS("c.id", "x.date")}
     FROM crews c JOIN sites s ON s.id = c.site_id JOIN jsonb_to_recordset(CAST(:days AS jsonb)) AS x("siteId" uuid, date date) ON x."siteId" = c.site_id
     WHERE NOT c.is_archived AND ${visible(crewPolicy, actor, "c")} ORDER BY c.usual_start, c.name`,
    { days: JSON.stringify(days) },
  );
  const findings = await listFindings(actor, { state: "open", siteId, limit: 100 });
  const ofSite = siteId ? "n.site_id = :siteId AND" : "";
  // Letters of results have a page of their own.
  const outgoing = await findNotices(
    `${ofSite} n.kind = 'findings' AND n.state IN ('waiting', 'held') AND n.last_error IS NULL AND ${visible(noticePolicy, actor, "n")}`,
    { siteId },
  );
  const byEntry = new Map<string, typeof outgoing>();
  for (const notice of outgoing)
    byEntry.set(notice.entryId, [...(byEntry.get(notice.entryId) ?? []), notice]);
  const troubled = await findNotices(
    `${ofSite} (n.state IN ('failed', 'bounced', 'possibly-sent') OR (n.state = 'waiting' AND n.last_error IS NOT NULL)) AND n.created_at > now() - interval '30 days' AND ${visible(noticePolicy, actor, "n")}`,
    { siteId },
  );
  const due = await rows<{ id: string; name: string; dueOn: string }>(
    `SELECT i.id, i.name, i.calibration_due_on::text AS "dueOn" FROM instruments i
     WHERE NOT i.is_archived AND i.calibration_due_on <= current_date + 14 AND ${visible(programmePolicy, actor, "i")} ${siteId ? "AND i.site_id = :siteId" : ""}
     ORDER BY i.calibration_due_on, i.name LIMIT 20`,
    { siteId },
  );
  return {
    today: days[0]?.date ?? todayAt("UTC"),
    ruleSets: await governingRuleSets(sites, days),
    crews,
    findings: findings.rows.filter(({ state }) => state !== "done"),
    next: findings.next,
    letters: await lettersWaiting(actor, siteId),
    toBeChecked: findings.rows.filter(({ state }) => state === "done"),
    outgoing: [...byEntry].map(([entryId, notices]) => summarize(entryId, notices)),
    troubled,
    calibrationsDue: due,
    stepsDue: await ownStepsDue(actor, siteId),
  };
}

async function governingRuleSets(
  sites: readonly { id: string; name: string }[],
  days: readonly { siteId: string; date: string }[],
): Promise<z.input<typeof WaitingView>["ruleSets"]> {
  const found = await rows<{ siteId: string; ruleSetKey: string; date: string }>(
    `SELECT DISTINCT ON (x."siteId") x."siteId", x.date::text AS date, s.governing_rule_set AS "ruleSetKey"
     FROM jsonb_to_recordset(CAST(:days AS jsonb)) AS x("siteId" uuid, date date)
     JOIN site_settings s ON s.site_id = x."siteId" AND s.effective_from <= x.date
     ORDER BY x."siteId", s.effective_from DESC, s.number DESC`,
    { days: JSON.stringify(days) },
  );
  return sites.flatMap(({ id, name }) => {
    const settings = found.find(({ siteId }) => siteId === id);
    const ruleSet = settings && ruleSetInForce(settings.ruleSetKey, settings.date);
    return ruleSet
      ? [{ siteId: id, siteName: name, ruleSetKey: ruleSet.key, ruleSetVersion: ruleSet.version }]
      : [];
  });
}
