import type { SurveyChange } from "../../shared/schemas/survey";
import { recordAudit } from "../lib/audit";
import { changesBetween, isUnchanged } from "../lib/changes";
import { row } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Survey } from "../models/survey";
import { checkSurvey, saveSurveyParts } from "./create-survey";

/**
 * A survey's plan is changed until it is done. Its strategy stays once something has been measured under it: the samples
 * were taken by it.
 */
export async function changeSurvey(
  actor: Actor,
  survey: Survey,
  before: SurveyChange,
  input: SurveyChange,
): Promise<void> {
  if (survey.state === "done" || survey.state === "struck") throw new AppError("wrong-state", 409);
  await checkSurvey(actor, survey.siteId, input);
  if (input.strategy !== survey.strategy && (await hasRuns(survey.id)))
    throw unprocessable([issue(["strategy"], "strategy-fixed")]);
  const changes = changesBetween(before, input);
  if (isUnchanged(changes)) return;
  const { targets: _, people: __, reservations: ___, observers: ____, ...facts } = input;
  await survey.update({ ...facts, revision: survey.revision + 1 });
  await saveSurveyParts(actor, survey.id, input);
  await recordAudit(actor, {
    action: "change-survey",
    subjectKind: "survey",
    subjectId: survey.id,
    values: changes,
  });
}

const hasRuns = async (surveyId: string): Promise<boolean> =>
  (await row("SELECT 1 AS one FROM runs WHERE survey_id = :surveyId AND NOT is_void LIMIT 1", {
    surveyId,
  })) !== null;
