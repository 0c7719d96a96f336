import type { z } from "zod";
import type {
  YearReportFigures,
  YearReportFilter,
  YearReportPage,
  YearReportRow,
} from "../../shared/schemas/report";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { notFound } from "../lib/errors";
import { only } from "../lib/only";
import { isOverdueFinding } from "../lib/overdue";
import { type Actor, abilities, visible } from "../lib/policy";
import { dayPolicy, findingPolicy, yearReportPolicy } from "../policies";
import {
  IN_NOISE_DB,
  isNotAssessed,
  judgesAtEar,
  type YearOfSite,
  yearDays,
  yearGaps,
} from "./gaps";

/** Width of a step of the histogram, dB. */
const STEP_DB = 2;

const verdicts = (line: string, condition = "TRUE") =>
  `json_build_object(${[
    ["under", "under"],
    ["over", "over"],
    ["cantTell", "cant-tell-yet"],
    ["notAssessed", "not-assessed"],
  ]
    .map(
      ([name, verdict]) =>
        `'${name}', count(*) FILTER (WHERE d.${line} = '${verdict}' AND ${condition})`,
    )
    .join(", ")})`;

/** One person over the days `d` that they are grouped by. */
export const PERSON_OF_DAYS = `coalesce(bool_or(d.outside_db > ${IN_NOISE_DB}), FALSE) AS in_noise, bool_and(d.outside_db IS NULL) AS unknown,
         coalesce(bool_or(d.grade IN ('measured-worker', 'measured-group')), FALSE) AS by_group,
         bool_or(d.verdict_outside = 'cant-tell-yet' OR d.verdict_at_ear = 'cant-tell-yet' OR ${isNotAssessed}) AS undecided,
         bool_or(d.verdict_at_ear = 'over') AS over_at_ear,
         EXISTS (SELECT 1 FROM runs m WHERE m.worker_id = d.worker_id AND m.date >= make_date(:year, 1, 1)
           AND m.date <= make_date(:year, 12, 31) AND NOT m.is_void AND NOT m.is_out AND m.task_id IS NULL) AS has_run`;

/** Counts over such persons, for an object. */
export const COUNTS_OF_PERSONS = `'inNoise', count(*) FILTER (WHERE in_noise), 'measured', count(*) FILTER (WHERE in_noise AND has_run),
         'byGroup', count(*) FILTER (WHERE in_noise AND NOT has_run AND by_group),
         'neverMeasured', count(*) FILTER (WHERE in_noise AND NOT has_run AND NOT by_group),
         'undecided', count(*) FILTER (WHERE in_noise AND undecided)`;

type DayFiguresOfYear = Pick<YearReportFigures, "people" | "days" | "histogram" | "findings">;

/** People and days of a site's year, each counted once, and its findings. */
async function countsOf(actor: Actor, { siteId, year }: YearOfSite): Promise<DayFiguresOfYear> {
  const found = await rows<DayFiguresOfYear>(
    `WITH ${yearDays(actor)},
     done AS (SELECT * FROM year_days WHERE result_id IS NOT NULL),
     person AS (
       SELECT d.worker_id, ${PERSON_OF_DAYS}
       FROM done d GROUP BY d.worker_id),
     steps AS (
       SELECT x.from_db, count(*) FILTER (WHERE x.line = 'outside')::int AS outside, count(*) FILTER (WHERE x.line = 'ear')::int AS at_ear
       FROM (SELECT ${STEP_DB} * floor(d.outside_db / ${STEP_DB}) AS from_db, 'outside' AS line FROM done d WHERE d.outside_db IS NOT NULL
         UNION ALL SELECT ${STEP_DB} * floor(d.at_ear_db / ${STEP_DB}), 'ear' FROM done d WHERE d.at_ear_db IS NOT NULL) x GROUP BY 1)
     SELECT (SELECT json_build_object('withDay', count(*), 'levelUnknown', count(*) FILTER (WHERE unknown), ${COUNTS_OF_PERSONS}, 'overAtEar', CASE WHEN (SELECT bool_or(${judgesAtEar}) FROM done d) THEN count(*) FILTER (WHERE in_noise AND over_at_ear) END) FROM person) AS people,
       (SELECT json_build_object('count', count(*), 'outside', ${verdicts("verdict_outside")},
         'atEar', CASE WHEN bool_or(${judgesAtEar}) THEN ${verdicts("verdict_at_ear", judgesAtEar)} END) FROM done d) AS days,
       (SELECT coalesce(json_agg(json_build_object('fromDb', from_db, 'outside', outside, 'atEar', at_ear) ORDER BY from_db), '[]') FROM steps) AS histogram,
       (SELECT json_build_object('opened', count(*) FILTER (WHERE f.first_date >= make_date(:year, 1, 1)), 'closed', count(*) FILTER (WHERE f.state = 'closed'),
         'open', count(*) FILTER (WHERE f.state <> 'closed'), 'overdue', count(*) FILTER (WHERE ${isOverdueFinding("f", "(now() AT TIME ZONE s.time_zone)::date")}))
        FROM findings f JOIN sites s ON s.id = f.site_id WHERE f.site_id = :siteId AND f.first_date <= make_date(:year, 12, 31) AND f.last_date >= make_date(:year, 1, 1)
          AND ${visible(findingPolicy, actor, "f")}) AS findings`,
    { siteId, year },
  );
  return only(found);
}

