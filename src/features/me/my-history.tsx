import { useLingui } from "@lingui/react";
import { useId, useState } from "react";
import { formatMonth, formatShortDate } from "../../../shared/format/date";
import { BOUND_MARK, formatWholeLevel } from "../../../shared/format/level";
import { Empty } from "../../components/empty";
import { HistoryChart, type HistoryMark } from "../../components/history-chart";
import { TextButton, TextLink } from "../../components/link";
import { Verdict } from "../../components/verdict";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import type { OwnProtector } from "./own-protectors";
import type { OwnDay } from "./queries";
import { weeksOf } from "./weeks";
import { nameOf } from "./what-to-do";

/** Over a longer time the days' ticks run into one another on a phone. */
const LONGEST_BY_DAY = 100;
/** With more, a figure at the highest would stand in the crowd. */
const MOST_OVER_WITH_NOTE = 3;
const ROWS_AT_ONCE = 20;

const daysBetween = (from: string, to: string) => (Date.parse(to) - Date.parse(from)) / 86_400_000;

/** The year as a picture, and the same as a list behind it. */
export function MyHistory({
  days,
  assignments,
}: {
  /** Latest first, as they come. */
  days: readonly OwnDay[];
  assignments: readonly OwnProtector[];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const listId = useId();
  const [showsList, setShowsList] = useState(false);
  const [rowCount, setRowCount] = useState(ROWS_AT_ONCE);
  if (days.length === 0) return <Empty title={i18n.t("No shift of yours is recorded yet.")} />;

  const inOrder = days.map(({ date, atEarDb }) => ({ date, levelDb: atEarDb })).reverse();
  const first = inOrder[0]?.date ?? "";
  const isByWeek = daysBetween(first, inOrder.at(-1)?.date ?? first) > LONGEST_BY_DAY;
  const shown = isByWeek ? weeksOf(inOrder) : inOrder;
  const limit = days[0]?.limit;
  const limitDb = limit?.isAtEar ? limit.levelDb : null;
  const over = shown
    .filter(({ levelDb }) => levelDb !== null && limitDb !== null && levelDb > limitDb)
    .sort((a, b) => (b.levelDb ?? 0) - (a.levelDb ?? 0));
  const worst = over.length <= MOST_OVER_WITH_NOTE ? over[0] : undefined;
  const marks: HistoryMark[] = assignments
    .filter(({ use, fromDate }) => use === "everywhere" && fromDate > first)
    .map((one) => ({
      date: one.fromDate,
      label: i18n.t("your {protector}, from {month}", {
        protector: nameOf(i18n, one),
        month: formatMonth(one.fromDate, locale),
      }),
    }));
  return (
    <>
      <HistoryChart
        variant="worker"
        title={i18n.t("My year at the ear")}
        days={shown.map((day) =>
          day === worst ? { ...day, note: formatWholeLevel(day.levelDb, locale) } : day,
        )}
        limitDb={limitDb}
        marks={marks}
        tableLink={
          <TextButton
            className="me-list-link"
            aria-expanded={showsList}
            aria-controls={listId}
            onClick={() => setShowsList(!showsList)}
          >
            {i18n.t("The same as a list")}
          </TextButton>
        }
      />
      {isByWeek && (
        <p className="me-note">
          {i18n.t("Each mark is the loudest day of a week. The list has every day.")}
        </p>
      )}
      <div id={listId} hidden={!showsList}>
        {showsList && (
          <table className="data-table me-list">
            <caption className="sr-only">{i18n.t("My year at the ear")}</caption>
            <thead>
              <tr>
                <th scope="col">{i18n.t("Day")}</th>
                <th scope="col" className="is-right">
                  {i18n.t("At your ear")}
                  <span className="unit block">{i18n.t("decibels")}</span>
                </th>
                <th scope="col" className="is-right">
                  {i18n.t("Around you")}
                  <span className="unit block">{i18n.t("decibels")}</span>
                </th>
                <th scope="col">
                  {limitDb !== null &&
                    i18n.t("Limit {limit}", { limit: formatWholeLevel(limitDb, locale) })}
                </th>
              </tr>
            </thead>
            <tbody>
              {days.slice(0, rowCount).map((day) => (
                <tr key={day.date}>
                  <th scope="row">
                    <TextLink to={paths.myDay(day.date)}>
                      {formatShortDate(day.date, locale)}
                    </TextLink>
                  </th>
                  <td className="is-figure">
                    {day.atEarDb !== null && BOUND_MARK[day.atEarBound]}
                    {formatWholeLevel(day.atEarDb, locale, limitDb)}
                  </td>
                  <td className="is-figure">
                    {day.outsideDb !== null && BOUND_MARK[day.outsideBound]}
                    {formatWholeLevel(day.outsideDb, locale)}
                  </td>
                  <td>{limitDb !== null && <Verdict verdict={day.verdictAtEar} />}</td>
                </tr>
              ))}
            </tbody>
          </table>
        )}
        {showsList && rowCount < days.length && (
          <TextButton className="me-list-link" onClick={() => setRowCount(rowCount * 3)}>
            {i18n.t("and more")}
          </TextButton>
        )}
      </div>
    </>
  );
}
