import type { z } from "zod";
import { METHODS } from "../../shared/acoustics/methods";
import type { ResultView } from "../../shared/schemas/result";
import { row, rows } from "../lib/db";
import { notFound } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import { dayPolicy } from "../policies";
import {
  DAY_FIGURES_COLUMNS,
  type DayFiguresRow,
  presentDayFigures,
} from "../presenters/day-figures";
import { type DayRefs, hydrateDays, ruleSetsOf } from "./day-inputs";
import { wearingSeen, wearingSeenFrom } from "./own-attenuation";

interface Found extends DayFiguresRow {
  workerId: string;
  workerName: string;
  employeeNumber: string;
  timeZone: string;
  computedAt: Date;
  isCurrent: boolean;
  methodVersion: number;
  refs: DayRefs;
}

const SELECT_RESULT = `SELECT ${DAY_FIGURES_COLUMNS("r")}, r.worker_id AS "workerId", w.name AS "workerName", w.employee_number AS "employeeNumber", s.time_zone AS "timeZone",
    r.computed_at AS "computedAt", coalesce(d.current_result_id = r.id, FALSE) AS "isCurrent", r.method_version AS "methodVersion", r.refs
  FROM day_results r JOIN workers w ON w.id = r.worker_id JOIN sites s ON s.id = r.site_id LEFT JOIN days d ON d.worker_id = r.worker_id AND d.date = r.date`;

export async function resultOfDay(actor: Actor, workerId: string, date: string) {
  return view(
    await row<Found>(
      `${SELECT_RESULT} WHERE r.id = d.current_result_id AND r.worker_id = :workerId AND r.date = :date AND ${visible(dayPolicy, actor, "r")}`,
      { workerId, date },
    ),
  );
}

export async function storedResult(actor: Actor, id: string) {
  return view(
    await row<Found>(`${SELECT_RESULT} WHERE r.id = :id AND ${visible(dayPolicy, actor, "r")}`, {
      id,
    }),
  );
}

