import { createHash } from "node:crypto";
import { z } from "zod";
import type { RuleSetVersion } from "../../shared/acoustics/types";
import { judgeImported } from "../../shared/day/judge-imported";
import { headline } from "../../shared/day/summarize-day";
import { ruleSetInForce } from "../../shared/rule-sets";
import { LevelDb } from "../../shared/schemas/common";
import { GradeName } from "../../shared/schemas/evaluation";
import { employmentIssues, futureIssues, lockWorkers } from "../commands/check-shift";
import { canonicalJson } from "../lib/audit";
import { todayAt } from "../lib/calendar";
import { execute, rows } from "../lib/db";
import type { Actor } from "../lib/policy";
import type { Site } from "../models/site";
import type { DayRefs } from "../queries/day-inputs";
import { crewOn, workersByNumber } from "../queries/import-lookups";
import { Cells } from "./cells";
import { IMPORT_COLUMNS } from "./columns";
import { type ImportDraft, toProblemIssue } from "./import-draft";
import type { CsvFile, CsvLine } from "./read-csv";

/** Of no arithmetic of this program. */
const IMPORTED_METHOD = 0;
const BATCH = 2000;

const PastResult = z.object({
  levelDb: LevelDb.nullable(),
  atEarDb: z.number().min(0).max(160).nullable(),
  lengthMin: z.number().positive().max(4320),
  grade: GradeName,
});
const columnOf: Record<string, string> = {
  levelDb: "level_db",
  atEarDb: "at_ear_db",
  lengthMin: "length_min",
  grade: "grade",
};

interface PastDay extends z.infer<typeof PastResult> {
  line: CsvLine;
  workerId: string;
  date: string;
  ruleSet: RuleSetVersion;
}

/** What a file of past years' levels would do. A day that was computed here is never replaced by one that was not. */
export async function draftPastResults(
  actor: Actor,
  site: Site,
  file: CsvFile,
  reason: string | null,
): Promise<ImportDraft> {
  const cells = new Cells(file, IMPORT_COLUMNS["past-results"]);
  const workers = await workersByNumber(
    site.id,
    file.lines.map(({ cells: of }) => of.get("employee_number") ?? ""),
  );
  const today = todayAt(site.timeZone);
  const seen = new Map<string, number>();
  const days = file.lines.flatMap((line): PastDay[] => {
    const number = cells.needed(line, "employee_number");
    const worker = number === null ? undefined : workers.get(number);
    if (number !== null && !worker) cells.refuse(line, "employee_number", "worker-unknown");
    const date = cells.date(line, "date");
    const key = cells.needed(line, "rule_set");
    const ruleSet = key !== null && date !== null ? ruleSetInForce(key, date) : undefined;
    if (key !== null && date !== null && !ruleSet)
      cells.refuse(line, "rule_set", "rule-set-not-in-force", { key, date });
    const grade =
      cells.choice(line, "grade", GradeName.options) ??
      (line.cells.get("grade") ? null : cells.refuse(line, "grade", "empty"));
    const given = {
      levelDb: cells.number(line, "level_db"),
      atEarDb: cells.number(line, "at_ear_db"),
      lengthMin: cells.neededNumber(line, "length_min"),
      grade,
    };
    if (given.levelDb === null && given.atEarDb === null && !cells.isRefused(line, "at_ear_db"))
      cells.refuse(line, "level_db", "empty");
    const parsed = PastResult.safeParse(given);
    for (const { path, code, params } of parsed.error?.issues.map(toProblemIssue) ?? [])
      cells.refuseUnlessRefused(line, columnOf[String(path[0])] ?? "", code, params);
    for (const { path, code, params } of [
      ...(worker && date ? employmentIssues(date, worker) : []),
      ...(date ? futureIssues(date, today) : []),
    ])
      cells.refuseUnlessRefused(line, String(path[0]), code, params);
    if (!worker || date === null) return [];
    const earlier = seen.get(`${worker.id} ${date}`);
    if (earlier !== undefined) cells.refuse(line, "date", "day-twice", { line: earlier });
    seen.set(`${worker.id} ${date}`, line.line);
    return parsed.success && ruleSet
      ? [{ ...parsed.data, line, workerId: worker.id, date, ruleSet }]
      : [];
  });

  await lockWorkers([...new Set(days.map(({ workerId }) => workerId))]);
  const known = await knownDays(days);
  const drafts = days.map((day) => {
    const now = known.get(`${day.workerId} ${day.date}`);
    if (now?.isComputed) cells.refuse(day.line, "date", "day-computed-already");
    const hash = hashOf(day);
    return {
      ...day,
      hash,
      state:
        now?.importedHash == null
          ? ("fresh" as const)
          : now.importedHash === hash
            ? ("unchanged" as const)
            : ("changed" as const),
    };
  });
  const good = drafts.filter(({ line }) => cells.areGood([line]));
  if (reason === null) {
    for (const { line, state } of drafts)
      if (state === "changed") cells.refuse(line, "", "reason-missing");
  }
  const crewOf = await crewOn(
    site.id,
    days.map(({ workerId }) => workerId),
  );
  const count = (state: (typeof drafts)[number]["state"]) =>
    good.filter((one) => one.state === state).length;
  return {
    fresh: count("fresh"),
    changed: count("changed"),
    unchanged: count("unchanged"),
    days,
    issues: cells.issues,
    store: async () => {
      const records = drafts
        .filter(({ state }) => state !== "unchanged")
        .map((day) => ({
          ...recordOf(day),
          hash: day.hash,
          crewId: crewOf(day.workerId, day.date),
        }));
      for (let from = 0; from < records.length; from += BATCH)
        await storePastResults(actor.organizationId, site.id, records.slice(from, from + BATCH));
      // Nothing is to be computed.
      return [];
    },
  };
}

