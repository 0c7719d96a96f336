import type { z } from "zod";
import type { SurveyStateChange } from "../../shared/schemas/survey";
import { recordAudit } from "../lib/audit";
import { execute } from "../lib/db";
import { AppError, issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import type { Survey } from "../models/survey";

type State = z.output<typeof SurveyStateChange>["state"];

/** From each state to which others. What is struck stays struck; what is done can be taken up again. */
const NEXT: Readonly<Record<State, readonly State[]>> = {
  planned: ["measuring", "struck"],
  measuring: ["planned", "done", "struck"],
  done: ["measuring", "struck"],
  struck: [],
};

/** @throws AppError wrong-state, or invalid where a survey is struck without a reason. */
export async function setSurveyState(
  actor: Actor,
  survey: Survey,
  { state, note }: z.output<typeof SurveyStateChange>,
): Promise<void> {
  const from: State = survey.state;
  if (!NEXT[from].includes(state)) throw new AppError("wrong-state", 409);
  if (state === "struck" && note === null) throw unprocessable([issue(["note"], "reason-needed")]);
  await survey.update({ state, closingNote: note, revision: survey.revision + 1 });
  // Nobody waits for an instrument of a survey that is over.
  if (state === "struck")
    await execute("DELETE FROM instrument_reservations WHERE survey_id = $1", [survey.id]);
  await recordAudit(actor, {
    action: "set-survey-state",
    subjectKind: "survey",
    subjectId: survey.id,
    values: { state: { from, to: state }, ...(note === null ? {} : { reason: note }) },
  });
}
