import type { HistoryIssue, HistoryReport } from "../../shared/schemas/history";
import { localDate } from "../../shared/time/zone";
import { rows } from "../lib/db";
import { isoInstant } from "../lib/sql-instant";
import { facedShift } from "./faced-shifts";

export interface ImportedFor {
  instrumentId: string;
  runId: string | null;
  workerId: string | null;
  timeZone: string;
}

/** A history reaches this far beyond a shift before it is asked about: an instrument is put on early and taken off late. */
const BEYOND_MIN = 30;

const told = (
  severity: HistoryIssue["severity"],
  code: string,
  params: HistoryIssue["params"] = {},
): HistoryIssue => ({ line: 0, column: null, code, params, severity });

/** What a file's times say beside what is recorded: another history, a run, the worker's shifts. */
export async function checkAgainstRecords(
  { instrumentId, runId, workerId, timeZone }: ImportedFor,
  { startsAt, endsAt }: Pick<HistoryReport, "startsAt" | "endsAt">,
): Promise<HistoryIssue[]> {
  if (startsAt === null || endsAt === null) return [];
  const issues: HistoryIssue[] = [];
  if (Date.parse(endsAt) > Date.now() + 120_000)
    issues.push(told("refused", "in-the-future", { endsAt }));
  const others = await rows<{ id: string; startsAt: string; endsAt: string; fileName: string }>(
    `SELECT h.id, ${isoInstant("lower(h.span)")} AS "startsAt", ${isoInstant("upper(h.span)")} AS "endsAt", f.name AS "fileName"
     FROM time_histories h JOIN files f ON f.id = h.file_id
     WHERE h.instrument_id = :instrumentId AND NOT h.is_void AND h.span && tstzrange(CAST(:startsAt AS timestamptz), CAST(:endsAt AS timestamptz)) ORDER BY h.span LIMIT 5`,
    { instrumentId, startsAt, endsAt },
  );
  for (const { id, ...other } of others)
    issues.push(told("refused", "overlaps-history", { historyId: id, ...other }));
  if (runId !== null) {
    const [run] = await rows<{
      date: string;
      isOut: boolean;
      isVoid: boolean;
      from: string | null;
      to: string | null;
      historyId: string | null;
    }>(
      `SELECT r.date::text AS date, r.is_out AS "isOut", r.is_void AS "isVoid", ${isoInstant("lower(r.span)")} AS "from", ${isoInstant("upper(r.span)")} AS "to",
         (SELECT h.id FROM time_histories h WHERE h.run_id = r.id AND NOT h.is_void) AS "historyId" FROM runs r WHERE r.id = :runId`,
      { runId },
    );
    if (run?.historyId)
      issues.push(told("refused", "run-has-history", { historyId: run.historyId }));
    if (run?.isOut) issues.push(told("refused", "run-is-out"));
    if (run?.isVoid) issues.push(told("refused", "run-is-void"));
    const toleranceMs = BEYOND_MIN * 60_000;
    const isOutside =
      run?.from && run.to
        ? Date.parse(startsAt) < Date.parse(run.from) - toleranceMs ||
          Date.parse(endsAt) > Date.parse(run.to) + toleranceMs
        : run?.date !== undefined && localDate(new Date(startsAt), timeZone) !== run.date;
    if (isOutside) issues.push(told("asked", "outside-run", { date: run?.date ?? "" }));
  } else {
    const runs = await rows<{ id: string; from: string; to: string }>(
      `SELECT r.id, ${isoInstant("lower(r.span)")} AS "from", coalesce(${isoInstant("upper(r.span)")}, '') AS "to" FROM runs r
       WHERE r.instrument_id = :instrumentId AND NOT r.is_void AND r.span && tstzrange(CAST(:startsAt AS timestamptz), CAST(:endsAt AS timestamptz)) LIMIT 5`,
      { instrumentId, startsAt, endsAt },
    );
    for (const { id, from, to } of runs)
      issues.push(told("refused", "overlaps-run", { runId: id, from, to }));
  }
  if (workerId !== null) issues.push(...(await checkShifts(workerId, startsAt, endsAt, timeZone)));
  return issues;
}

/** Wholly beside the shift that the worker had on that day, or usually has. */
async function checkOutside(
  workerId: string,
  startsAt: string,
  endsAt: string,
  timeZone: string,
): Promise<HistoryIssue[]> {
  const date = localDate(new Date(startsAt), timeZone);
  const shift = await facedShift({ workerId, date, span: { from: startsAt, to: endsAt } });
  return shift?.insideMin === 0
    ? [told("asked", "outside-shift", { from: shift.from, to: shift.to })]
    : [];
}

async function checkShifts(
  workerId: string,
  startsAt: string,
  endsAt: string,
  timeZone: string,
): Promise<HistoryIssue[]> {
  const shifts = await rows<{ startsAt: string; endsAt: string }>(
    `SELECT ${isoInstant("starts_at")} AS "startsAt", ${isoInstant("ends_at")} AS "endsAt" FROM shifts
     WHERE worker_id = :workerId AND NOT is_void AND starts_at < CAST(:endsAt AS timestamptz) AND ends_at > CAST(:startsAt AS timestamptz) ORDER BY starts_at`,
    { workerId, startsAt, endsAt },
  );
  const [first] = shifts;
  const last = shifts.at(-1);
  if (!first || !last) return checkOutside(workerId, startsAt, endsAt, timeZone);
  if (shifts.length > 1) return [told("asked", "spans-shifts", { count: shifts.length })];
  const beforeMin = (Date.parse(first.startsAt) - Date.parse(startsAt)) / 60_000;
  const afterMin = (Date.parse(endsAt) - Date.parse(last.endsAt)) / 60_000;
  // Worn on into another's shift: the levels after the end are somebody else's.
  return beforeMin > BEYOND_MIN || afterMin > BEYOND_MIN
    ? [
        told("asked", "beyond-shift", {
          startsAt: first.startsAt,
          endsAt: last.endsAt,
          beforeMin: Math.max(0, beforeMin),
          afterMin: Math.max(0, afterMin),
        }),
      ]
    : [];
}
