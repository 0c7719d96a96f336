import { recordAuditMany } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { execute, rows } from "../lib/db";
import { addJob } from "../lib/jobs";
import { canBeToldOfOverdue, isOverdueFinding } from "../lib/overdue";

interface Overdue {
  id: string;
  state: string;
  dueOn: string;
}

/**
 * What is open past its date goes up, once, to the person whom its site names: one mail for all that goes up together,
 * and a mark with each. A later date takes the mark away (handle-finding.ts).
 */
export async function escalateOverdue(organizationId: string): Promise<void> {
  const sites = await rows<{
    id: string;
    timeZone: string;
    recipientId: string;
    recipientName: string;
  }>(
    `SELECT s.id, s.time_zone AS "timeZone", u.id AS "recipientId", u.name AS "recipientName"
     FROM sites s JOIN users u ON u.id = s.escalation_user_id WHERE ${canBeToldOfOverdue("u")}`,
  );
  for (const site of sites) {
    const today = todayAt(site.timeZone);
    const overdue = await rows<Overdue>(
      `SELECT f.id, f.state, f.due_on::text AS "dueOn" FROM findings f
       WHERE f.site_id = :siteId AND ${isOverdueFinding("f", ":today")} AND f.escalation_id IS NULL
       ORDER BY f.due_on, f.id FOR UPDATE`,
      { siteId: site.id, today },
    );
    if (overdue.length === 0) continue;
    const [escalation] = await rows<{ id: string }>(
      "INSERT INTO escalations (organization_id, site_id, recipient_id) VALUES (:organizationId, :siteId, :recipientId) RETURNING id",
      { organizationId, siteId: site.id, recipientId: site.recipientId },
    );
    if (!escalation) throw new Error("an escalation just stored has an id");
    const ids = overdue.map(({ id }) => id);
    await execute(
      "UPDATE findings SET escalated_on = $2, escalation_id = $3 WHERE id = ANY ($1::uuid[])",
      [ids, today, escalation.id],
    );
    await execute(
      `INSERT INTO finding_steps (organization_id, finding_id, kind, from_state, to_state, text)
       SELECT f.organization_id, f.id, 'escalated', f.state, f.state, $2 FROM findings f WHERE f.id = ANY ($1::uuid[])`,
      [ids, site.recipientName],
    );
    await recordAuditMany(
      { organizationId },
      overdue.map(({ id, dueOn }) => ({
        action: "escalate-finding",
        subjectKind: "finding",
        subjectId: id,
        values: { escalationId: escalation.id, recipientId: site.recipientId, dueOn },
      })),
    );
    await addJob(
      "send-escalation",
      { organizationId, escalationId: escalation.id },
      { key: `escalation:${escalation.id}` },
    );
  }
}