interface InForce {
  results: string[];
  sha256: string;
}

/** The results in force of a site's year, in order, and the digest of their ids. */
export async function resultsInForce(actor: Actor, { siteId, year }: YearOfSite): Promise<InForce> {
  return only(
    await rows<InForce>(
      `SELECT coalesce(array_agg(x.id ORDER BY x.date, x.worker_id), '{}') AS results,
         encode(sha256(convert_to(coalesce(string_agg(x.id::text, E'\\n' ORDER BY x.date, x.worker_id), ''), 'UTF8')), 'hex') AS sha256
       FROM (SELECT d.current_result_id AS id, d.date, d.worker_id FROM days d WHERE d.site_id = :siteId AND d.current_result_id IS NOT NULL
         AND d.date BETWEEN make_date(:year, 1, 1) AND make_date(:year, 12, 31) AND ${visible(dayPolicy, actor, "d")}) x`,
      { siteId, year },
    ),
  );
}

type Changes = NonNullable<YearReportFigures["changes"]>;

const parts = (result: string, path: string) => `jsonb_path_query_array(${result}.refs, '${path}')`;
const differ = (...paths: string[]) =>
  paths.map((path) => `${parts("b", path)} IS DISTINCT FROM ${parts("n", path)}`).join(" OR ");

/**
 * What is another result than in a report before, and why, by what the two results rest on. A corrected shift has other tasks,
 * so of its levels and protectors nothing is said; otherwise a day stands under every cause that holds.
 */
async function changesSince(
  actor: Actor,
  { siteId, year }: YearOfSite,
  reportId: string,
): Promise<Omit<Changes, "since">> {
  const found = await rows<Omit<Changes, "since">>(
    `WITH before AS (SELECT r.* FROM year_reports y CROSS JOIN LATERAL unnest(y.results) x(id) JOIN day_results r ON r.id = x.id WHERE y.id = :reportId),
     now AS (SELECT r.* FROM days d JOIN day_results r ON r.id = d.current_result_id WHERE d.site_id = :siteId
       AND d.date BETWEEN make_date(:year, 1, 1) AND make_date(:year, 12, 31) AND ${visible(dayPolicy, actor, "d")}),
     pairs AS (
       SELECT b.id AS before_id, n.id AS now_id,
         b.verdict_outside IS DISTINCT FROM n.verdict_outside OR b.verdict_at_ear IS DISTINCT FROM n.verdict_at_ear AS is_verdict,
         n.verdict_at_ear = 'over' AND b.verdict_at_ear <> 'over' AS now_over, b.verdict_at_ear = 'over' AND n.verdict_at_ear <> 'over' AS no_longer_over,
         ${differ("$.shifts[*].revisionId")} AS corrected,
         ${differ("$.shifts[*].tasks[*].levelId", "$.shifts[*].runRevisionIds[*]")} AS measured,
         ${differ("$.shifts[*].tasks[*].use", "$.shifts[*].tasks[*].zone")} AS protector, ${differ("$.shifts[*].tasks[*].seenFrom", "$.shifts[*].tasks[*].seen")} AS wearing,
         (b.governing_rule_set, b.governing_version, b.method_version, b.refs->'settingsId', b.refs->'mustWear', b.refs->'targetDb')
           IS DISTINCT FROM (n.governing_rule_set, n.governing_version, n.method_version, n.refs->'settingsId', n.refs->'mustWear', n.refs->'targetDb') AS rule
       FROM before b FULL JOIN now n ON n.worker_id = b.worker_id AND n.date = b.date WHERE b.id IS DISTINCT FROM n.id),
     changed AS (SELECT * FROM pairs WHERE before_id IS NOT NULL AND now_id IS NOT NULL),
     causes AS (
       SELECT c.cause, count(*)::int AS days, count(*) FILTER (WHERE is_verdict)::int AS verdict_days,
         count(*) FILTER (WHERE now_over)::int AS now_over, count(*) FILTER (WHERE no_longer_over)::int AS no_longer_over
       FROM changed CROSS JOIN LATERAL (VALUES ('correction', corrected), ('measured-anew', measured AND NOT corrected), ('protector-data', protector AND NOT corrected),
         ('wearing-seen', wearing AND NOT corrected), ('rule', rule), ('other', NOT (corrected OR measured OR protector OR wearing OR rule))) c(cause, holds)
       WHERE c.holds GROUP BY c.cause)
     SELECT (SELECT count(*) FILTER (WHERE before_id IS NULL)::int FROM pairs) AS "newDays", (SELECT count(*) FILTER (WHERE now_id IS NULL)::int FROM pairs) AS "goneDays",
       (SELECT count(*)::int FROM changed) AS "changedDays", (SELECT count(*) FILTER (WHERE is_verdict)::int FROM changed) AS "verdictDays",
       (SELECT coalesce(json_agg(json_build_object('cause', cause, 'days', days, 'verdictDays', verdict_days, 'nowOver', now_over, 'noLongerOver', no_longer_over)
          ORDER BY days DESC, cause), '[]') FROM causes) AS "byCause"`,
    { siteId, year, reportId },
  );
  return only(found);
}

