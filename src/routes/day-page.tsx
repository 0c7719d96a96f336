import { useLingui } from "@lingui/react";
import { useQuery, useQueryClient } from "@tanstack/react-query";
import { useMemo } from "react";
import { useNavigate, useParams } from "react-router-dom";
import { formatDay, formatWeekday, parseDate } from "../../shared/format/date";
import type { DayGridView } from "../../shared/schemas/shift";
import { addDays } from "../../shared/time/zone";
import { DateInput } from "../components/date-input";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { PageBody, PageHead } from "../components/page";
import { DayEntry } from "../features/day-entry/day-entry";
import { createDraftStore } from "../features/day-entry/draft-store";
import { dayEntryQueries } from "../features/day-entry/queries";
import { useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { Component as NotFound } from "./not-found";
import "../styles/day-grid.css";

/** Day entry: one crew, one date. */
export function Component() {
  const { crewId = "", date = "" } = useParams();
  if (parseDate(date, "en") !== date) return <NotFound />;
  return <Day key={`${crewId} ${date}`} crewId={crewId} date={date} />;
}

function Day({ crewId, date }: { crewId: string; date: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id: userId } = useUser();
  const query = dayEntryQueries.grid(crewId, date);
  const { data: view, error, refetch } = useQuery(query);
  const client = useQueryClient();
  const store = useMemo(
    () => createDraftStore(window.localStorage, userId, crewId, date),
    [userId, crewId, date],
  );
  const setView = (next: DayGridView) => {
    client.setQueryData(query.queryKey, next);
    void client.invalidateQueries({ queryKey: dayEntryQueries.progress().queryKey });
  };
  const way = <Way crewId={crewId} date={date} today={view?.today ?? null} />;
  if (view && view.rows.length > 0 && view.date <= view.today) {
    return (
      <PageBody>
        <DayEntry view={view} store={store} way={way} onView={setView} />
      </PageBody>
    );
  }
  const title = view ? `${view.crew.name}, ${formatDay(view.date, locale)}` : i18n.t("Day entry");
  return (
    <PageBody>
      <div className="day-entry">
        <PageHead way={way} title={title} />
        {error && !view && <Failed error={error} onRetry={() => void refetch()} />}
        {!error && !view && <LoadingGrid />}
        {view && view.date > view.today && (
          <Empty title={i18n.t("This day has not begun yet.")}>
            <TextLink to={paths.day(crewId, view.today)}>{i18n.t("Enter today")}</TextLink>
          </Empty>
        )}
        {view && view.date <= view.today && view.rows.length === 0 && (
          <Empty title={i18n.t("Nobody was in this crew on that day.")}>
            <TextLink to={paths.crew(crewId)}>{i18n.t("Members of the crew")}</TextLink>
          </Empty>
        )}
      </div>
    </PageBody>
  );
}

/** The frame at once, hairlines where the figures will stand. */
function LoadingGrid() {
  return (
    <div className="day-grid-region" aria-busy="true">
      <table className="day-grid">
        <tbody>
          {["first", "second", "third", "fourth"].map((key) => (
            <tr key={key}>
              <th className="who">
                <span className="loading-line" />
              </th>
              <td className="cell is-bare">
                <span className="loading-line" />
              </td>
              <td className="cell is-bare">
                <span className="loading-line" />
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

function Way({ crewId, date, today }: { crewId: string; date: string; today: string | null }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const navigate = useNavigate();
  const before = addDays(date, -1);
  const after = addDays(date, 1);
  return (
    <>
      <TextLink to={`${paths.days}?crew=${crewId}`}>{i18n.t("Days")}</TextLink>
      <TextLink to={paths.day(crewId, before)} aria-label={i18n.t("The day before")}>
        ‹ {formatWeekday(before, locale)}
      </TextLink>
      {today !== null && after <= today && (
        <TextLink to={paths.day(crewId, after)} aria-label={i18n.t("The day after")}>
          {formatWeekday(after, locale)} ›
        </TextLink>
      )}
      <label htmlFor="another-day">
        {i18n.t("Another day")}{" "}
        <DateInput
          id="another-day"
          max={today ?? undefined}
          value={date}
          onChoose={(chosen) => void navigate(paths.day(crewId, chosen))}
        />
      </label>
    </>
  );
}
