import type { z } from "zod";
import { isNotified, NEWS_FOR_DAYS } from "../../shared/findings/notified";
import type {
  FindingFilter,
  FindingPage,
  FindingRow,
  FindingView,
} from "../../shared/schemas/finding";
import type { NoticeState } from "../../shared/schemas/notice";
import { addDays, localDate } from "../../shared/time/zone";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { canBeToldOfOverdue } from "../lib/overdue";
import { type Actor, abilities, visible } from "../lib/policy";
import type { Finding } from "../models/finding";
import { evidencePolicy, findingPolicy } from "../policies";
import {
  DAY_FIGURES_COLUMNS,
  type DayFiguresRow,
  presentDayFigures,
} from "../presenters/day-figures";
import { lastCannots } from "./last-cannots";
import { findingsToday, WAS_CREDITED } from "./outlook";

type Found = Omit<FindingRow, "figures" | "can" | "cannot" | "worker" | "today"> & {
  wasCredited: boolean;
  workerId: string | null;
  workerName: string | null;
  employeeNumber: string | null;
  figures: DayFiguresRow | null;
};

/** Since when other rules govern the site than those that a finding rests on. An instrument or a report rests on none. */
export const RULES_UNTIL = `(SELECT coalesce(
      (SELECT min(later.effective_from) FROM site_settings later WHERE later.site_id = f.site_id AND later.effective_from > f.last_date
        AND later.effective_from <= current_date AND later.governing_rule_set <> rested.key), now.effective_from)::text
    FROM (SELECT coalesce(f.facts->>'ruleSetKey', (SELECT r.governing_rule_set FROM day_results r WHERE r.id = f.last_result_id)) AS key) rested,
      (SELECT s.effective_from, s.governing_rule_set FROM site_settings s WHERE s.site_id = f.site_id AND s.effective_from <= current_date
       ORDER BY s.effective_from DESC, s.number DESC LIMIT 1) now
    WHERE now.governing_rule_set <> rested.key)`;

const selectFindings = (
  actor: Actor,
) => `SELECT f.id, f.kind, f.state, f.criterion, f.use_key AS "useKey", f.facts, f.first_date::text AS "firstDate", f.last_date::text AS "lastDate",
    f.days_count AS "daysCount", ${WAS_CREDITED} AS "wasCredited",
    CASE WHEN f.job_id IS NULL THEN 1 ELSE (SELECT count(DISTINCT e.worker_id)::int FROM finding_evidence e WHERE e.finding_id = f.id) END AS "workersCount", f.due_on::text AS "dueOn", ${RULES_UNTIL} AS "rulesUntil", f.site_id AS "siteId", f.revision, w.id AS "workerId", w.name AS "workerName",
    w.employee_number AS "employeeNumber", coalesce(j.name, i.name) AS "subjectName",
    (SELECT c.name FROM crew_memberships m JOIN crews c ON c.id = m.crew_id WHERE m.worker_id = f.worker_id AND m.valid @> f.last_date LIMIT 1) AS "crewName",
    o.name AS "ownerName", (SELECT json_build_object('name', p.name, 'on', f.escalated_on, 'hasBounced', x.bounced_at IS NOT NULL) FROM escalations x JOIN users p ON p.id = x.recipient_id WHERE x.id = f.escalation_id) AS "wentUp",
    (SELECT to_jsonb(x) FROM (SELECT ${DAY_FIGURES_COLUMNS("r")} FROM day_results r WHERE r.id = f.last_result_id AND ${visible(evidencePolicy, actor, "r")}) x) AS figures
  FROM findings f LEFT JOIN workers w ON w.id = f.worker_id LEFT JOIN jobs j ON j.id = f.job_id
  LEFT JOIN instruments i ON i.id = f.instrument_id LEFT JOIN users o ON o.id = f.owner_id`;

async function presentAll(actor: Actor, found: readonly Found[]): Promise<FindingRow[]> {
  const today = await findingsToday(found);
  const cannots = await lastCannots(found.map(({ id }) => id));
  return found.map(
    ({ workerId, workerName, employeeNumber, figures, wasCredited: _, ...finding }) => {
      const can = abilities(findingPolicy, actor, finding);
      return {
        ...finding,
        today: today.get(finding.id) ?? null,
        // Said to the officer; the worker it is about has the order itself.
        cannot: can.handle || can.markDone ? (cannots.get(finding.id) ?? null) : null,
        worker:
          workerId === null
            ? null
            : { id: workerId, name: workerName ?? "", employeeNumber: employeeNumber ?? "" },
        figures: figures ? presentDayFigures(figures) : null,
        can,
      };
    },
  );
}

