import { createHash } from "node:crypto";
import { evaluateDay } from "../../shared/acoustics/day";
import { METHOD_VERSION } from "../../shared/acoustics/methods";
import type { DayEvaluation, DayInput, RuleSetVersion } from "../../shared/acoustics/types";
import { RESULT_COLUMNS, resultFacts } from "../../shared/day/result-facts";
import { findCauses } from "../../shared/findings/causes";
import { canonicalJson } from "../lib/audit";
import { execute, rows } from "../lib/db";
import {
  type DayKey,
  type DayRefs,
  hydrateDays,
  type ResolvedDay,
  resolveDays,
  ruleSetsOf,
} from "../queries/day-inputs";
import { type DayCauses, type OpenedFinding, updateFindings } from "./update-findings";

export interface RecomputedDay extends DayKey {
  resultId: string | null;
  /** The result is another one than before. */
  isChanged: boolean;
}

export interface Recomputation {
  days: RecomputedDay[];
  opened: OpenedFinding[];
}

/**
 * Computes days from their inputs as they stand and moves each day's pointer to the result. The same inputs give the
 * same result row, so running it again changes nothing. The days are locked in one order: two runs never deadlock, and
 * the later one sees the inputs of the earlier.
 */
export async function recomputeDays(
  organizationId: string,
  keys: readonly DayKey[],
): Promise<Recomputation> {
  if (keys.length === 0) return { days: [], opened: [] };
  const days = JSON.stringify(keys.map(({ workerId, date }) => ({ workerId, date })));
  const heads = await rows<DayKey & { currentResultId: string | null }>(
    `SELECT d.worker_id AS "workerId", d.date::text AS date, d.current_result_id AS "currentResultId"
     FROM days d JOIN jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date) ON x."workerId" = d.worker_id AND x.date = d.date
     ORDER BY d.worker_id, d.date FOR UPDATE OF d`,
    [days],
  );
  const resolved = await resolveDays(heads);
  const inputs = await hydrateDays(resolved);
  const computed = resolved.map((day, index) => computeDay(day, inputs[index]!));
  const resultIds = await storeResults(organizationId, computed);

  // A day without a shift keeps what was imported for it.
  const imported = await importedResults(heads.filter((head) => !resultIds.has(keyOf(head))));

  const before = new Map(heads.map((head) => [keyOf(head), head.currentResultId]));
  const after = heads.map((head): RecomputedDay => {
    const resultId = resultIds.get(keyOf(head)) ?? imported.get(keyOf(head)) ?? null;
    return {
      workerId: head.workerId,
      date: head.date,
      resultId,
      isChanged: before.get(keyOf(head)) !== resultId,
    };
  });
  const computedOf = new Map(computed.map((one) => [keyOf(one.day), one]));
  await execute(
    `UPDATE days d SET current_result_id = x."resultId", is_stale = FALSE, site_id = coalesce(x."siteId", d.site_id), crew_id = coalesce(x."crewId", d.crew_id)
     FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date, "resultId" uuid, "siteId" uuid, "crewId" uuid)
     WHERE d.worker_id = x."workerId" AND d.date = x.date`,
    [
      JSON.stringify(
        after.map((day) => ({
          ...day,
          siteId: computedOf.get(keyOf(day))?.day.siteId,
          crewId: computedOf.get(keyOf(day))?.day.crewId,
        })),
      ),
    ],
  );

  const causes = after.map((day): DayCauses => {
    const found = computedOf.get(keyOf(day));
    return {
      workerId: day.workerId,
      date: day.date,
      resultId: day.resultId,
      siteId: found?.day.siteId ?? null,
      jobId: found?.day.jobId ?? null,
      causes: found ? findCauses(found.input, found.evaluation, found.governing) : [],
      input: found?.input ?? null,
      governing: found?.governing ?? null,
    };
  });
  const opened = await updateFindings(organizationId, causes);
  return { days: after, opened };
}

const keyOf = ({ workerId, date }: DayKey) => `${workerId} ${date}`;

