import { randomUUID } from "node:crypto";
import type { Unaccounted } from "../../shared/acoustics/types";
import type { HistoryStretch, HistoryStretches } from "../../shared/schemas/history";
import { type RunDoubt, shiftDoubt } from "../../shared/schemas/run-doubts";
import { type StoredLeftOut, storedLeftOut } from "../histories/left-out";
import { recordAudit } from "../lib/audit";
import { execute, rows } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import { isoInstant } from "../lib/sql-instant";
import type { TimeHistory } from "../models/survey";
import { type FacingRun, facedShift } from "../queries/faced-shifts";
import { evaluateStored, type HistoryFacts, historyFacts } from "../queries/histories";
import { recomputeRunDay } from "./recompute-run-day";
import { leftOutOf, reasonFor } from "./record-run";
import { presentRevision, writeHistoryReadings } from "./write-history-readings";

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

/** All that a run's readings depend on. */
const leftOutKey = (stretches: readonly HistoryStretch[], unaccounted: Unaccounted | null) =>
  JSON.stringify([
    unaccounted?.how === "quiet" ? unaccounted.levelDb : unaccounted?.how,
    ...stretches
      .flatMap((stretch) => (stretch.kind === "left-out" ? [[stretch.fromS, stretch.toS]] : []))
      .toSorted(([a = 0], [b = 0]) => a - b),
  ]);

interface RunOfHistory extends FacingRun {
  workerId: string | null;
  from: string;
  to: string;
}

const runOf = async ({ id }: HistoryFacts): Promise<RunOfHistory> =>
  only(
    await rows<RunOfHistory>(
      `SELECT r.worker_id AS "workerId", r.date::text AS date, r.shift_id AS "shiftId", ${isoInstant("lower(h.span)")} AS "from", ${isoInstant("upper(h.span)")} AS "to"
       FROM time_histories h JOIN runs r ON r.id = h.run_id WHERE h.id = :id`,
      { id },
    ),
  );

/** What speaks against a run for its shift: it is judged anew whenever another part is left out. */
const OF_SHIFT: readonly string[] = ["outside-shift", "shorter-than-shift"];

async function doubtOfShift(
  run: RunOfHistory,
  covers: Parameters<typeof shiftDoubt>[0]["covers"],
  countedMin: number,
  leftOut: StoredLeftOut | null,
): Promise<RunDoubt | null> {
  if (covers === "part" || run.workerId === null) return null;
  return shiftDoubt({
    covers,
    shift: await facedShift({ ...run, span: { from: run.from, to: run.to } }),
    durationMin: countedMin,
    leftOut: leftOut && (await leftOutOf(run, leftOut, countedMin)),
  });
}

/**
 * The next revision of what is drawn under a history. Where it leaves out another part than before, or says otherwise how
 * that was, the run's readings follow, and its day is computed anew; brackets alone change no reading.
 *
 * @throws AppError invalid for a stretch beyond the history, over another of its kind, or of another site's task; and
 *   where the run, cut down, speaks for its shift only if somebody says why.
 */
export async function changeHistoryStretches(
  actor: Actor,
  history: TimeHistory,
  { stretches, leftOut: said, keptReason, reason }: HistoryStretches,
): Promise<void> {
  const facts = await historyFacts(history.id);
  const lengthS = (facts.valuesCount * facts.intervalMs) / 1000;
  const issues = [
    ...checkPlaces(stretches, lengthS),
    ...(await checkTasks(stretches, history.siteId)),
  ];
  const isAnyLeftOut = stretches.some(({ kind }) => kind === "left-out");
  const unaccounted: Unaccounted | null = isAnyLeftOut ? (said ?? { how: "unknown" }) : null;
  const isLevelsChange =
    leftOutKey(stretches, unaccounted) !== leftOutKey(facts.stretches, facts.leftOut);
  const { settings, evaluation } = await evaluateStored(facts, stretches);
  if (isLevelsChange && evaluation.counted.durationS === 0)
    issues.push(issue(["stretches"], "everything-left-out"));
  if (issues.length > 0) throw unprocessable(issues);
  const run = await runOf(facts);
  const countedMin = evaluation.counted.durationS / 60;
  const leftOut =
    unaccounted && storedLeftOut(stretches, { startsAt: facts.startsAt, countedMin }, unaccounted);
  const present = await presentRevision(history.runId);
  const doubt = isLevelsChange
    ? await doubtOfShift(run, present.covers, countedMin, leftOut)
    : null;
  const isNewDoubt = doubt !== null && !present.doubts.includes(doubt.code);
  if (isNewDoubt && keptReason === null)
    throw unprocessable([issue(["keptReason"], doubt.code, { ...doubt.params })]);
  const revisionId = randomUUID();
  const number = history.revision + 1;
  await execute(
    `INSERT INTO time_history_revisions (id, organization_id, history_id, number, stretches, left_out_how, left_out_level_db, reason, author_id)
     VALUES ($1, $2, $3, $4, $5::jsonb, $6, $7, $8, $9)`,
    [
      revisionId,
      actor.organizationId,
      history.id,
      number,
      JSON.stringify(stretches),
      unaccounted?.how ?? null,
      unaccounted?.how === "quiet" ? unaccounted.levelDb : null,
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
    values: { number, stretches, leftOut: unaccounted, keptReason, reason },
  });
  if (!isLevelsChange) return;
  const entryId = randomUUID();
  const reasons = stretches.flatMap((stretch) =>
    stretch.kind === "left-out" ? [stretch.reason] : [],
  );
  const doubts = [
    ...present.doubts.filter((code) => !OF_SHIFT.includes(code)),
    ...(doubt ? [doubt.code] : []),
  ];
  const kept = isNewDoubt
    ? [present.keptReason, keptReason].filter(Boolean).join("; ")
    : present.keptReason;
  await writeHistoryReadings(actor, history.runId, evaluation, settings, {
    reason: (reason ?? (reasons.join("; ") || "history")).slice(0, 2000),
    entryId,
    leftOut,
    facts: { doubts, keptReason: reasonFor(doubts, kept?.slice(0, 2000) ?? null) },
  });
  if (run.workerId)
    await recomputeRunDay(actor, {
      siteId: history.siteId,
      workerId: run.workerId,
      date: run.date,
      entryId,
    });
}