const stateCondition: Record<z.output<typeof FindingFilter>["state"], string> = {
  open: "f.state <> 'closed'",
  done: "f.state = 'done'",
  closed: "f.state = 'closed'",
  all: "TRUE",
};

/** Findings, soonest due first. */
export async function listFindings(
  actor: Actor,
  filter: z.output<typeof FindingFilter>,
): Promise<z.input<typeof FindingPage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const conditions = [visible(findingPolicy, actor, "f"), stateCondition[filter.state]];
  if (filter.siteId) conditions.push("f.site_id = :siteId");
  if (filter.workerId) conditions.push("f.worker_id = :workerId");
  if (filter.kind) conditions.push("f.kind = :kind");
  if (cursor)
    conditions.push(
      "(coalesce(f.due_on, 'infinity'), f.id) > (coalesce(CAST(:dueOn AS date), 'infinity'), CAST(:id AS uuid))",
    );
  const found = await rows<Found>(
    `${selectFindings(actor)} WHERE ${conditions.join(" AND ")} ORDER BY coalesce(f.due_on, 'infinity'), f.id LIMIT :limit`,
    {
      siteId: filter.siteId,
      workerId: filter.workerId,
      kind: filter.kind,
      dueOn: cursor?.[0] ?? null,
      id: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(await presentAll(actor, found), filter.limit, ({ dueOn, id }) => [dueOn, id]);
}

export async function findingView(
  actor: Actor,
  finding: Finding,
): Promise<z.input<typeof FindingView>> {
  const found = await rows<Found>(`${selectFindings(actor)} WHERE f.id = :id`, { id: finding.id });
  const steps = await rows<{
    id: string;
    kind: FindingView["steps"][number]["kind"];
    fromState: FindingView["state"] | null;
    toState: FindingView["state"] | null;
    text: string | null;
    authorName: string | null;
    at: Date;
  }>(
    `SELECT s.id, s.kind, s.from_state AS "fromState", s.to_state AS "toState", s.text, u.name AS "authorName", s.created_at AS at
     FROM finding_steps s LEFT JOIN users u ON u.id = s.author_id WHERE s.finding_id = :id ORDER BY s.created_at, s.id`,
    { id: finding.id },
  );
  const evidence = await rows<DayFiguresRow & { ofWorkerId: string; ofWorkerName: string }>(
    `SELECT ${DAY_FIGURES_COLUMNS("r")}, w.id AS "ofWorkerId", w.name AS "ofWorkerName"
     FROM finding_evidence e JOIN day_results r ON r.id = e.result_id JOIN workers w ON w.id = e.worker_id
     WHERE e.finding_id = :id AND ${visible(evidencePolicy, actor, "r")} ORDER BY e.date DESC, w.name, w.id LIMIT 60`,
    { id: finding.id },
  );
  const told = await rows<{
    noticeId: string;
    name: string;
    audience: string;
    state: NoticeState;
    at: Date | null;
  }>(
    `SELECT DISTINCT n.id AS "noticeId", u.name, n.audience, n.state, coalesce(n.sent_at, n.not_before) AS at
     FROM notice_items i JOIN notices n ON n.id = i.notice_id JOIN users u ON u.id = n.recipient_id WHERE i.finding_id = :id ORDER BY at`,
    { id: finding.id },
  );
  const above = await rows(
    `SELECT u.id FROM sites s JOIN users u ON u.id = s.escalation_user_id WHERE s.id = :siteId AND ${canBeToldOfOverdue("u")}`,
    { siteId: finding.siteId },
  );
  return {
    ...only(await presentAll(actor, found)),
    closingReason: finding.closingReason,
    closedOn: finding.closedOn,
    previousId: finding.previousId,
    steps: steps.map(({ at, ...step }) => ({ ...step, at: at.toISOString() })),
    evidence: evidence.map(({ ofWorkerId, ofWorkerName, ...figures }) => ({
      ...presentDayFigures(figures),
      worker: { id: ofWorkerId, name: ofWorkerName },
    })),
    told: told.map(({ at, ...one }) => ({ ...one, at: at?.toISOString() ?? null })),
    untold: told.length > 0 ? null : whyUntold(finding),
    goesUp: above.length > 0,
  };
}

/** Why no notice tells of a finding. */
function whyUntold(finding: Finding): NonNullable<FindingView["untold"]> {
  if (!isNotified(finding)) return "not-by-mail";
  if (finding.daysCount === 0) return "corrected";
  const oldest = addDays(localDate(finding.openedAt, "UTC"), -NEWS_FOR_DAYS);
  return finding.lastDate < oldest ? "long-ago" : "no-address";
}
