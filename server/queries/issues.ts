import type { z } from "zod";
import type { IssueFilter, IssuePage, IssueView } from "../../shared/schemas/fit";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { type Actor, abilities, visible } from "../lib/policy";
import { issuePolicy } from "../policies";

type Found = Omit<IssueView, "can"> & { createdAt: string };

const SELECT_ISSUES = `SELECT i.id, i.revision, i.site_id AS "siteId", i.worker_id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber",
    i.model_id AS "modelId", m.name AS "modelName", i.size, coalesce(t.name, r.name) AS "useName", i.issued_on::text AS "issuedOn", i.created_at::text AS "createdAt",
    ARRAY(SELECT o.name FROM protector_models o WHERE o.id = ANY (i.offered_model_ids) ORDER BY o.name, o.id) AS offered,
    i.was_instructed AS "wasInstructed", i.reason, i.acknowledged_how AS "acknowledgedHow", i.ended_on::text AS "endedOn", i.ended_how AS "endedHow",
    v.par_db AS "parDb", u.name AS "authorName"
  FROM protector_issues i JOIN workers w ON w.id = i.worker_id JOIN protector_models m ON m.id = i.model_id
  JOIN assignments a ON a.id = i.assignment_id LEFT JOIN tasks t ON t.id = a.task_id LEFT JOIN areas r ON r.id = a.area_id
  LEFT JOIN fit_tests f ON f.id = i.fit_test_id AND NOT f.is_void LEFT JOIN fit_test_revisions v ON v.id = f.current_revision_id
  LEFT JOIN users u ON u.id = i.author_id`;

function present(actor: Actor, { createdAt: _, ...found }: Found): IssueView {
  const can = abilities(issuePolicy, actor, found);
  const isOpen = found.endedOn === null;
  return {
    ...found,
    reason: can.end ? found.reason : null,
    can: {
      end: can.end && isOpen,
      acknowledge: can.acknowledge && isOpen && found.acknowledgedHow === null,
    },
  };
}

/** What was handed out, the latest first. */
export async function listIssues(
  actor: Actor,
  filter: z.output<typeof IssueFilter>,
): Promise<z.input<typeof IssuePage>> {
  const before = decodeCursor(filter.cursor, 3);
  const conditions = [
    visible(issuePolicy, actor, "i"),
    filter.siteId && "i.site_id = :siteId",
    filter.workerId && "i.worker_id = :workerId",
    filter.state === "open" && "i.ended_on IS NULL",
    before &&
      "(i.issued_on, i.created_at, i.id) < (CAST(:beforeDate AS date), CAST(:beforeAt AS timestamptz), CAST(:beforeId AS uuid))",
  ].filter(Boolean);
  const found = await rows<Found>(
    `${SELECT_ISSUES} WHERE ${conditions.join(" AND ")} ORDER BY i.issued_on DESC, i.created_at DESC, i.id DESC LIMIT :limit`,
    {
      siteId: filter.siteId,
      workerId: filter.workerId,
      beforeDate: before?.[0] ?? null,
      beforeAt: before?.[1] ?? null,
      beforeId: before?.[2] ?? null,
      limit: filter.limit + 1,
    },
  );
  const page = pageFrom(found, filter.limit, ({ issuedOn, createdAt, id }) => [
    issuedOn,
    createdAt,
    id,
  ]);
  return { ...page, rows: page.rows.map((one) => present(actor, one)) };
}

export async function issuesById(actor: Actor, id: string): Promise<IssueView[]> {
  const found = await rows<Found>(
    `${SELECT_ISSUES} WHERE i.id = :id AND ${visible(issuePolicy, actor, "i")}`,
    { id },
  );
  return found.map((one) => present(actor, one));
}
