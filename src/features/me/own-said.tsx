import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatDate } from "../../../shared/format/date";
import { withinSentence } from "../../../shared/format/words";
import { addDays } from "../../../shared/time/zone";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { isClearlyLess, keptBesideWords, saidWords } from "../../lib/wearing-answers";
import { OWN_REPORT, paths } from "../../paths";
import { ownQueries } from "./queries";

/** So far back is what was said of other days shown: as long as it can be said anew. */
const SHOWN_DAYS = 14;

/** What the worker said of the last shift's wearing, or the way to say it; and what was said of days shortly before. */
export function OwnSaid({
  workerId,
  lastDate,
  hasFigure,
  askedFor,
  today,
}: {
  workerId: string;
  lastDate: string;
  /** Whether a level at the ear stands above for the last shift. */
  hasFigure: boolean;
  /** The date for which the head of the page asks it already: its way is not offered twice. */
  askedFor: string | undefined;
  today: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const since = addDays(today, -SHOWN_DAYS);
  const reports = useQuery(ownQueries.reports(workerId, lastDate < since ? lastDate : since));
  // Without an answer nothing is known of what was said: the way to the day is there all the same.
  const rows = reports.data ?? [];
  const dates = [
    lastDate,
    ...new Set(rows.map(({ date }) => date).filter((date) => date !== lastDate)),
  ];
  return dates.map((date) => {
    const said = rows.filter((one) => one.date === date);
    const day = formatDate(date, locale);
    const to = `${paths.myDay(date)}#${OWN_REPORT}`;
    if (said.length === 0 && date === askedFor) return null;
    if (said.length === 0)
      return reports.isPending ? (
        <p key={date} className="me-note">
          &nbsp;
        </p>
      ) : (
        <p key={date}>
          <TextLink className="me-list-link" to={to}>
            {i18n.t("Say how long you wore it")}
          </TextLink>
        </p>
      );
    const beside = keptBesideWords(
      i18n,
      said.map(({ taskName, statedPct }) => ({ name: taskName, statedPct })),
    );
    return (
      <div key={date} className="me-said">
        {date === lastDate && hasFigure && said.some(isClearlyLess) && (
          <p>{i18n.t("You said you did not wear it all the time: with that it would be more.")}</p>
        )}
        <p>
          {i18n.t("Worn on {day}, as you said: {said}.", {
            day,
            said: said
              .map((one) =>
                i18n.t("{often} in {task}", {
                  often: withinSentence(saidWords(i18n, one), locale),
                  task: one.taskName,
                }),
              )
              .join("; "),
          })}
        </p>
        {beside && <p className="me-note">{beside}</p>}
        <TextLink className="me-list-link" to={to}>
          {said.some(({ canChange }) => canChange) ? i18n.t("Say it anew") : i18n.t("Look")}
          <span className="sr-only">{`, ${day}`}</span>
        </TextLink>
      </div>
    );
  });
}
