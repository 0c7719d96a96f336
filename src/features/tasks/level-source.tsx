import { useLingui } from "@lingui/react";
import type { z } from "zod";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { withoutStop } from "../../../shared/format/words";
import type { TaskLevelView } from "../../../shared/schemas/task";
import { strategyWord } from "../../../shared/words/register-words";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { MeasuredLink } from "./measured-link";

type Level = z.infer<typeof TaskLevelView>;

/** The survey that a level rests on. */
export function SurveyOfLevel({ level }: { level: Level }) {
  const { i18n } = useLingui();
  return (
    <span>
      <MeasuredLink to={paths.survey(level.surveyId ?? "")}>{level.surveyName}</MeasuredLink>,{" "}
      {strategyWord(i18n, level.strategy)}
    </span>
  );
}

/** Where the level in force comes from: its survey, each sample with its own run, and what was kept all the same. */
export function LevelSource({ level }: { level: Level }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <>
      <p>
        <SurveyOfLevel level={level} />
      </p>
      <ul>
        {level.samples.map(({ runId, date, levelDb, fromS }) => (
          <li key={`${runId} ${fromS ?? ""}`}>
            <span className="mono">{formatLevel(levelDb, locale)}</span>{" "}
            <MeasuredLink to={paths.run(runId)}>
              {i18n.t("run of {date}", { date: formatShortDate(date, locale) })}
            </MeasuredLink>
          </li>
        ))}
      </ul>
      {level.keptReasons.map((reason) => (
        <p key={reason}>
          <b>{i18n.t("Kept: {reason}.", { reason: withoutStop(reason) })}</b>{" "}
          {i18n.t("The level no longer bears the standard’s name.")}
        </p>
      ))}
    </>
  );
}
