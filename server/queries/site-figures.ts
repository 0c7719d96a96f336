import { ruleSetVersion } from "../../shared/rule-sets";
import { DUTY_KINDS } from "../../shared/schemas/duty";
import { FINDING_KINDS, type FindingKind } from "../../shared/schemas/finding";
import {
  FIGURES_BY,
  type FigureCell,
  type FiguresBy,
  type SiteFiguresView,
} from "../../shared/schemas/site-figures";
import { row, rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, visible } from "../lib/policy";
import { protectCounts, type RowShape } from "../lib/small-cells";
import { dayPolicy, findingPolicy, trainingPolicy, workerPolicy } from "../policies";
import { countDuties } from "./duties";
import { type YearOfSite, yearDays, yearGaps } from "./gaps";
import { TRAINING_DUTIES, trainingDues } from "./training";
import { COUNTS_OF_PERSONS, PERSON_OF_DAYS } from "./year-reports";

type Criterion = SiteFiguresView["criteria"][number];
type Names = "inNoise" | "measured" | "byGroup" | "neverMeasured" | "undecided";

interface Counted {
  by: FiguresBy | "site";
  id: string | null;
  name: string | null;
  people: Record<Names, number>;
  /** By "rule set, criterion". */
  over: Record<string, number>;
}

/** What was done on a day `d`. */
const DID = `JOIN shifts f ON f.worker_id = d.worker_id AND f.date = d.date AND NOT f.is_void
       JOIN shift_tasks k ON k.shift_revision_id = f.current_revision_id`;

/**
 * People of a year by crew, job, area and task, and of the whole site: each counted once in each row, by the days on which they
 * were of it. The day is judged as a whole, whatever else was done on it.
 */
function countPeople(actor: Actor, asked: YearOfSite): Promise<Counted[]> {
  return rows<Counted>(
    `WITH ${yearDays(actor)},
     done AS MATERIALIZED (
       SELECT d.*, y.crew_id, w.job_id, jsonb_path_query_array(r.criteria->'governing', '$[*] ? (@.verdict == "over").criterionId') AS over
       FROM year_days d JOIN day_results r ON r.id = d.result_id JOIN days y ON y.worker_id = d.worker_id AND y.date = d.date
       JOIN workers w ON w.id = d.worker_id),
     unit AS MATERIALIZED (
       SELECT 'site' AS by, NULL::uuid AS id, d.* FROM done d
       UNION ALL SELECT 'crew', d.crew_id, d.* FROM done d
       UNION ALL SELECT 'job', d.job_id, d.* FROM done d
       UNION ALL SELECT 'task', k.task_id, d.* FROM done d ${DID}
       UNION ALL SELECT 'area', t.area_id, d.* FROM done d ${DID} JOIN tasks t ON t.id = k.task_id),
     person AS (SELECT d.by, d.id, d.worker_id, ${PERSON_OF_DAYS} FROM unit d GROUP BY d.by, d.id, d.worker_id),
     over_of AS (SELECT d.by, d.id, concat(d.governing_rule_set, ', ', c.id) AS criterion, count(DISTINCT d.worker_id)::int AS people
       FROM unit d CROSS JOIN LATERAL jsonb_array_elements_text(d.over) c(id) GROUP BY d.by, d.id, d.governing_rule_set, c.id),
     people AS (SELECT p.by, p.id, json_build_object(${COUNTS_OF_PERSONS}) AS people FROM person p GROUP BY p.by, p.id)
     SELECT p.by, p.id, coalesce(c.name, j.name, a.name, t.name) AS name, p.people,
       (SELECT coalesce(json_object_agg(o.criterion, o.people), '{}') FROM over_of o WHERE o.by = p.by AND o.id IS NOT DISTINCT FROM p.id) AS over
     FROM people p LEFT JOIN crews c ON c.id = p.id LEFT JOIN jobs j ON j.id = p.id LEFT JOIN areas a ON a.id = p.id LEFT JOIN tasks t ON t.id = p.id
     ORDER BY name NULLS LAST, p.id`,
    { siteId: asked.siteId, year: asked.year },
  );
}

interface Banded {
  kind: FindingKind;
  isPersonal: boolean;
  total: number;
  first: number;
  second: number;
  third: number;
}

