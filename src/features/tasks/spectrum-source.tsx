import { useLingui } from "@lingui/react";
import type { z } from "zod";
import type { TaskLevelView } from "../../../shared/schemas/task";

import { paths } from "../../paths";
import { MeasuredLink } from "./measured-link";

/** Where a spectrum in force comes from: a recording, a survey, or whoever typed it. */
export function SpectrumSource({ level }: { level: z.infer<typeof TaskLevelView> }) {
  const { i18n } = useLingui();
  const { recordingId, surveyId, authorName, spectrumOfNumber } = level;
  if (spectrumOfNumber !== null)
    return (
      <p>
        {i18n.t("Kept from level {number} of this task, shifted as a whole to the new level.", {
          number: spectrumOfNumber,
        })}
      </p>
    );
  if (recordingId !== null)
    return (
      <p>
        {i18n.t("From the recording")}{" "}
        <MeasuredLink to={paths.recording(recordingId)}>{level.recordingName}</MeasuredLink>
      </p>
    );
  if (surveyId !== null)
    return (
      <p>
        {i18n.t("From the survey")}{" "}
        <MeasuredLink to={paths.survey(surveyId)}>{level.surveyName}</MeasuredLink>
      </p>
    );
  return (
    <p>
      {authorName !== null
        ? i18n.t("Entered by {name}.", { name: authorName })
        : i18n.t("Entered with the level.")}
    </p>
  );
}
