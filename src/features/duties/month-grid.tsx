import { useLingui } from "@lingui/react";
import { dutyWord } from "../../../shared/findings/duty-words";
import { formatDay } from "../../../shared/format/date";
import type { DutyItem } from "../../../shared/schemas/duty";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { dutyPath } from "./duty-link";
import { weeksOf } from "./weeks-of";

const SHOWN_A_DAY = 3;

/** A month with what is due on each day; on a phone only the days that have something. */
export function MonthGrid({
  month,
  today,
  items,
  isLoading,
}: {
  /** YYYY-MM. */
  month: string;
  today: string;
  items: readonly DutyItem[];
  isLoading: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const weeks = weeksOf(month);
  const weekday = new Intl.DateTimeFormat(locale, { weekday: "short", timeZone: "UTC" });
  return (
    <table className="month-grid" aria-busy={isLoading}>
      <caption className="sr-only">{i18n.t("What is due, day by day")}</caption>
      <thead>
        <tr>
          {(weeks[0] ?? []).map((date) => (
            <th key={date} scope="col">
              {weekday.format(new Date(`${date}T00:00:00Z`))}
            </th>
          ))}
        </tr>
      </thead>
      <tbody>
        {weeks.map((week) => (
          <tr key={week[0]}>
            {week.map((date) => {
              const due = items.filter(({ dueOn }) => dueOn === date);
              return (
                <td
                  key={date}
                  className={[
                    date.startsWith(month) ? "" : "is-other",
                    due.length === 0 ? "is-free" : "",
                    date === today ? "is-today" : "",
                  ].join(" ")}
                >
                  <span className="month-day">
                    <span className="sr-only">{formatDay(date, locale)}</span>
                    <span aria-hidden="true">{Number(date.slice(8))}</span>
                    {date === today && <b> {i18n.t("today")}</b>}
                  </span>
                  {due.length > 0 && (
                    <ul>
                      {due.slice(0, SHOWN_A_DAY).map((item) => (
                        <li key={item.key}>
                          <TextLink className="is-quiet" to={dutyPath(item)}>
                            {dutyWord(i18n, item)}
                            {(item.worker?.name ?? item.what) &&
                              `: ${item.worker?.name ?? item.what}`}
                          </TextLink>
                        </li>
                      ))}
                      {due.length > SHOWN_A_DAY && (
                        <li>{i18n.t("and {count} more", { count: due.length - SHOWN_A_DAY })}</li>
                      )}
                    </ul>
                  )}
                </td>
              );
            })}
          </tr>
        ))}
      </tbody>
    </table>
  );
}