/** People with an open finding by the age of their oldest, and findings about nobody. */
const countFindings = (actor: Actor, siteId: string): Promise<Banded[]> =>
  rows<Banded>(
    `WITH since AS (
       SELECT f.kind, bool_or(f.worker_id IS NOT NULL) AS is_personal, (now() AT TIME ZONE max(s.time_zone))::date - min(f.first_date) AS days
       FROM findings f JOIN sites s ON s.id = f.site_id WHERE f.site_id = :siteId AND f.state <> 'closed' AND ${visible(findingPolicy, actor, "f")}
       GROUP BY f.kind, coalesce(f.worker_id, f.id))
     SELECT kind, bool_or(is_personal) AS "isPersonal", count(*)::int AS total, count(*) FILTER (WHERE days < 30)::int AS first,
       count(*) FILTER (WHERE days BETWEEN 30 AND 89)::int AS second, count(*) FILTER (WHERE days >= 90)::int AS third
     FROM since GROUP BY kind`,
    { siteId },
  );

interface TrainingCounts {
  owed: number;
  never: number;
  overdue: number;
  inTime: number;
  trained: number;
  sessions: number;
}

const countTraining = async (actor: Actor, { siteId, year }: YearOfSite): Promise<TrainingCounts> =>
  only(
    await rows<TrainingCounts>(
      `WITH held AS (SELECT t.id FROM training_sessions t WHERE t.site_id = :siteId AND t.struck_reason IS NULL
         AND t.held_on BETWEEN make_date(:year, 1, 1) AND make_date(:year, 12, 31) AND ${visible(trainingPolicy, actor, "t")}),
       owed AS (SELECT q."trainedOn", q."dueOn"::date < (now() AT TIME ZONE s.time_zone)::date AS is_overdue
         FROM (${trainingDues(`w.site_id = :siteId AND ${visible(workerPolicy, actor, "w")}`)}) q JOIN sites s ON s.id = q."siteId")
       SELECT count(*)::int AS owed, count(*) FILTER (WHERE q."trainedOn" IS NULL)::int AS never,
         count(*) FILTER (WHERE q."trainedOn" IS NOT NULL AND q.is_overdue)::int AS overdue,
         count(*) FILTER (WHERE q."trainedOn" IS NOT NULL AND NOT q.is_overdue)::int AS "inTime",
         (SELECT count(DISTINCT a.worker_id)::int FROM training_attendances a JOIN held t ON t.id = a.session_id) AS trained,
         (SELECT count(*)::int FROM held) AS sessions
       FROM owed q`,
      { siteId, year, duties: TRAINING_DUTIES },
    ),
  );

const latestYear = (actor: Actor, siteId: string) =>
  row<{ year: number }>(
    `SELECT extract(year FROM coalesce((SELECT max(d.date) FROM days d WHERE d.site_id = s.id AND ${visible(dayPolicy, actor, "d")}),
       (now() AT TIME ZONE s.time_zone)::date))::int AS year FROM sites s WHERE s.id = :siteId`,
    { siteId },
  );

/** The day's criteria of the year's rule sets; a weekly one is no day's. */
const criteriaOf = (ruleSets: SiteFiguresView["ruleSets"]): Criterion[] =>
  ruleSets.flatMap(({ key, version }) =>
    (ruleSetVersion(key, version)?.criteria ?? [])
      .filter(({ quantity }) => quantity !== "lex-weekly")
      .map(({ id }) => ({ ruleSetKey: key, ruleSetVersion: version, id })),
  );

/** In noise; then measured, by group, never, undecided; then over each criterion. Whoever is over one may be over the next. */
function shapeOf(criteria: readonly Criterion[]): RowShape {
  const over = criteria.map((_, index) => index + 5);
  return {
    parts: [1, 2, 3],
    nested: [
      ...[1, 2, 3, 4, ...over].map((at): [number, number] => [0, at]),
      ...over.flatMap((whole, index) =>
        over.slice(index + 1).map((part): [number, number] => [whole, part]),
      ),
    ],
  };
}

const BANDS: RowShape = {
  parts: [1, 2, 3],
  nested: [
    [0, 1],
    [0, 2],
    [0, 3],
  ],
};

