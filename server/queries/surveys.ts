import type { z } from "zod";
import type {
  SurveyDetail,
  SurveyFilter,
  SurveyPage,
  SurveyRow,
  SurveyView,
} from "../../shared/schemas/survey";
import { decodeCursor, pageFrom } from "../lib/cursor";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { surveyPolicy, workerPolicy } from "../policies";
import { FAILED_ON } from "./calibrations";
import { nominalDay, shiftMinOf } from "./survey-plan";
import { resultOf, type SurveyHead, samplesOfSurveys, type Target } from "./survey-samples";

/** SQL: a run counts, or could. Refused and still out it does not. */
const COUNTS = "NOT r.is_void AND NOT r.is_out AND (v.doubts = '{}' OR v.kept_reason IS NOT NULL)";

export async function listSurveys(
  actor: Actor,
  filter: z.output<typeof SurveyFilter>,
): Promise<z.input<typeof SurveyPage>> {
  const cursor = decodeCursor(filter.cursor, 2);
  const conditions = [visible(surveyPolicy, actor, "y")];
  if (filter.siteId) conditions.push("y.site_id = :siteId");
  if (filter.jobId) conditions.push("y.job_id = :jobId");
  if (filter.state) conditions.push("y.state = :state");
  if (cursor)
    conditions.push("(y.from_date, y.id) < (CAST(:beforeDate AS date), CAST(:beforeId AS uuid))");
  const found = await rows<z.infer<typeof SurveyRow>>(
    `SELECT y.id, y.site_id AS "siteId", y.job_id AS "jobId", j.name AS "jobName", y.name, y.strategy, y.state,
       y.from_date::text AS "fromDate", y.to_date::text AS "toDate",
       (SELECT coalesce(sum(t.samples_count), 0)::int FROM survey_targets t WHERE t.survey_id = y.id) AS "wantedCount",
       -- By tasks a run on a worker is as many samples as brackets are drawn under it.
       (SELECT coalesce(sum(CASE WHEN y.strategy <> 'task' OR r.task_id IS NOT NULL THEN 1
            ELSE (SELECT count(*) FROM time_histories h JOIN time_history_revisions q ON q.id = h.current_revision_id,
              jsonb_array_elements(q.stretches) x WHERE h.run_id = r.id AND NOT h.is_void AND x->>'kind' = 'task') END), 0)::int
        FROM runs r JOIN run_revisions v ON v.id = r.current_revision_id WHERE r.survey_id = y.id AND ${COUNTS}) AS "samplesCount"
     FROM surveys y JOIN jobs j ON j.id = y.job_id WHERE ${conditions.join(" AND ")}
     ORDER BY y.from_date DESC, y.id DESC LIMIT :limit`,
    {
      siteId: filter.siteId,
      jobId: filter.jobId,
      state: filter.state,
      beforeDate: cursor?.[0] ?? null,
      beforeId: cursor?.[1] ?? null,
      limit: filter.limit + 1,
    },
  );
  return pageFrom(found, filter.limit, ({ fromDate, id }) => [fromDate, id]);
}

type Head = Omit<SurveyView, "can" | "createdAt"> & { createdAt: Date; groupSize: number };

export interface MeasuredSurvey extends SurveyHead {
  head: Head;
  groupSize: number;
  nominal: Awaited<ReturnType<typeof nominalDay>>;
}

/** A survey with what it is to sample. */
export async function surveyHead(id: string): Promise<MeasuredSurvey> {
  const head = only(
    await rows<Head>(
      `SELECT y.id, y.site_id AS "siteId", y.job_id AS "jobId", j.name AS "jobName", y.name, y.purpose, y.strategy, y.state,
         y.from_date::text AS "fromDate", y.to_date::text AS "toDate", y.draw_seed AS "drawSeed", y.observers, y.risk_factors AS "riskFactors",
         y.closing_note AS "closingNote", u.name AS "authorName", y.created_at AS "createdAt", y.revision,
         (SELECT count(*)::int FROM workers w WHERE w.job_id = y.job_id AND (w.left_on IS NULL OR w.left_on >= current_date)) AS "groupSize",
         (SELECT json_agg(json_build_object('taskId', t.task_id, 'samplesCount', t.samples_count, 'sampleMin', t.sample_min,
            'pattern', t.pattern, 'cycleMin', t.cycle_min) ORDER BY t.position)
          FROM survey_targets t WHERE t.survey_id = y.id) AS targets,
         coalesce((SELECT json_agg(json_build_object('workerId', p.worker_id, 'part', p.part) ORDER BY p.position)
          FROM survey_people p WHERE p.survey_id = y.id), '[]') AS people,
         coalesce((SELECT json_agg(json_build_object('instrumentId', v.instrument_id, 'fromDate', lower(v.valid)::text, 'toDate', (upper(v.valid) - 1)::text)
            ORDER BY lower(v.valid), v.instrument_id) FROM instrument_reservations v WHERE v.survey_id = y.id), '[]') AS reservations
       FROM surveys y JOIN jobs j ON j.id = y.job_id LEFT JOIN users u ON u.id = y.author_id WHERE y.id = :id`,
      { id },
    ),
  );
  const nominal = await nominalDay(head.jobId);
  const names = await rows<{ id: string; name: string }>(
    "SELECT id, name FROM tasks WHERE id = ANY ($1::uuid[])",
    [head.targets.map(({ taskId }) => taskId)],
  );
  const nameOf = new Map(names.map(({ id: taskId, name }) => [taskId, name]));
  const minutesOf = new Map(nominal.map(({ taskId, durationMin }) => [taskId, durationMin]));
  const shiftMin = shiftMinOf(nominal);
  const targets = head.targets.map(
    ({ taskId, sampleMin, ...planned }, position): Target => ({
      ...planned,
      position,
      taskId,
      taskName: taskId === null ? null : (nameOf.get(taskId) ?? null),
      sampleMin,
      // A task that is no longer in the nominal day is as long as its sample, at the least.
      nominalMin: taskId === null ? shiftMin : (minutesOf.get(taskId) ?? sampleMin),
    }),
  );
  return { id, strategy: head.strategy, targets, head, groupSize: head.groupSize, nominal };
}