async function importedResults(days: readonly DayKey[]): Promise<Map<string, string>> {
  if (days.length === 0) return new Map();
  const found = await rows<DayKey & { id: string }>(
    `SELECT DISTINCT ON (d.worker_id, d.date) d.worker_id AS "workerId", d.date::text AS date, r.id
     FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date)
     JOIN days d ON d.worker_id = x."workerId" AND d.date = x.date
     JOIN day_results r ON r.worker_id = d.worker_id AND r.date = d.date AND r.origin = 'imported'
     ORDER BY d.worker_id, d.date, (r.id = d.current_result_id) DESC NULLS LAST, r.computed_at DESC`,
    [JSON.stringify(days.map(({ workerId, date }) => ({ workerId, date })))],
  );
  return new Map(found.map((row) => [keyOf(row), row.id]));
}

interface ComputedDay {
  day: ResolvedDay;
  input: DayInput;
  evaluation: DayEvaluation;
  governing: RuleSetVersion;
  hash: string;
}

function computeDay(day: ResolvedDay, input: DayInput): ComputedDay {
  const { governing, comparison } = ruleSetsOf(day.refs);
  const evaluation = evaluateDay(input, governing, comparison);
  return { day, input, evaluation, governing, hash: hashOf(day.refs) };
}

/** Names what a result rests on: input revisions, rule-set versions, method version. */
export function hashOf(refs: DayRefs, methodVersion: number = METHOD_VERSION): string {
  return createHash("sha256").update(canonicalJson({ refs, methodVersion })).digest("hex");
}

const resultColumns = Object.keys(RESULT_COLUMNS).join(", ");
const resultMembers = Object.values(RESULT_COLUMNS);
const headMembers = resultMembers.filter(([name]) => name !== "criteria");

async function storeResults(
  organizationId: string,
  computed: readonly ComputedDay[],
): Promise<Map<string, string>> {
  if (computed.length === 0) return new Map();
  const records = computed.map(({ day, input, evaluation, governing, hash }) => {
    const { criteria, ...facts } = resultFacts(input, evaluation, governing);
    const { workerId, siteId, refs } = day;
    return { head: { ...facts, workerId, siteId, hash }, criteria, refs };
  });
  // The two long members go beside the rest, a line each (JSON has no line break in it): the database takes them apart only once.
  const added = await rows<DayKey & { id: string }>(
    `INSERT INTO day_results (organization_id, site_id, worker_id, date, origin, inputs_hash, refs, ${resultColumns})
     SELECT $1, x."siteId", x."workerId", x.date, 'computed', decode(x.hash, 'hex'), x.refs::jsonb, ${resultMembers.map(([name]) => (name === "criteria" ? "x.criteria::jsonb" : `x."${name}"`)).join(", ")}
     FROM ROWS FROM (
       jsonb_to_recordset($2::jsonb) AS ("siteId" uuid, "workerId" uuid, date date, hash text, ${headMembers.map(([name, type]) => `"${name}" ${type}`).join(", ")}),
       string_to_table($3, chr(10)), string_to_table($4, chr(10))) AS x("siteId", "workerId", date, hash, ${headMembers.map(([name]) => `"${name}"`).join(", ")}, criteria, refs)
     ON CONFLICT (worker_id, date, inputs_hash) DO NOTHING RETURNING worker_id AS "workerId", date::text AS date, id`,
    [
      organizationId,
      JSON.stringify(records.map(({ head }) => head)),
      records.map(({ criteria }) => JSON.stringify(criteria)).join("\n"),
      records.map(({ refs }) => JSON.stringify(refs)).join("\n"),
    ],
  );
  const isAdded = new Set(added.map(keyOf));
  const known = records.flatMap(({ head: { workerId, date, hash } }) =>
    isAdded.has(keyOf({ workerId, date })) ? [] : [{ workerId, date, hash }],
  );
  const stored = known.length === 0 ? added : [...added, ...(await storedResults(known))];
  return new Map(stored.map((row) => [keyOf(row), row.id]));
}

async function storedResults(
  known: readonly (DayKey & { hash: string })[],
): Promise<(DayKey & { id: string })[]> {
  return rows<DayKey & { id: string }>(
    `SELECT r.worker_id AS "workerId", r.date::text AS date, r.id
     FROM jsonb_to_recordset($1::jsonb) AS x("workerId" uuid, date date, hash text)
     JOIN day_results r ON r.worker_id = x."workerId" AND r.date = x.date AND r.inputs_hash = decode(x.hash, 'hex')`,
    [JSON.stringify(known)],
  );
}
