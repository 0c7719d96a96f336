import type { z } from "zod";
import { METHODS } from "../../shared/acoustics/methods";
import { decidingTask } from "../../shared/acoustics/protection/adequacy";
import { levelOf, mainLimit, ruleSetVersion } from "../../shared/rule-sets";
import type { HistoryFilter, HistoryPage } from "../../shared/schemas/worker";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { type Actor, visible } from "../lib/policy";
import { dayPolicy } from "../policies";
import {
  DAY_FIGURES_COLUMNS,
  type DayFiguresRow,
  presentDayFigures,
} from "../presenters/day-figures";
import { type DayRefs, hydrateDays, ruleSetsOf } from "./day-inputs";

type HistoryRow = z.input<typeof HistoryPage>["rows"][number];

function underItsRules(row: DayFiguresRow): Pick<HistoryRow, "limit" | "kindsOver"> {
  const ruleSet = ruleSetVersion(row.ruleSetKey, row.ruleSetVersion);
  if (!ruleSet) return { limit: null, kindsOver: [] };
  const limit = mainLimit(ruleSet);
  const over = row.governingCriteria.filter(({ verdict }) => verdict === "over");
  return {
    limit: { levelDb: levelOf(limit), isAtEar: limit.judged === "at-the-ear" },
    kindsOver: [
      ...new Set(
        ruleSet.criteria
          .filter(({ id }) => over.some(({ criterionId }) => criterionId === id))
          .map(({ kind }) => kind),
      ),
    ],
  };
}

/** A worker's days with their current results, latest first, as far as the actor may see them. */
export async function workerHistory(
  actor: Actor,
  workerId: string,
  filter: z.output<typeof HistoryFilter>,
): Promise<z.input<typeof HistoryPage>> {
  const before = decodeCursor(filter.cursor, 1)?.[0];
  const conditions = ["d.worker_id = :workerId", visible(dayPolicy, actor, "d")];
  if (filter.from) conditions.push("d.date >= :from");
  if (filter.to) conditions.push("d.date <= :to");
  if (before) conditions.push("d.date < CAST(:before AS date)");
  const found = await rows<
    DayFiguresRow & { shiftMin: number; isStale: boolean; endsAt: Date | null }
  >(
    `SELECT ${DAY_FIGURES_COLUMNS("r")}, r.shift_min AS "shiftMin", d.is_stale AS "isStale",
       (SELECT max(s.ends_at) FROM shifts s WHERE s.worker_id = d.worker_id AND s.date = d.date AND NOT s.is_void) AS "endsAt"
     FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE ${conditions.join(" AND ")} ORDER BY d.date DESC LIMIT :limit`,
    { workerId, from: filter.from, to: filter.to, before, limit: filter.limit + 1 },
  );
  const [latest] = found;
  const wordsByUse =
    actor.workerId === workerId && before === undefined && latest
      ? await wordsOfDay(workerId, latest)
      : [];
  return pageFrom(
    found.map((row) => ({
      ...presentDayFigures(row),
      shiftMin: row.shiftMin,
      isStale: row.isStale,
      // An imported day is no account of a shift's hours.
      endsAt: row.origin === "computed" ? (row.endsAt?.toISOString() ?? null) : null,
      ...underItsRules(row),
      wordsByUse: row === latest ? wordsByUse : [],
    })),
    filter.limit,
    ({ date }) => [date],
  );
}

/** A day evaluated again for the word of each protector in the tasks of its use; where a rule judges the shift, the day's. */
async function wordsOfDay(
  workerId: string,
  { resultId, date, origin, word }: DayFiguresRow,
): Promise<HistoryRow["wordsByUse"]> {
  if (origin !== "computed") return [];
  const found = await row<{ refs: DayRefs; methodVersion: number }>(
    `SELECT refs, method_version AS "methodVersion" FROM day_results WHERE id = :resultId`,
    { resultId },
  );
  const method = found && METHODS[found.methodVersion];
  if (!method) return [];
  const [input] = await hydrateDays([{ workerId, date, refs: found.refs }]);
  if (!input) return [];
  const { governing } = ruleSetsOf(found.refs);
  const judged = new Map(
    method.evaluateDay(input, governing, []).tasks.map((task) => [task.timedTaskId, task]),
  );
  const worn = input.shifts
    .flatMap(({ tasks }) => tasks)
    .flatMap(({ id, protection }) => {
      const task = judged.get(id);
      return protection?.assignmentId && task?.isWorn
        ? [{ assignmentId: protection.assignmentId, task }]
        : [];
    });
  return [...groupBy(worn, ({ assignmentId }) => assignmentId)].map(([assignmentId, own]) => ({
    assignmentId,
    word:
      governing.protection.adequacy === "en-458"
        ? (decidingTask(own.map(({ task }) => task))?.word ?? null)
        : word,
  }));
}