export async function surveyDetail(actor: Actor, id: string): Promise<SurveyDetail> {
  const survey = await surveyHead(id);
  const { head, targets, groupSize, nominal, strategy } = survey;
  const samples = (await samplesOfSurveys([survey])).get(id) ?? [];
  const people = await rows<{ id: string; name: string; employeeNumber: string }>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber" FROM survey_people p JOIN workers w ON w.id = p.worker_id
     WHERE p.survey_id = :id AND ${visible(workerPolicy, actor, "w")}`,
    { id },
  );
  const instruments = await rows<{
    id: string;
    name: string;
    serialNumber: string;
    calibrationDueOn: string | null;
    calibrationFailedOn: string | null;
  }>(
    `SELECT DISTINCT i.id, i.name, i.serial_number AS "serialNumber", i.calibration_due_on::text AS "calibrationDueOn",
       ${FAILED_ON("i.id")} AS "calibrationFailedOn"
     FROM instrument_reservations v JOIN instruments i ON i.id = v.instrument_id WHERE v.survey_id = :id`,
    { id },
  );
  const adopted = await rows<SurveyDetail["adopted"][number]>(
    `SELECT l.task_id AS "taskId", t.name AS "taskName", l.level_db AS "levelDb", l.effective_from::text AS "effectiveFrom",
       l.id IS NOT DISTINCT FROM (SELECT f.id FROM task_levels f WHERE f.task_id = l.task_id AND f.effective_from <= current_date
         ORDER BY f.effective_from DESC, f.number DESC LIMIT 1) AS "isInForce"
     FROM task_levels l JOIN tasks t ON t.id = l.task_id WHERE l.survey_id = :id ORDER BY t.name, l.number`,
    { id },
  );
  const seenNames = new Set(people.map((person) => person.id));
  const { createdAt, groupSize: _, ...facts } = head;
  return {
    ...facts,
    createdAt: createdAt.toISOString(),
    peopleNames: Object.fromEntries(
      people.map(({ id: workerId, name, employeeNumber }) => [workerId, { name, employeeNumber }]),
    ),
    taskNames: Object.fromEntries(
      targets.flatMap(({ taskId, taskName }) =>
        taskId === null || taskName === null ? [] : [[taskId, taskName]],
      ),
    ),
    instrumentNames: Object.fromEntries(
      instruments.map(({ id: instrumentId, ...instrument }) => [instrumentId, instrument]),
    ),
    nominalDay: nominal.map(({ areaId: _area, ...task }) => task),
    samples: await withVisibleNames(actor, samples, seenNames),
    results: targets.map((target) => resultOf(strategy, target, samples, groupSize)),
    adopted,
    can: abilities(surveyPolicy, actor, head),
  };
}

/** Whose sample it is, only for those who may see that worker. */
async function withVisibleNames(
  actor: Actor,
  samples: SurveyDetail["samples"],
  known: ReadonlySet<string>,
): Promise<SurveyDetail["samples"]> {
  const others = [
    ...new Set(
      samples.flatMap(({ workerId }) => (workerId && !known.has(workerId) ? [workerId] : [])),
    ),
  ];
  const seen =
    others.length === 0
      ? []
      : await rows<{ id: string }>(
          `SELECT w.id FROM workers w WHERE w.id IN (:others) AND ${visible(workerPolicy, actor, "w")}`,
          { others },
        );
  const ids = new Set([...known, ...seen.map(({ id }) => id)]);
  return samples.map((sample) =>
    sample.workerId === null || ids.has(sample.workerId)
      ? sample
      : { ...sample, workerId: null, workerName: null },
  );
}
