import type { DayFigures } from "../../shared/schemas/finding";

/** Columns of a `day_results` row that make up its figures; the deciding task's name comes with them. */
export const DAY_FIGURES_COLUMNS = (
  r: string,
) => `${r}.id AS "resultId", ${r}.date::text AS date, ${r}.origin,
  ${r}.outside_db AS "outsideDb", ${r}.outside_bound AS "outsideBound", coalesce(${r}.at_ear_counted_db, ${r}.at_ear_db) AS "atEarDb",
  CASE WHEN ${r}.at_ear_counted_db IS NOT NULL THEN ${r}.at_ear_db END AS "atEarOffDb",
  coalesce(${r}.at_ear_bound, CASE WHEN ${r}.has_protector = 'no' THEN ${r}.outside_bound ELSE 'exact' END) AS "atEarBound", ${r}.own_target_db AS "ownTargetDb",
  ${r}.at_ear_active_db AS "atEarActiveDb", ${r}.at_ear_as_worked_db AS "atEarAsWorkedDb",
  ${r}.uncertainty_db AS "uncertaintyDb", ${r}.while_worn_db AS "whileWornDb", coalesce(${r}.while_worn_bound, 'exact') AS "whileWornBound",
  ${r}.verdict_outside AS "verdictOutside", ${r}.verdict_at_ear AS "verdictAtEar", ${r}.word,
  (SELECT k.name FROM tasks k WHERE k.id = ${r}.deciding_task_id) AS "decidingTaskName",
  ${r}.has_protector AS "hasProtector", ${r}.reason, ${r}.governing_rule_set AS "ruleSetKey",
  ${r}.governing_version AS "ruleSetVersion", ${r}.criteria->'governing' AS "governingCriteria"`;

export type DayFiguresRow = DayFigures;
/** The same columns of an outer join. */
export type MaybeDayFiguresRow = { [Name in keyof DayFigures]: DayFigures[Name] | null };

export function presentDayFigures(row: DayFiguresRow): DayFigures {
  return {
    resultId: row.resultId,
    date: row.date,
    origin: row.origin,
    outsideDb: row.outsideDb,
    outsideBound: row.outsideBound,
    atEarDb: row.atEarDb,
    atEarOffDb: row.atEarOffDb,
    atEarBound: row.atEarBound,
    atEarActiveDb: row.atEarActiveDb,
    atEarAsWorkedDb: row.atEarAsWorkedDb,
    uncertaintyDb: row.uncertaintyDb,
    whileWornDb: row.whileWornDb,
    whileWornBound: row.whileWornBound,
    verdictOutside: row.verdictOutside,
    verdictAtEar: row.verdictAtEar,
    word: row.word,
    decidingTaskName: row.decidingTaskName,
    hasProtector: row.hasProtector,
    reason: row.reason,
    ownTargetDb: row.ownTargetDb,
    ruleSetKey: row.ruleSetKey,
    ruleSetVersion: row.ruleSetVersion,
    governingCriteria: row.governingCriteria.map(
      ({ criterionId, verdict, isClear, levelDb, dosePct, bound, reason }) => ({
        criterionId,
        verdict,
        isClear,
        levelDb,
        dosePct,
        bound,
        reason,
      }),
    ),
  };
}

export function presentDayFiguresIfAny(row: MaybeDayFiguresRow): DayFigures | null {
  return row.resultId === null ? null : presentDayFigures(row as DayFiguresRow);
}
