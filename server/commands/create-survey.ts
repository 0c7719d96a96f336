import type { SurveyChange, SurveyInput } from "../../shared/schemas/survey";
import { recordAudit } from "../lib/audit";
import { daysFromTo, spanIssues } from "../lib/date-range";
import { execute, rows } from "../lib/db";
import { issue, notFound, unprocessable } from "../lib/errors";
import { type Actor, visible } from "../lib/policy";
import { Survey } from "../models/survey";
import { programmePolicy, workerPolicy } from "../policies";

/** A survey as planned: what is to be sampled, on whom, with what. */
export async function createSurvey(actor: Actor, input: SurveyInput): Promise<Survey> {
  await checkSurvey(actor, input.siteId, input);
  const { targets: _, people: __, reservations: ___, observers: ____, ...facts } = input;
  const survey = await Survey.create({
    organizationId: actor.organizationId,
    authorId: actor.userId,
    state: "planned",
    ...facts,
  });
  await saveSurveyParts(actor, survey.id, input);
  await recordAudit(actor, {
    action: "create-survey",
    subjectKind: "survey",
    subjectId: survey.id,
    values: { ...input },
  });
  return survey;
}

/** @throws AppError not-found or invalid: what it names is of its site, and nothing stands in it twice. */
export async function checkSurvey(
  actor: Actor,
  siteId: string,
  input: SurveyChange,
): Promise<void> {
  const { targets, people, reservations, strategy } = input;
  const issues = spanIssues(input.fromDate, input.toDate);
  const siteOf = async (table: string, ids: readonly string[], sees: string) => {
    const found =
      ids.length === 0
        ? []
        : await rows<{ id: string; siteId: string }>(
            `SELECT x.id, x.site_id AS "siteId" FROM ${table} x WHERE x.id IN (:ids) AND ${sees}`,
            { ids },
          );
    const sites = new Map(found.map((one) => [one.id, one.siteId]));
    if (ids.some((id) => !sites.has(id))) throw notFound();
    return sites;
  };
  const programme = visible(programmePolicy, actor, "x");
  const tasks = await siteOf(
    "tasks",
    targets.flatMap(({ taskId }) => taskId ?? []),
    programme,
  );
  const instruments = await siteOf(
    "instruments",
    reservations.map(({ instrumentId }) => instrumentId),
    programme,
  );
  const workers = await siteOf(
    "workers",
    people.map(({ workerId }) => workerId),
    visible(workerPolicy, actor, "x"),
  );
  const taskIds = targets.map(({ taskId }) => taskId);
  targets.forEach(({ taskId }, index) => {
    const path = ["targets", index, "taskId"];
    if ((taskId === null) === (strategy === "task"))
      issues.push(issue(path, strategy === "task" ? "task-needed" : "no-task-by-job"));
    else if (taskIds.indexOf(taskId) !== index) issues.push(issue(path, "task-twice"));
    else if (taskId !== null && tasks.get(taskId) !== siteId)
      issues.push(issue(path, "task-of-other-site"));
  });
  people.forEach(({ workerId }, index) => {
    if (people.findIndex((other) => other.workerId === workerId) !== index)
      issues.push(issue(["people", index, "workerId"], "worker-twice"));
    else if (workers.get(workerId) !== siteId)
      issues.push(issue(["people", index, "workerId"], "worker-of-other-site"));
  });
  reservations.forEach(({ instrumentId }, index) => {
    if (instruments.get(instrumentId) !== siteId)
      issues.push(issue(["reservations", index, "instrumentId"], "instrument-of-other-site"));
  });
  if (issues.length > 0) throw unprocessable(issues);
}

/** Puts what hangs on a survey in the place of what hung on it. */
export async function saveSurveyParts(
  actor: Actor,
  surveyId: string,
  { targets, people, reservations, observers }: SurveyChange,
): Promise<void> {
  const given = [actor.organizationId, surveyId] as const;
  await execute("UPDATE surveys SET observers = $2::text[] WHERE id = $1", [surveyId, observers]);
  for (const table of ["survey_targets", "survey_people", "instrument_reservations"])
    await execute(`DELETE FROM ${table} WHERE survey_id = $1`, [surveyId]);
  await execute(
    `INSERT INTO survey_targets (organization_id, survey_id, position, task_id, samples_count, sample_min, pattern, cycle_min)
     SELECT $1::uuid, $2::uuid, t.ordinality - 1, (t.value->>'taskId')::uuid, (t.value->>'samplesCount')::int, (t.value->>'sampleMin')::float8,
       t.value->>'pattern', (t.value->>'cycleMin')::float8
     FROM jsonb_array_elements($3::jsonb) WITH ORDINALITY t`,
    [...given, JSON.stringify(targets)],
  );
  await execute(
    `INSERT INTO survey_people (organization_id, survey_id, worker_id, part, position)
     SELECT $1::uuid, $2::uuid, (p.value->>'workerId')::uuid, p.value->>'part', p.ordinality - 1
     FROM jsonb_array_elements($3::jsonb) WITH ORDINALITY p`,
    [...given, JSON.stringify(people)],
  );
  await execute(
    `INSERT INTO instrument_reservations (organization_id, survey_id, instrument_id, valid)
     SELECT $1::uuid, $2::uuid, (v->>'instrumentId')::uuid, ${daysFromTo("(v->>'fromDate')", "(v->>'toDate')")}
     FROM jsonb_array_elements($3::jsonb) v`,
    [...given, JSON.stringify(reservations)],
  );
}