/** A result with its input built again from the revisions it names, and evaluated by the method version it names. */
async function view(found: Found | null): Promise<z.input<typeof ResultView>> {
  if (!found) throw notFound();
  const { workerId, date, refs, origin } = found;
  const isComputed = origin === "computed";
  const { governing, comparison } = ruleSetsOf(refs);
  const input = isComputed ? (await hydrateDays([{ workerId, date, refs }]))[0]! : null;
  const method = METHODS[found.methodVersion];
  if (isComputed && !method) throw new Error(`method version ${found.methodVersion} is not known`);
  const shifts = !isComputed
    ? []
    : await rows<z.input<typeof ResultView>["shifts"][number]>(
        `SELECT v.shift_id AS id, to_char(v.local_start, 'HH24:MI') AS "localStart", v.length_min AS "lengthMin", v.number AS revision, u.name AS "authorName", v.reason
     FROM shift_revisions v LEFT JOIN users u ON u.id = v.author_id WHERE v.id = ANY (CAST(:ids AS uuid[])) ORDER BY v.local_start`,
        { ids: `{${refs.shifts.map(({ revisionId }) => revisionId).join(",")}}` },
      );
  const levelIds = isComputed
    ? refs.shifts.flatMap(({ tasks }) => tasks.flatMap(({ levelId }) => (levelId ? [levelId] : [])))
    : [];
  const modelIds = isComputed
    ? refs.shifts.flatMap(({ tasks }) =>
        tasks.flatMap(({ use }) =>
          [use?.inner, use?.outer].filter((id): id is string => Boolean(id)),
        ),
      )
    : [];
  const roundIds = isComputed
    ? refs.shifts.flatMap(({ tasks }) =>
        tasks.flatMap(({ seenFrom = [] }) => seenFrom.map(([, roundId]) => roundId)),
      )
    : [];
  const sources = !isComputed
    ? []
    : await rows<{ id: string; label: string; note: string | null }>(
        `SELECT l.id, k.name || ', ' || l.effective_from AS label, nullif(l.source_note, '') AS note FROM task_levels l JOIN tasks k ON k.id = l.task_id WHERE l.id = ANY (CAST(:levelIds AS uuid[]))
     UNION ALL SELECT p.id, m.name || ', ' || p.number, p.reason FROM protector_model_revisions p JOIN protector_models m ON m.id = p.model_id WHERE p.id = ANY (CAST(:modelIds AS uuid[]))
     UNION ALL SELECT o.id, coalesce(u.name, ''), nullif(o.note, '') FROM wearing_rounds o LEFT JOIN users u ON u.id = o.author_id WHERE o.id = ANY (CAST(:roundIds AS uuid[]))`,
        {
          levelIds: `{${levelIds.join(",")}}`,
          modelIds: `{${modelIds.join(",")}}`,
          roundIds: `{${roundIds.join(",")}}`,
        },
      );
  const timedIds = isComputed
    ? refs.shifts.flatMap(({ tasks }) => tasks.flatMap(({ id, use }) => (use ? [id] : [])))
    : [];
  const findings = await rows<{ id: string; kind: string; state: string }>(
    "SELECT f.id, f.kind, f.state FROM finding_evidence e JOIN findings f ON f.id = e.finding_id WHERE e.worker_id = :workerId AND e.date = :date ORDER BY f.opened_at",
    { workerId, date },
  );
  const earlier = await rows<
    DayFiguresRow & { computedAt: Date; isCurrent: boolean; methodVersion: number }
  >(
    `SELECT ${DAY_FIGURES_COLUMNS("r")}, r.computed_at AS "computedAt", coalesce(d.current_result_id = r.id, FALSE) AS "isCurrent", r.method_version AS "methodVersion"
     FROM day_results r LEFT JOIN days d ON d.worker_id = r.worker_id AND d.date = r.date
     WHERE r.worker_id = :workerId AND r.date = :date AND r.id <> :id ORDER BY r.computed_at DESC LIMIT 20`,
    { workerId, date, id: found.resultId },
  );
  return {
    id: found.resultId,
    worker: { id: workerId, name: found.workerName, employeeNumber: found.employeeNumber },
    date,
    timeZone: found.timeZone,
    shifts,
    figures: presentDayFigures(found),
    origin,
    computedAt: found.computedAt.toISOString(),
    isCurrent: found.isCurrent,
    methodVersion: found.methodVersion,
    governing: { key: governing.key, version: governing.version },
    comparison: comparison.map(({ key, version }) => ({ key, version })),
    input,
    evaluation: input && method ? method.evaluateDay(input, governing, comparison) : null,
    sources: Object.fromEntries(sources.map(({ id, label, note }) => [id, { label, note }])),
    findings,
    wearingSeen: await wearingThatDiffers(workerId, date, timedIds),
    earlier: earlier.map((one) => {
      const figures = presentDayFigures(one);
      return {
        id: figures.resultId,
        computedAt: one.computedAt.toISOString(),
        isCurrent: one.isCurrent,
        governingRuleSet: figures.ruleSetKey,
        ruleSetVersion: figures.ruleSetVersion,
        methodVersion: one.methodVersion,
        figures,
      };
    }),
  };
}

/** Less of a difference is within what a few looks can tell, percentage points. Common practice, no source. */
const DIFFERS_FROM_PCT = 10;

/** Tasks whose stated wearing time is not what the rounds of that time saw, or the worker said. */
function wearingThatDiffers(
  workerId: string,
  date: string,
  timedIds: readonly string[],
): Promise<ResultView["wearingSeen"]> {
  return rows<ResultView["wearingSeen"][number]>(
    `SELECT x."taskId", x."taskName", x."statedPct", (x.seen->>0)::int AS "wornCount", (x.seen->>1)::int AS "seenCount",
       CASE WHEN NOT x.sources @> '[["own-report"]]' THEN 'rounds' WHEN x.sources @> '[["round"]]' THEN 'both' ELSE 'own-reports' END AS "from"
     FROM (SELECT DISTINCT t.task_id AS "taskId", k.name AS "taskName", t.worn_pct AS "statedPct",
         ${wearingSeen("CAST(:workerId AS uuid)", "t.task_id", "CAST(:date AS date)")}::jsonb AS seen,
         ${wearingSeenFrom("CAST(:workerId AS uuid)", "t.task_id", "CAST(:date AS date)")}::jsonb AS sources
       FROM shift_tasks t JOIN tasks k ON k.id = t.task_id
       WHERE t.id = ANY (CAST(:timedIds AS uuid[])) AND t.worn_pct IS NOT NULL) x
     WHERE x.seen IS NOT NULL AND abs(100.0 * (x.seen->>0)::int / (x.seen->>1)::int - x."statedPct") > ${DIFFERS_FROM_PCT}
     ORDER BY x."taskName"`,
    { workerId, date, timedIds: `{${timedIds.join(",")}}` },
  );
}