type Bands = Record<"total" | "first" | "second" | "third", FigureCell>;

/** What is about people as it may be shown; an instrument or a machine has nothing to hide. */
function bandsOf(counts: readonly number[], isPersonal: boolean): Bands {
  const cells = isPersonal ? protectCounts(BANDS, [[counts]]).tables[0]?.[0] : counts;
  const [total = 0, first = 0, second = 0, third = 0] = cells ?? [];
  return { total, first, second, third };
}

/** Gaps that count each person once. */
const GAPS_OF_PEOPLE = ["not-measured", "no-protector", "not-fitted", "not-trained"] as const;

/**
 * A site in counts of people, without names, and without counts of fewer than five.
 *
 * @param counter who sees what is counted (see `counterAt`)
 */
export async function siteFigures(
  counter: Actor,
  { siteId, year: wanted }: { siteId: string; year: number | undefined },
): Promise<SiteFiguresView> {
  const year = wanted ?? (await latestYear(counter, siteId))?.year ?? 0;
  const asked = { siteId, year };
  const { ruleSets, years, counts: gaps } = await yearGaps(counter, asked);
  const criteria = criteriaOf(ruleSets);
  const counted = await countPeople(counter, asked);
  const listOf = ({ people, over }: Counted) => [
    people.inNoise,
    people.measured,
    people.byGroup,
    people.neverMeasured,
    people.undecided,
    ...criteria.map(({ ruleSetKey, id }) => over[`${ruleSetKey}, ${id}`] ?? 0),
  ];
  const blocks = FIGURES_BY.map((by) => counted.filter((one) => one.by === by));
  const site = counted.find(({ by }) => by === "site");
  const { tables, total } = protectCounts(
    shapeOf(criteria),
    blocks.map((block) => block.map(listOf)),
    site ? listOf(site) : Array.from({ length: 5 + criteria.length }, () => 0),
  );
  const present = (cells: readonly FigureCell[]) => {
    const [inNoise = 0, measured = 0, byGroup = 0, neverMeasured = 0, undecided = 0, ...over] =
      cells;
    return { inNoise, measured, byGroup, neverMeasured, undecided, over };
  };
  const groups = Object.fromEntries(
    FIGURES_BY.map((by, at) => [
      by,
      (blocks[at] ?? []).map(({ id, name }, index) => ({
        id,
        name,
        ...present(tables[at]?.[index] ?? []),
      })),
    ]),
  ) as SiteFiguresView["groups"];
  const findings = await countFindings(counter, siteId);
  const duties = await countDuties(counter, siteId);
  const training = await countTraining(counter, asked);
  const {
    total: owed,
    first: never,
    second: overdue,
    third: inTime,
  } = bandsOf([training.owed, training.never, training.overdue, training.inTime], true);
  const inNoise = site?.people.inNoise ?? 0;
  return {
    year,
    years,
    ruleSets,
    criteria,
    total: present(total ?? []),
    groups,
    gaps: GAPS_OF_PEOPLE.flatMap((kind) => gaps.find((gap) => gap.kind === kind) ?? []).map(
      (gap) => ({
        ...gap,
        count:
          protectCounts({ parts: [], nested: [[0, 1]] }, [[[inNoise, gap.count]]])
            .tables[0]?.[0]?.[1] ?? 0,
      }),
    ),
    findings: findings
      .sort((a, b) => FINDING_KINDS.indexOf(a.kind) - FINDING_KINDS.indexOf(b.kind))
      .map(({ kind, isPersonal, total: all, first, second, third }) => ({
        kind,
        ...bandsOf([all, first, second, third], isPersonal),
      })),
    duties: duties
      .sort((a, b) => DUTY_KINDS.indexOf(a.kind) - DUTY_KINDS.indexOf(b.kind))
      .map(({ kind, isPersonal, total: all, overdue: late, soon, later }) => ({
        kind,
        ...bandsOf([all, late, soon, later], isPersonal),
      })),
    training: {
      owed,
      never,
      overdue,
      inTime,
      trained: bandsOf([training.trained], true).total,
      sessions: training.sessions,
    },
  };
}