/** Names what an imported result says, as that of a computed one names its inputs. */
function hashOf({ levelDb, atEarDb, lengthMin, grade, ruleSet }: PastDay): string {
  const facts = {
    origin: "imported",
    levelDb,
    atEarDb,
    lengthMin,
    grade,
    ruleSet: [ruleSet.key, ruleSet.version],
  };
  return createHash("sha256").update(canonicalJson(facts)).digest("hex");
}

function recordOf({ workerId, date, levelDb, atEarDb, lengthMin, grade, ruleSet }: PastDay) {
  const results = judgeImported({ outsideDb: levelDb, atEarDb }, ruleSet);
  const isLevel = new Set(
    ruleSet.criteria
      .filter(({ quantity }) => ["lex-8h", "dose", "table-dose"].includes(quantity))
      .map(({ id }) => id),
  );
  const verdictOn = (judged: "without-protection" | "at-the-ear") =>
    headline(
      results.filter((result) => result.judged === judged && isLevel.has(result.criterionId)),
    );
  const refs: Pick<DayRefs, "governing" | "comparison" | "shifts"> = {
    governing: [ruleSet.key, ruleSet.version],
    comparison: [],
    shifts: [],
  };
  return {
    workerId,
    date,
    ruleSetKey: ruleSet.key,
    ruleSetVersion: ruleSet.version,
    shiftMin: lengthMin,
    grade,
    outsideDb: levelDb,
    atEarDb,
    verdictOutside: verdictOn("without-protection"),
    verdictAtEar: verdictOn("at-the-ear"),
    criteria: { governing: results, comparison: [] },
    refs,
  };
}

async function knownDays(days: readonly PastDay[]) {
  const found = await rows<{
    workerId: string;
    date: string;
    isComputed: boolean;
    importedHash: string | null;
  }>(
    `SELECT x."workerId", x.date::text AS date,
       coalesce(r.origin = 'computed', FALSE) OR EXISTS (SELECT 1 FROM shifts s WHERE s.worker_id = x."workerId" AND s.date = x.date AND NOT s.is_void) AS "isComputed",
       CASE WHEN r.origin = 'imported' THEN encode(r.inputs_hash, 'hex') END AS "importedHash"
     FROM jsonb_to_recordset(CAST(:days AS jsonb)) AS x("workerId" uuid, date date)
     LEFT JOIN days d ON d.worker_id = x."workerId" AND d.date = x.date LEFT JOIN day_results r ON r.id = d.current_result_id`,
    { days: JSON.stringify(days.map(({ workerId, date }) => ({ workerId, date }))) },
  );
  return new Map(found.map((day) => [`${day.workerId} ${day.date}`, day]));
}

type PastRecord = ReturnType<typeof recordOf> & { hash: string; crewId: string | null };

async function storePastResults(
  organizationId: string,
  siteId: string,
  records: readonly PastRecord[],
): Promise<void> {
  const json = JSON.stringify(records);
  const columns = `AS x("workerId" uuid, date date, hash text, "ruleSetKey" text, "ruleSetVersion" int, "shiftMin" float8, grade text, "outsideDb" float8,
    "atEarDb" float8, "verdictOutside" text, "verdictAtEar" text, criteria jsonb, refs jsonb, "crewId" uuid)`;
  await execute(
    `INSERT INTO day_results (organization_id, site_id, worker_id, date, origin, governing_rule_set, governing_version, method_version, inputs_hash, shift_min,
       unaccounted_min, grade, outside_db, outside_bound, at_ear_db, verdict_outside, verdict_at_ear, has_protector, reason, criteria, refs)
     SELECT $1, $2, x."workerId", x.date, 'imported', x."ruleSetKey", x."ruleSetVersion", ${IMPORTED_METHOD}, decode(x.hash, 'hex'), x."shiftMin",
       0, x.grade, x."outsideDb", 'exact', x."atEarDb", x."verdictOutside", x."verdictAtEar", 'unknown', 'imported', x.criteria, x.refs
     FROM jsonb_to_recordset($3::jsonb) ${columns} ON CONFLICT (worker_id, date, inputs_hash) DO NOTHING`,
    [organizationId, siteId, json],
  );
  await execute(
    `INSERT INTO days (organization_id, worker_id, date, site_id, crew_id, current_result_id, is_stale)
     SELECT $1, x."workerId", x.date, $2, x."crewId", r.id, FALSE FROM jsonb_to_recordset($3::jsonb) ${columns}
     JOIN day_results r ON r.worker_id = x."workerId" AND r.date = x.date AND r.inputs_hash = decode(x.hash, 'hex')
     ON CONFLICT (worker_id, date) DO UPDATE SET current_result_id = excluded.current_result_id, site_id = excluded.site_id, is_stale = FALSE`,
    [organizationId, siteId, json],
  );
}
