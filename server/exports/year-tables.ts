import { REST, SLOT_MIN } from "../../shared/planning/timetable";
import { type Actor, visible } from "../lib/policy";
import {
  assignmentPolicy,
  dayPolicy,
  drawPolicy,
  findingPolicy,
  fitTestPolicy,
  letterPolicy,
  noticePolicy,
  planPolicy,
  protectorPolicy,
  runPolicy,
  shiftPolicy,
  siteOfEvent,
  workerPolicy,
} from "../policies";
import { LATER_LETTER, LETTER_STATE } from "../queries/letters";
import { pairPassed } from "../queries/own-attenuation";
import { YEAR_COLUMNS, type YearColumn } from "./year-columns";

export type WorkersAs = "number" | "name" | "pseudonym";

export interface YearRecords {
  siteId: string;
  year: number;
  workers: WorkersAs;
  /** Hex; under it the names made up for one file are the same in all its tables, and others in the next. */
  salt: string;
}

export interface YearTable {
  name: string;
  title: string;
  columns: readonly YearColumn[];
  /** From FROM on. */
  rest: string;
  key: readonly string[];
}

const uuid = /^[0-9a-f]{8}(-[0-9a-f]{4}){3}-[0-9a-f]{12}$/;
const TIME = `'YYYY-MM-DD"T"HH24:MI:SS.US"Z"'`;
const utc = (column: string) => `to_char(${column} AT TIME ZONE 'UTC', ${TIME})`;

const column =
  (type: YearColumn["type"], unit = "") =>
  (name: string, sql: string, meaning: string): YearColumn => ({ name, sql, type, unit, meaning });
const id = column("id");
const text = column("text");
const code = column("code");
const date = column("date");
const time = column("time");
const whole = column("integer");
const yesNo = column("boolean");
const level = column("number", "dB");
const minutes = column("number", "min");
const share = column("number", "%");
const number = column("number");

/** SQL: how a worker of the alias is called in the file. */
export function workerSql(
  alias: string,
  { workers, salt }: Pick<YearRecords, "workers" | "salt">,
): string {
  if (workers === "name") return `${alias}.name`;
  if (workers === "number") return `${alias}.employee_number`;
  return `'W-' || left(encode(sha256(convert_to('${salt}' || ${alias}.id::text, 'UTF8')), 'hex'), 12)`;
}

