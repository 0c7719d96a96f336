import type { DayFigures } from "../../shared/schemas/finding";
import { rows } from "../lib/db";
import {
  DAY_FIGURES_COLUMNS,
  type DayFiguresRow,
  presentDayFigures,
} from "../presenters/day-figures";

/** The current figures of these workers on a date. */
export async function dayFiguresOf(
  workerIds: readonly string[],
  date: string,
): Promise<Map<string, DayFigures>> {
  if (workerIds.length === 0) return new Map();
  const found = await rows<DayFiguresRow & { workerId: string }>(
    `SELECT d.worker_id AS "workerId", ${DAY_FIGURES_COLUMNS("r")}
     FROM days d JOIN day_results r ON r.id = d.current_result_id LEFT JOIN tasks k ON k.id = r.deciding_task_id
     WHERE d.worker_id = ANY (CAST(:ids AS uuid[])) AND d.date = :date`,
    { ids: `{${workerIds.join(",")}}`, date },
  );
  return new Map(found.map((row) => [row.workerId, presentDayFigures(row)]));
}
