import { randomUUID } from "node:crypto";
import type { HistoryStretch, HistoryStretches } from "../../shared/schemas/history";
import { recordAudit } from "../lib/audit";
import { execute, row, rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { TimeHistory } from "../models/survey";
import { evaluateStored, historyFacts } from "../queries/histories";
import { recomputeRunDay } from "./recompute-run-day";
import { writeHistoryReadings } from "./write-history-readings";

type Issues = ReturnType<typeof issue>[];

function checkPlaces(stretches: readonly HistoryStretch[], lengthS: number): Issues {
  const issues = stretches.flatMap(({ toS }, place) =>
    toS > lengthS + 1e-6
      ? [issue(["stretches", place, "toS"], "beyond-the-history", { lengthS })]
      : [],
  );
  for (const kind of ["task", "left-out"] as const) {
    const ordered = stretches
      .map((stretch, place) => ({ ...stretch, place }))
      .filter((stretch) => stretch.kind === kind)
      .toSorted((a, b) => a.fromS - b.fromS);
    ordered.forEach((stretch, index) => {
      const before = ordered[index - 1];
      if (before && stretch.fromS < before.toS - 1e-6)
        issues.push(issue(["stretches", stretch.place, "fromS"], "stretches-overlap"));
    });
  }
  return issues;
}

async function checkTasks(stretches: readonly HistoryStretch[], siteId: string): Promise<Issues> {
  const ids = stretches.flatMap((stretch) => (stretch.kind === "task" ? [stretch.taskId] : []));
  if (ids.length === 0) return [];
  const known = await rows<{ id: string }>(
    "SELECT id FROM tasks WHERE id = ANY ($1::uuid[]) AND site_id = $2",
    [ids, siteId],
  );
  const atSite = new Set(known.map(({ id }) => id));
  return stretches.flatMap((stretch, place) =>
    stretch.kind === "task" && !atSite.has(stretch.taskId)
      ? [issue(["stretches", place, "taskId"], "task-of-other-site")]
      : [],
  );
}

const leftOut = (stretches: readonly HistoryStretch[]) =>
  JSON.stringify(
    stretches
      .flatMap((stretch) => (stretch.kind === "left-out" ? [[stretch.fromS, stretch.toS]] : []))
      .toSorted(([a = 0], [b = 0]) => a - b),
  );

/**
 * The next revision of what is drawn under a history. Where it leaves out another part than before, the run's readings
 * follow, and its day is computed anew; brackets alone change no reading.
 *
 * @throws AppError invalid for a stretch beyond the history, over another of its kind, or of another site's task.
 */
export async function changeHistoryStretches(
  actor: Actor,
  history: TimeHistory,
  { stretches, reason }: HistoryStretches,
): Promise<void> {
  const facts = await historyFacts(history.id);
  const lengthS = (facts.valuesCount * facts.intervalMs) / 1000;
  const issues = [
    ...checkPlaces(stretches, lengthS),
    ...(await checkTasks(stretches, history.siteId)),
  ];
  const isLevelsChange = leftOut(stretches) !== leftOut(facts.stretches);
  const { settings, evaluation } = await evaluateStored(facts, stretches);
  if (isLevelsChange && evaluation.counted.durationS === 0)
    issues.push(issue(["stretches"], "everything-left-out"));
  if (issues.length > 0) throw unprocessable(issues);
  const revisionId = randomUUID();
  const number = history.revision + 1;
  await execute(
    `INSERT INTO time_history_revisions (id, organization_id, history_id, number, stretches, reason, author_id) VALUES ($1, $2, $3, $4, $5::jsonb, $6, $7)`,
    [
      revisionId,
      actor.organizationId,
      history.id,
      number,
      JSON.stringify(stretches),
      reason,
      actor.userId,
    ],
  );
  await execute("UPDATE time_histories SET revision = $2, current_revision_id = $3 WHERE id = $1", [
    history.id,
    number,
    revisionId,
  ]);
  await recordAudit(actor, {
    action: "change-history-stretches",
    subjectKind: "time-history",
    subjectId: history.id,
    values: { number, stretches, reason },
  });
  if (!isLevelsChange) return;
  const entryId = randomUUID();
  const reasons = stretches.flatMap((stretch) =>
    stretch.kind === "left-out" ? [stretch.reason] : [],
  );
  await writeHistoryReadings(actor, history.runId, evaluation, settings, {
    reason: (reason ?? (reasons.join("; ") || "history")).slice(0, 2000),
    entryId,
  });
  const run = await row<{ workerId: string | null; date: string }>(
    `SELECT worker_id AS "workerId", date::text AS date FROM runs WHERE id = :id`,
    { id: history.runId },
  );
  if (run?.workerId)
    await recomputeRunDay(actor, {
      siteId: history.siteId,
      workerId: run.workerId,
      date: run.date,
      entryId,
    });
}
