import type { Criterion } from "../../shared/acoustics/types";
import { dayOf } from "../../shared/planning/slot-shares";
import { REST, SLOT_MIN, sharesOf, type TimetableProblem } from "../../shared/planning/timetable";
import { judgeTried, tryChanges } from "../../shared/planning/try-changes";
import { ruleSetVersion } from "../../shared/rule-sets";
import type {
  TimetableAnswer,
  TimetableBasis,
  TimetableFound,
  TimetableInput,
} from "../../shared/schemas/timetable";
import type { TimetableStock } from "../commands/start-timetable";
import { recordAudit } from "../lib/audit";
import { execute, inTransaction, row } from "../lib/db";
import type { JobPayloads } from "../lib/jobs";
import { runWorker } from "../lib/run-worker";
import type { TimetableAnswer as Searched } from "../timetables/solve-timetable";
import { whileBeating } from "./job-beat";

/** A search that ended a process so often is given up. */
const MOST_TRIES = 3;

interface Ordered {
  request: TimetableInput;
  basis: TimetableBasis;
  subject: TimetableStock;
  ruleSetKey: string;
  ruleSetVersion: number;
  tries: number;
}

/** Takes the search up, or says that there is nothing to do any more. */
async function claim(timetableId: string): Promise<Ordered | null> {
  const found = await row<Ordered>(
    `SELECT request, basis, subject, governing_rule_set AS "ruleSetKey", governing_version AS "ruleSetVersion", tries
     FROM timetables WHERE id = :timetableId AND state = 'working' FOR UPDATE`,
    { timetableId },
  );
  if (!found) return null;
  const isGivenUp = found.tries >= MOST_TRIES;
  await execute(
    `UPDATE timetables SET tries = tries + 1, updated_at = now() ${isGivenUp ? ", state = 'failed', revision = revision + 1" : ""} WHERE id = $1`,
    [timetableId],
  );
  return isGivenUp ? null : found;
}

/**
 * Searches for a timetable, in a thread, and keeps what comes of it. A retry begins anew and ends as the first would have;
 * what was cancelled meanwhile ends without a trace.
 */
export async function searchTimetable({
  organizationId,
  timetableId,
}: JobPayloads["solve-timetable"]): Promise<void> {
  const ordered = await inTransaction({ organizationId }, () => claim(timetableId));
  if (!ordered) return;
  await whileBeating(
    async (progressPct) => {
      const count = await inTransaction({ organizationId }, () =>
        execute(
          `UPDATE timetables SET progress_pct = greatest(progress_pct, $2), updated_at = now() WHERE id = $1 AND state = 'working'`,
          [timetableId, progressPct],
        ),
      );
      return count > 0;
    },
    async (watch) => {
      const problem = problemOf(ordered, comparatorOf(ordered));
      const searched = await runWorker<Searched>("timetable-worker", problem, watch);
      const answer = answerOf(searched, problem, ordered);
      await inTransaction({ organizationId }, async () => {
        const count = await execute(
          `UPDATE timetables SET state = 'answered', answer = $2::jsonb, progress_pct = 100, updated_at = now(), revision = revision + 1
           WHERE id = $1 AND state = 'working'`,
          [timetableId, JSON.stringify(answer)],
        );
        if (count === 0) return;
        await recordAudit(
          { organizationId },
          {
            action: "answer-timetable",
            subjectKind: "timetable",
            subjectId: timetableId,
            values:
              answer.kind === "timetable"
                ? { kind: answer.kind, largestPct: answer.largestPct, boundPct: answer.boundPct }
                : { kind: answer.kind },
          },
        );
      });
    },
  );
}

/** What is lost to a limit that may not even be reached. */
const JUST_BELOW = 1 - 1e-6;

const comparatorOf = ({ ruleSetKey, ruleSetVersion: version, request }: Ordered) =>
  ruleSetVersion(ruleSetKey, version)?.criteria.find(({ id }) => id === request.goal)?.comparator ??
  "exceeds";

/** Whoever's dose at a task is not known can't be put there. */
const problemOf = (
  { request, basis }: Pick<Ordered, "request" | "basis">,
  comparator: Criterion["comparator"],
): TimetableProblem => ({
  slots: request.slots,
  mostShare: (request.mostPct / 100) * (comparator === "reaches" ? JUST_BELOW : 1),
  restShare: basis.rest.slotPct.map((pct) => pct / 100),
  share: basis.people.map((_, person) =>
    basis.tasks.map(({ slotPct }) => (slotPct[person] ?? 0) / 100),
  ),
  tasks: request.tasks.map(({ staffing, qualifiedIds, longestStay, longestTotal }, task) => ({
    staffing: [...staffing].sort((a, b) => a.from - b.from),
    isQualified: basis.people.map(
      ({ id }, person) =>
        basis.tasks[task]!.slotPct[person] !== null && (qualifiedIds?.includes(id) ?? true),
    ),
    longestStay,
    longestTotal,
  })),
});

function answerOf(
  searched: Searched,
  problem: TimetableProblem,
  ordered: Ordered,
): TimetableAnswer {
  switch (searched.kind) {
    case "undecided":
      return { kind: "undecided" };
    case "contradiction":
      return {
        kind: "contradiction",
        isSmallest: searched.isSmallest,
        demands: searched.demands.map((demand) =>
          demand.kind === "limit" ? { kind: "limit", people: [...demand.people] } : { ...demand },
        ),
      };
    case "timetable":
      return {
        kind: "timetable",
        table: searched.table.map((row) => [...row]),
        sharesPct: sharesOf(problem, searched.table).map((share) => 100 * share),
        largestPct: 100 * searched.largest,
        boundPct: 100 * searched.bound,
        outcome: outcomeOf(searched.table, ordered),
      };
  }
}

/** What the record's own engine makes of everybody's day: as it is, and with the timetable. */
function outcomeOf(
  table: readonly (readonly number[])[],
  { request, subject, ...rules }: Ordered,
): TimetableFound["outcome"] {
  const governing = ruleSetVersion(rules.ruleSetKey, rules.ruleSetVersion);
  if (!governing) throw new Error("a rule set in force has a version");
  const lengthMin = request.slots * SLOT_MIN;
  const days = subject.placed.map((person, place) => {
    const minutesAt = (task: number) =>
      SLOT_MIN * table[place]!.filter((one) => one === task).length;
    const tasks = request.tasks.map(({ taskId }, task) => ({
      taskId,
      durationMin: minutesAt(task),
    }));
    if (request.restTaskId !== null)
      tasks.push({ taskId: request.restTaskId, durationMin: minutesAt(REST) });
    return dayOf(
      person,
      tasks.filter(({ durationMin }) => durationMin > 0),
      lengthMin,
      subject,
      request,
    );
  });
  const before = judgeTried(tryChanges(subject.placed, [], subject), governing, request.goal);
  const after = judgeTried(days, governing, request.goal);
  return {
    workers: subject.placed.map(({ id, name, employeeNumber }, place) => ({
      workerId: id,
      workerName: name,
      employeeNumber,
      before: before[place]!,
      after: after[place]!,
    })),
  };
}