/** Every table of a year's file in its order, as far as the actor may see its rows. */
export function yearTables(actor: Actor, asked: YearRecords): YearTable[] {
  const { siteId, year } = asked;
  if (!uuid.test(siteId) || !Number.isInteger(year) || !/^[0-9a-f]{32}$/.test(asked.salt))
    throw new RangeError("a site's id, a whole year and a salt");
  const inYear = (expression: string) =>
    `${expression} >= '${year}-01-01' AND ${expression} <= '${year}-12-31'`;
  const ofDays = `d.site_id = '${siteId}' AND ${inYear("d.date")} AND ${visible(dayPolicy, actor, "d")}`;
  const isNamed = asked.workers !== "pseudonym";
  const worker = text(
    "worker",
    workerSql("w", asked),
    "How the worker is called in this file: employee number, name, or a name made up for this file",
  );
  /** Free text may name people: a file without names has none. */
  const freeText = (name: string, sql: string, meaning: string) =>
    text(name, isNamed ? sql : "NULL::text", `${meaning}; empty in a file without workers' names`);

  const resultColumns = YEAR_COLUMNS.map((one) =>
    one.name === "worker" ? { ...one, sql: worker.sql } : one,
  );
  return [
    {
      name: "workers",
      title: "Workers with a day in the year",
      // Two may have one name.
      key: asked.workers === "name" ? [] : ["worker"],
      columns: [
        worker,
        text("job", "j.name", "Present job"),
        code(
          "employer",
          "w.employer",
          "Whether the worker is one's own, an agency's or a contractor's",
        ),
        yesNo("must_wear", "w.must_wear", "Has to wear a protector whatever the level"),
        level(
          "personal_target_db",
          "w.personal_target_db",
          "A stricter target at the ear of this worker's own",
        ),
        date(
          "hired_on",
          isNamed ? "w.hired_on" : "NULL::date",
          "First day of employment; empty in a file without workers' names",
        ),
        date(
          "left_on",
          isNamed ? "w.left_on" : "NULL::date",
          "Last day of employment; empty in a file without workers' names",
        ),
      ],
      rest: `FROM workers w LEFT JOIN jobs j ON j.id = w.job_id
        WHERE w.id IN (SELECT d.worker_id FROM days d WHERE ${ofDays}) AND ${visible(workerPolicy, actor, "w")} ORDER BY 1`,
    },
    {
      name: "shifts",
      title: "Shifts, each revision",
      key: ["shift_revision_id"],
      columns: [
        id("shift_revision_id", "v.id", "Revision of the shift: a correction is a new one"),
        id("shift_id", "f.id", "Shift"),
        whole("revision", "v.number", "1, 2, 3… within the shift"),
        yesNo("is_in_force", "f.current_revision_id = v.id", "The revision that counts"),
        worker,
        text("crew", "c.name", "Crew with which it was worked"),
        date("date", "f.date", "Local date on which it starts"),
        time(
          "local_start",
          "to_char(v.local_start, 'HH24:MI')",
          "Local time at which it starts, hours and minutes",
        ),
        code("time_zone", "f.time_zone", "IANA time zone of the local times"),
        minutes("length_min", "v.length_min", "Length"),
        code(
          "unaccounted_how",
          "v.unaccounted_how",
          "How the time without a task was, as the officer said",
        ),
        level("unaccounted_level_db", "v.unaccounted_level_db", "Its level, where that was said"),
        yesNo("is_void", "v.is_void", "Struck out"),
        time("recorded_at", utc("v.created_at"), "When the revision was recorded, UTC"),
        freeText("reason", "v.reason", "Why it was corrected"),
      ],
      rest: `FROM shifts f JOIN shift_revisions v ON v.shift_id = f.id JOIN workers w ON w.id = f.worker_id LEFT JOIN crews c ON c.id = f.crew_id
        WHERE f.site_id = '${siteId}' AND ${inYear("f.date")} AND ${visible(shiftPolicy, actor, "f")} ORDER BY f.date, f.id, v.number`,
    },
    {
      name: "shift-tasks",
      title: "Tasks of each revision of a shift",
      key: ["shift_task_id"],
      columns: [
        id("shift_task_id", "t.id", "The task within this revision"),
        id("shift_revision_id", "t.shift_revision_id", "Revision of the shift"),
        whole("position", "t.position", "Its place in the shift"),
        text("task", "k.name", "Task"),
        minutes("duration_min", "t.duration_min", "How long it was done"),
        share(
          "worn_pct",
          "t.worn_pct",
          "Share of the time for which the protector was worn; empty: not said",
        ),
      ],
      rest: `FROM shifts f JOIN shift_tasks t ON t.shift_id = f.id JOIN tasks k ON k.id = t.task_id
        WHERE f.site_id = '${siteId}' AND ${inYear("f.date")} AND ${visible(shiftPolicy, actor, "f")} ORDER BY f.date, t.shift_revision_id, t.position`,
    },
    {
      name: "task-levels",
      title: "Levels of tasks, each revision",
      key: ["task_level_id"],
      columns: [
        id("task_level_id", "l.id", "Revision of the task's level"),
        text("task", "k.name", "Task"),
        whole("revision", "l.number", "1, 2, 3… within the task"),
        date("effective_from", "l.effective_from", "From when it counts"),
        level("level_db", "l.level_db", "Level without protection"),
        level("lc_minus_la_db", "l.lc_minus_la_db", "C-weighted less A-weighted level"),
        level("peak_db", "l.peak_db", "Peak level"),
        code("grade", "l.grade", "How well it is known"),
        code("strategy", "l.strategy", "How it was sampled; empty: not by a survey"),
        time("recorded_at", utc("l.created_at"), "When it was recorded, UTC"),
      ],
      rest: `FROM task_levels l JOIN tasks k ON k.id = l.task_id WHERE k.site_id = '${siteId}' AND l.effective_from <= '${year}-12-31' ORDER BY k.name, l.number`,
    },
    {
      name: "runs",
      title: "Runs of instruments, each revision",
      key: ["run_revision_id"],
      columns: [
        id("run_revision_id", "v.id", "Revision of the run"),
        id("run_id", "r.id", "Run"),
        whole("revision", "v.number", "1, 2, 3… within the run"),
        yesNo("is_in_force", "r.current_revision_id = v.id", "The revision that counts"),
        text(
          "worker",
          `CASE WHEN w.id IS NOT NULL THEN ${workerSql("w", asked)} END`,
          "Who wore the instrument; empty: it stood in an area",
        ),
        text("area", "a.name", "Area where it stood; empty: a worker wore it"),
        text("task", "k.name", "Task that it is a sample of; empty: it speaks for the day"),
        date("date", "r.date", "Local date"),
        text("instrument", "i.name", "Instrument"),
        text("serial_number", "i.serial_number", "Its serial number"),
        minutes("duration_min", "v.duration_min", "How long it measured"),
        level("check_before_db", "v.check_before_db", "Field check before"),
        level("check_after_db", "v.check_after_db", "Field check after"),
        code(
          "covers",
          "v.covers",
          "Whether it covers the shift, a part that stands for it, or a part alone",
        ),
        yesNo("is_void", "v.is_void", "Struck out"),
        freeText("kept_reason", "v.kept_reason", "Why it was kept in spite of its field checks"),
        freeText("unusual", "v.unusual", "What was unusual that day"),
        time("recorded_at", utc("v.created_at"), "When the revision was recorded, UTC"),
      ],
      rest: `FROM runs r JOIN run_revisions v ON v.run_id = r.id JOIN instruments i ON i.id = r.instrument_id LEFT JOIN workers w ON w.id = r.worker_id
        LEFT JOIN areas a ON a.id = r.area_id LEFT JOIN tasks k ON k.id = r.task_id
        WHERE r.site_id = '${siteId}' AND ${inYear("r.date")} AND ${visible(runPolicy, actor, "r")} ORDER BY r.date, r.id, v.number`,
    },
    {
      name: "readings",
      title: "Readings of runs",
      key: ["reading_id"],
      columns: [
        id("reading_id", "g.id", "Reading"),
        id("run_revision_id", "g.run_revision_id", "Revision of the run"),
        level(
          "criterion_level_db",
          "g.criterion_level_db",
          "Criterion level that the instrument was set to",
        ),
        level("exchange_rate_db", "g.exchange_rate_db", "Exchange rate"),
        level("threshold_db", "g.threshold_db", "Threshold; empty: none"),
        code("weighting", "g.weighting", "Frequency weighting"),
        code("response", "g.response", "Time weighting"),
        share("dose_pct", "g.dose_pct", "Dose as read off"),
        level("average_db", "g.average_db", "Average level as read off"),
        level("lceq_db", "g.lceq_db", "C-weighted average"),
        level("las_max_db", "g.las_max_db", "Highest level, slow"),
        level("peak_db", "g.peak_db", "Peak level"),
        code("peak_weighting", "g.peak_weighting", "Weighting of the peak"),
      ],
      rest: `FROM readings g JOIN runs r ON r.id = g.run_id
        WHERE r.site_id = '${siteId}' AND ${inYear("r.date")} AND ${visible(runPolicy, actor, "r")} ORDER BY r.date, g.run_revision_id, g.position`,
    },
    {
      name: "protectors",
      title: "Data of protectors, each revision",
      key: ["protector_revision_id"],
      columns: [
        id("protector_revision_id", "p.id", "Revision of the data"),
        text("protector", "m.name", "Protector"),
        code("kind", "m.kind", "Kind"),
        whole("revision", "p.number", "1, 2, 3… within the protector"),
        date("effective_from", "p.effective_from", "From when the data count"),
        code("data_json", "p.data::text", "The data as they are stored, JSON"),
      ],
      rest: `FROM protector_model_revisions p JOIN protector_models m ON m.id = p.model_id WHERE p.effective_from <= '${year}-12-31' AND ${visible(protectorPolicy, actor, "m")} ORDER BY m.name, p.number`,
    },
    {
      name: "assignments",
      title: "Protectors assigned",
      key: ["assignment_id"],
      columns: [
        id("assignment_id", "x.id", "Assignment"),
        worker,
        text("protector", "m.name", "Protector"),
        text("second_protector", "o.name", "Worn over it; empty: none"),
        text("task", "k.name", "Task for which it is assigned; empty: any"),
        text("area", "a.name", "Area for which it is assigned; empty: any"),
        date("from", "lower(x.valid)", "First day"),
        date("until", "upper(x.valid) - 1", "Last day; empty: without end"),
      ],
      rest: `FROM assignments x JOIN workers w ON w.id = x.worker_id JOIN protector_models m ON m.id = x.inner_model_id LEFT JOIN protector_models o ON o.id = x.outer_model_id
        LEFT JOIN tasks k ON k.id = x.task_id LEFT JOIN areas a ON a.id = x.area_id
        WHERE w.site_id = '${siteId}' AND x.valid && daterange('${year}-01-01', '${year}-12-31', '[]') AND ${visible(assignmentPolicy, actor, "x")} ORDER BY 2, 7, 1`,
    },
    {
      name: "fit-tests",
      title: "Fit tests, each revision",
      key: ["fit_test_revision_id"],
      columns: [
        id("fit_test_revision_id", "v.id", "Revision of the fit test"),
        id("fit_test_id", "t.id", "Fit test"),
        whole("revision", "v.number", "1, 2, 3… within the fit test"),
        yesNo(
          "is_in_force",
          "t.current_revision_id = v.id AND NOT t.is_void",
          "The revision that counts",
        ),
        worker,
        text("protector", "m.name", "Protector"),
        date("tested_on", "t.tested_on", "When it was done"),
        code("method", "v.method", "How it was done"),
        level("left_db", "v.left_db", "Personal attenuation, left ear"),
        level("right_db", "v.right_db", "Personal attenuation, right ear"),
        level("par_db", "v.par_db", "Personal attenuation rating"),
        level("need_db", "v.need_db", "What was needed"),
        yesNo("has_passed", pairPassed("v"), "Passed"),
      ],
      rest: `FROM fit_tests t JOIN fit_test_revisions v ON v.fit_test_id = t.id JOIN workers w ON w.id = t.worker_id JOIN protector_models m ON m.id = t.model_id
        WHERE t.site_id = '${siteId}' AND ${inYear("t.tested_on")} AND ${visible(fitTestPolicy, actor, "t")} ORDER BY t.tested_on, t.id, v.number`,
    },
    {
      name: "results",
      title: "Results of days in force, as in the year's CSV",
      key: ["result_id"],
      columns: resultColumns,
      rest: `FROM days d JOIN day_results r ON r.id = d.current_result_id JOIN workers w ON w.id = d.worker_id JOIN sites s ON s.id = d.site_id
        LEFT JOIN crews c ON c.id = d.crew_id LEFT JOIN tasks k ON k.id = r.deciding_task_id WHERE ${ofDays} ORDER BY d.date, w.employee_number`,
    },
    {
      name: "findings",
      title: "Findings with a day in the year",
      key: ["finding_id"],
      columns: [
        id("finding_id", "n.id", "Finding"),
        text(
          "worker",
          `CASE WHEN w.id IS NOT NULL THEN ${workerSql("w", asked)} END`,
          "Whom it concerns; empty: a job or an instrument",
        ),
        text("job", "j.name", "Job that it concerns; empty: a worker or an instrument"),
        text("instrument", "i.name", "Instrument that it concerns; empty: a worker or a job"),
        code("kind", "n.kind", "What was found"),
        code("criterion", "n.criterion", "Criterion that it is about; empty: none"),
        code("state", "n.state", "State"),
        date("first_date", "n.first_date", "First day"),
        date("last_date", "n.last_date", "Last day"),
        whole("days", "n.days_count", "How many days"),
        id("last_result_id", "n.last_result_id", "Result of the last day"),
        date("due_on", "n.due_on", "When it is due"),
        date("closed_on", "n.closed_on", "When it was closed"),
        freeText("closing_reason", "n.closing_reason", "Why it was closed"),
        time("opened_at", utc("n.opened_at"), "When it was opened, UTC"),
      ],
      rest: `FROM findings n LEFT JOIN workers w ON w.id = n.worker_id LEFT JOIN jobs j ON j.id = n.job_id LEFT JOIN instruments i ON i.id = n.instrument_id
        WHERE n.site_id = '${siteId}' AND n.first_date <= '${year}-12-31' AND n.last_date >= '${year}-01-01' AND ${visible(findingPolicy, actor, "n")} ORDER BY n.opened_at, n.id`,
    },
    {
      name: "notices",
      title: "Notices of the year",
      key: ["notice_id"],
      columns: [
        id("notice_id", "n.id", "Notice"),
        code("audience", "n.audience", "To whom: officer, supervisor or worker"),
        text(
          "recipient",
          isNamed ? "u.name" : "NULL::text",
          "Who was told; empty in a file without workers' names",
        ),
        code("state", "n.state", "Whether it was sent"),
        time("written_at", utc("n.created_at"), "When it was written, UTC"),
        time("sent_at", utc("n.sent_at"), "When the mail server took it, UTC"),
        number("tries", "n.tries", "How often it was tried"),
        code(
          "finding_ids",
          "(SELECT string_agg(DISTINCT x.finding_id::text, ' ') FROM notice_items x WHERE x.notice_id = n.id)",
          "The findings it tells of",
        ),
      ],
      rest: `FROM notices n JOIN users u ON u.id = n.recipient_id
        WHERE n.site_id = '${siteId}' AND n.created_at >= '${year}-01-01' AND n.created_at < '${year + 1}-01-01' AND ${visible(noticePolicy, actor, "n")} ORDER BY n.created_at, n.id`,
    },
    {
      name: "letters",
      title: "Letters with results of a day in the year, and that they were read",
      key: ["letter_id"],
      columns: [
        id("letter_id", "l.id", "Letter"),
        worker,
        code(
          "kind",
          "CASE WHEN l.replaces_id IS NULL THEN 'results' ELSE 'correction' END",
          "results, or a correction",
        ),
        id("correction_of", "l.replaces_id", "The letter that it corrects; empty: it is the first"),
        code("language", "l.language", "Language that it is written in"),
        code("rule_set", "l.rule_set", "Rule set whose duty to tell it answers"),
        whole("rule_set_version", "l.rule_set_version", "Version of the rule set"),
        code(
          "result_ids",
          "(SELECT string_agg(x.result_id::text, ' ' ORDER BY x.date) FROM result_letter_days x WHERE x.letter_id = l.id)",
          "The results that it tells of, by day",
        ),
        time("written_at", utc("l.written_at"), "When it was written, UTC"),
        date("due_on", "l.due_on", "Day by which the worker has to know"),
        code(
          "state",
          LETTER_STATE,
          "to-print, waiting, sent, failed, withdrawn, replaced or acknowledged",
        ),
        code(
          "delivery",
          "CASE WHEN l.notice_id IS NULL OR n.state = 'on-paper' THEN 'paper' ELSE 'mail' END",
          "mail or paper",
        ),
        time(
          "sent_at",
          utc("n.sent_at"),
          "When the mail server took it, UTC; empty: not sent by mail",
        ),
        time(
          "to_paper_at",
          utc(
            `(SELECT max(e.at) FROM audit_events e WHERE e.organization_id = l.organization_id AND e.subject_kind = 'notice'
              AND e.subject_id = l.notice_id AND e.action = 'give-on-paper-notice')`,
          ),
          "When paper took the place of a mail, UTC; empty: it did not, or it was on paper from the first",
        ),
        code(
          "acknowledged_by",
          "a.way",
          "link: by the worker; paper: signed; empty: not acknowledged",
        ),
        time("acknowledged_at", utc("a.recorded_at"), "When that was recorded, UTC"),
        date("signed_on", "a.signed_on", "Date beside the signature, on paper"),
        text(
          "recorded_by",
          isNamed ? "u.name" : "a.recorded_by::text",
          "Who recorded the paper. An id in a file without workers' names",
        ),
      ],
      rest: `FROM result_letters l JOIN workers w ON w.id = l.worker_id LEFT JOIN notices n ON n.id = l.notice_id
        LEFT JOIN notice_acknowledgements a ON a.letter_id = l.id LEFT JOIN users u ON u.id = a.recorded_by ${LATER_LETTER}
        WHERE l.site_id = '${siteId}' AND ${visible(letterPolicy, actor, "l")}
          AND EXISTS (SELECT 1 FROM result_letter_days x WHERE x.letter_id = l.id AND ${inYear("x.date")}) ORDER BY l.written_at, l.id`,
    },
    {
      name: "timetables",
      title: "Timetables kept as plans, for a day of the year",
      key: ["plan_id"],
      columns: [
        id("plan_id", "p.id", "Plan that is a timetable"),
        text("name", "p.name", "How it is called"),
        code("scope_kind", "p.scope_kind", "Whether it is about a crew or a job"),
        text("scope", "coalesce(c.name, j.name)", "The crew or the job"),
        date("base_date", "p.base_date", "Day whose levels, rules and protectors it rests on"),
        code("rule_set", "p.governing_rule_set", "Rule set by which it was searched for"),
        whole("rule_set_version", "p.governing_version", "Version of the rule set"),
        whole("method_version", "p.method_version", "Version of the arithmetic"),
        code("criterion", "p.goal", "Criterion that it keeps to"),
        share(
          "largest_share_pct",
          "(p.timetable->'found'->>'largestPct')::float8",
          "Largest share of the limit that falls to one person",
        ),
        share(
          "bound_share_pct",
          "(p.timetable->'found'->>'boundPct')::float8",
          "No timetable can have a smaller largest share",
        ),
        time("kept_at", utc("p.kept_at"), "When it was kept, UTC"),
        freeText("put_aside_reason", "p.put_aside_reason", "Why it was put aside"),
      ],
      rest: `FROM plans p LEFT JOIN crews c ON c.id = p.scope_id LEFT JOIN jobs j ON j.id = p.scope_id
        WHERE p.kind = 'timetable' AND p.site_id = '${siteId}' AND ${inYear("p.base_date")} AND ${visible(planPolicy, actor, "p")} ORDER BY p.kept_at, p.id`,
    },
    {
      name: "timetable-stretches",
      title: "Who is where when in each timetable",
      key: ["plan_id", "person", "from_min"],
      columns: [
        id("plan_id", "x.plan_id", "Plan that is a timetable"),
        whole("person", "x.person", "1, 2, 3… within the timetable"),
        worker,
        whole("from_min", `((x.first_slot - 1) * ${SLOT_MIN})::int`, "Minutes after the start"),
        whole("length_min", `(x.slots * ${SLOT_MIN})::int`, "Minutes at it without a break"),
        text("task", "x.task", "Task; empty: at none of them, in quiet"),
        level("level_db", "x.level_db", "Level without protection, as it was when it was kept"),
        share("day_share_pct", "x.share_pct", "Share of the limit of the person's whole day"),
      ],
      // A stretch is a run of slots at one task: slot and rank within the task then rise together.
      rest: `FROM (SELECT s.plan_id, s.person, s.worker_id, s.share_pct, min(s.slot) AS first_slot, count(*) AS slots,
            max(CASE WHEN s.place = ${REST} THEN s.basis->'rest'->>'name' ELSE s.basis->'tasks'->s.place->>'name' END) AS task,
            max((CASE WHEN s.place = ${REST} THEN s.basis->'rest'->>'levelDb' ELSE s.basis->'tasks'->s.place->>'levelDb' END)::float8) AS level_db
          FROM (SELECT p.id AS plan_id, p.timetable->'basis' AS basis, r.person, k.slot, k.place::text::int AS place,
              (p.timetable->'basis'->'people'->(r.person::int - 1)->>'id')::uuid AS worker_id,
              (p.timetable->'found'->'sharesPct'->>(r.person::int - 1))::float8 AS share_pct,
              k.slot - row_number() OVER (PARTITION BY p.id, r.person, k.place ORDER BY k.slot) AS run
            FROM plans p CROSS JOIN LATERAL jsonb_array_elements(p.timetable->'found'->'table') WITH ORDINALITY r(slots, person)
              CROSS JOIN LATERAL jsonb_array_elements(r.slots) WITH ORDINALITY k(place, slot)
            WHERE p.kind = 'timetable' AND p.site_id = '${siteId}' AND ${inYear("p.base_date")} AND ${visible(planPolicy, actor, "p")}) s
          GROUP BY s.plan_id, s.person, s.worker_id, s.share_pct, s.place, s.run) x
        LEFT JOIN workers w ON w.id = x.worker_id ORDER BY x.plan_id, x.person, x.first_slot`,
    },
    {
      name: "draws",
      title: "Records drawn at random from the year",
      key: ["draw_id"],
      columns: [
        id("draw_id", "d.id", "Draw"),
        text("seed", "d.seed", "Seed: with it the same results are drawn again"),
        whole("drawn_from", "d.drawn_from", "How many results were in force then"),
        id(
          "drawn_from_sha256",
          "encode(d.drawn_from_sha256, 'hex')",
          "SHA-256 of their ids in order, one a line",
        ),
        time("drawn_at", utc("d.created_at"), "When, UTC"),
        text(
          "drawn_by",
          isNamed ? "u.name" : "d.author_id::text",
          "Who. An id in a file without workers' names",
        ),
        time("signed_at", utc("g.signed_at"), "When it was signed off, UTC; empty: not yet"),
        text(
          "signed_by",
          isNamed ? "v.name" : "g.author_id::text",
          "Who signed. An id in a file without workers' names",
        ),
        whole("questions", "g.questions", "Records with a question when it was signed off"),
      ],
      rest: `FROM record_draws d JOIN users u ON u.id = d.author_id LEFT JOIN record_draw_signatures g ON g.draw_id = d.id LEFT JOIN users v ON v.id = g.author_id
        WHERE d.site_id = '${siteId}' AND d.year = ${year} AND ${visible(drawPolicy, actor, "d")} ORDER BY d.created_at, d.id`,
    },
    {
      name: "drawn-records",
      title: "Each record that was drawn, with its marks",
      key: ["draw_id", "position", "mark_number"],
      columns: [
        id("draw_id", "i.draw_id", "Draw"),
        whole("position", "i.position", "Its place in the draw"),
        id("result_id", "i.result_id", "Result that was drawn"),
        worker,
        date("date", "i.date", "Its day"),
        whole("mark_number", "coalesce(m.number, 0)", "1, 2, 3…: the last counts; 0: not marked"),
        code("mark", "m.word", "in-order or question"),
        freeText("note", "m.note", "What was noted"),
        time("marked_at", utc("m.created_at"), "When it was marked, UTC"),
      ],
      rest: `FROM record_draws d JOIN record_draw_items i ON i.draw_id = d.id JOIN workers w ON w.id = i.worker_id
        LEFT JOIN record_draw_marks m ON m.draw_id = i.draw_id AND m.position = i.position
        WHERE d.site_id = '${siteId}' AND d.year = ${year} AND ${visible(drawPolicy, actor, "d")} ORDER BY d.created_at, d.id, i.position, m.number`,
    },
    {
      name: "trail",
      title: "Events of the trail about the site, in the year",
      key: ["event_id"],
      columns: [
        whole("event_id", "e.id", "Event"),
        time("at", utc("e.at"), "When, UTC"),
        text(
          "actor",
          isNamed ? "u.name" : "e.actor_id::text",
          "Who; empty: the program itself. An id in a file without workers' names",
        ),
        code("action", "e.action", "What was done"),
        code("subject_kind", "e.subject_kind", "To what kind of thing"),
        id("subject_id", "e.subject_id", "To which"),
        id("values_sha256", "encode(e.values_digest, 'hex')", "Salted digest of what changed"),
        whole(
          "seal_number",
          "s.number",
          "Its seal in the organization's chain; empty: not sealed yet",
        ),
        id("seal_sha256", "encode(s.hash, 'hex')", "The seal"),
      ],
      rest: `FROM audit_events e LEFT JOIN users u ON u.id = e.actor_id LEFT JOIN audit_seals s ON s.event_id = e.id
        WHERE e.organization_id = '${actor.organizationId}' AND e.at >= '${year}-01-01' AND e.at < '${year + 1}-01-01' AND ${siteOfEvent("e")} = '${siteId}' ORDER BY e.id`,
    },
  ];
}