/** What a report of a site's year would state now; `last` is the one before it. */
export async function yearReportFigures(
  actor: Actor,
  asked: YearOfSite,
  last: Pick<YearReportRow, "id" | "number" | "asOf"> | null,
): Promise<YearReportFigures> {
  const counts = await countsOf(actor, asked);
  const { months, counts: gaps, ruleSets } = await yearGaps(actor, asked);
  const changes = last && {
    since: { number: last.number, asOf: last.asOf },
    ...(await changesSince(actor, asked, last.id)),
  };
  return { ...counts, months, gaps, ruleSets, changes };
}

type Found = Omit<YearReportRow, "asOf"> & { asOf: Date };

const SELECT_REPORTS = `SELECT y.id, y.site_id AS "siteId", y.year, y.number, y.as_of AS "asOf", u.name AS "authorName",
    cardinality(y.results) AS "resultsCount", encode(y.results_sha256, 'hex') AS "resultsSha256"
  FROM year_reports y JOIN users u ON u.id = y.author_id`;

const present = ({ asOf, ...report }: Found): YearReportRow => ({
  ...report,
  asOf: asOf.toISOString(),
});

/** Reports issued of a site's year, the latest first. */
export async function listYearReports(
  actor: Actor,
  { siteId, year, cursor, limit }: z.output<typeof YearReportFilter>,
): Promise<z.input<typeof YearReportPage>> {
  const before = decodeCursor(cursor, 1)?.[0];
  const found = await rows<Found>(
    `${SELECT_REPORTS} WHERE y.site_id = :siteId AND y.year = :year AND ${visible(yearReportPolicy, actor, "y")}
     ${before ? "AND y.number < :before" : ""} ORDER BY y.number DESC LIMIT ${limit + 1}`,
    { siteId, year, before },
  );
  return {
    ...pageFrom(found.map(present), limit, ({ number }) => [number]),
    can: abilities(yearReportPolicy, actor, { siteId }),
  };
}

/** @throws AppError not-found */
export async function findYearReport(actor: Actor, id: string): Promise<YearReportRow> {
  const found = await row<Found>(
    `${SELECT_REPORTS} WHERE y.id = :id AND ${visible(yearReportPolicy, actor, "y")}`,
    { id },
  );
  if (!found) throw notFound();
  return present(found);
}

/** The report before the next one. */
export async function lastYearReport({ siteId, year }: YearOfSite): Promise<YearReportRow | null> {
  const found = await row<Found>(
    `${SELECT_REPORTS} WHERE y.site_id = :siteId AND y.year = :year ORDER BY y.number DESC LIMIT 1`,
    { siteId, year },
  );
  return found && present(found);
}

export interface IssuedFigures {
  figures: YearReportFigures;
  seal: { number: number; hash: string } | null;
  organization: string;
  site: string;
  timeZone: string;
}

/** What an issued report states, as it was kept. */
export async function issuedFigures(id: string): Promise<IssuedFigures> {
  return only(
    await rows<IssuedFigures>(
      `SELECT y.figures, CASE WHEN y.seal_number IS NOT NULL THEN json_build_object('number', y.seal_number, 'hash', encode(y.seal_sha256, 'hex')) END AS seal,
         o.name AS organization, s.name AS site, s.time_zone AS "timeZone"
       FROM year_reports y JOIN sites s ON s.id = y.site_id JOIN organizations o ON o.id = y.organization_id WHERE y.id = :id`,
      { id },
    ),
  );
}