/** SQL of a table's records. COPY takes no parameters, so the values stand in the text. */
export const tableQuery = ({ columns, rest }: YearTable): string =>
  `SELECT ${columns.map(({ name, sql, type }) => `${type === "text" ? `csv_text(${sql})` : type === "boolean" ? `(${sql})::text` : sql} AS "${name}"`).join(",\n  ")}\n${rest}`;

const DATATYPES: Record<YearColumn["type"], unknown> = {
  text: "string",
  code: "string",
  id: "string",
  number: "double",
  integer: "integer",
  date: { base: "date", format: "yyyy-MM-dd" },
  time: "string",
  boolean: "boolean",
};

/** What the tables hold, as CSV on the Web metadata (W3C tabular-metadata). */
export function csvMetadata(tables: readonly YearTable[]): object {
  return {
    "@context": ["http://www.w3.org/ns/csvw", { "@language": "en" }],
    tables: tables.map(({ name, title, columns, key }) => ({
      url: `${name}.csv`,
      "dc:title": title,
      dialect: { header: true, encoding: "utf-8", lineTerminators: ["\r\n"] },
      tableSchema: {
        columns: columns.map((one) => ({
          name: one.name,
          titles: one.name,
          datatype: DATATYPES[one.type],
          "dc:description": one.unit ? `${one.meaning} (${one.unit})` : one.meaning,
        })),
        ...(key.length > 0 && { primaryKey: key }),
      },
    })),
  };
}
