import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useNavigate, useSearchParams } from "react-router-dom";
import { formatDay } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import type { CrewView } from "../../shared/schemas/crew";
import type { CrewProgress } from "../../shared/schemas/waiting";
import { addDays } from "../../shared/time/zone";
import { DataTable } from "../components/data-table";
import { DateInput } from "../components/date-input";
import { Empty } from "../components/empty";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { dayEntryQueries } from "../features/day-entry/queries";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/day-grid.css";

const LAST_DAYS = 7;

interface Progress {
  readonly members: number;
  readonly saved: number;
  readonly absent: number;
}

/** How far a day is entered: in words, and as a bar for the eye. */
function Entered({ progress }: { progress: Progress | null }) {
  const { i18n } = useLingui();
  if (!progress) return <span className="loading-line" />;
  const { members, saved, absent } = progress;
  if (members === 0) return <span className="beneath">{i18n.t("nobody in the crew")}</span>;
  const done = saved + absent;
  return (
    <>
      <span className="day-bar" aria-hidden="true">
        <span style={{ width: `${(100 * Math.min(done, members)) / members}%` }} />
      </span>{" "}
      {i18n.t("{done} of {members}", { done, members })}
      {absent > 0 && (
        <span className="beneath"> {i18n.t("{count} of them absent", { count: absent })}</span>
      )}
    </>
  );
}

/** Which crew, which day. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const navigate = useNavigate();
  const [search, setSearch] = useSearchParams();
  const { data, error, isPending, refetch } = useQuery(dayEntryQueries.crews());
  const { data: waiting } = useQuery(dayEntryQueries.progress());
  const crews = data?.rows.filter((crew) => !crew.isArchived && crew.can.enterDay) ?? [];
  const progress = new Map(waiting?.crews.map((crew): [string, CrewProgress] => [crew.id, crew]));
  const chosen = crews.find(({ id }) => id === search.get("crew")) ?? crews[0];
  const todayOf = (crew: CrewView) => progress.get(crew.id)?.date ?? waiting?.today ?? null;
  const today = chosen ? todayOf(chosen) : null;
  return (
    <PageBody>
      <PageHead
        title={i18n.t("Days")}
        lead={i18n.t(
          "Pick a crew and a date: the grid opens filled in, you type what was different.",
        )}
      />
      <DataTable<CrewView>
        caption={i18n.t("Crews and their day of today")}
        rows={crews}
        rowKey={({ id }) => id}
        state={error ? "failed" : isPending ? "loading" : "ready"}
        error={error}
        onRetry={() => void refetch()}
        isSelected={({ id }) => id === chosen?.id}
        empty={
          <Empty title={i18n.t("There is no crew whose days you enter.")}>
            <TextLink to={paths.crews}>{i18n.t("Crews")}</TextLink>
          </Empty>
        }
        columns={[
          {
            id: "crew",
            head: i18n.t("Crew"),
            isRowHead: true,
            cell: (crew) => {
              const date = todayOf(crew);
              return date ? (
                <TextLink to={paths.day(crew.id, date)}>{crew.name}</TextLink>
              ) : (
                crew.name
              );
            },
          },
          {
            id: "site",
            head: i18n.t("Site"),
            cell: ({ siteName }) => siteName,
            hidesOnPhone: true,
          },
          {
            id: "usual",
            head: i18n.t("Usual shift"),
            cell: ({ usualStart, usualLengthMin }) =>
              `${usualStart}, ${formatDuration(usualLengthMin, locale)}`,
            hidesOnPhone: true,
          },
          {
            id: "today",
            head: i18n.t("Entered today"),
            cell: ({ id }) => <Entered progress={progress.get(id) ?? null} />,
          },
          {
            id: "days",
            head: i18n.t("Other days"),
            cell: ({ id, name }) => (
              <TextLink
                to={`?crew=${id}#last-days`}
                aria-label={i18n.t("Last days of {crew}", { crew: name })}
                onClick={(event) => {
                  event.preventDefault();
                  setSearch({ crew: id }, { replace: true });
                }}
              >
                {i18n.t("Last days")}
              </TextLink>
            ),
          },
        ]}
      />
      {chosen && today && (
        <Section title={i18n.t("Last days of {crew}", { crew: chosen.name })} id="last-days">
          <LastDays crewId={chosen.id} today={today} />
          <p className="table-foot">
            <label htmlFor="another-day">
              {i18n.t("Another day")}{" "}
              <DateInput
                id="another-day"
                max={today}
                onChoose={(date) => void navigate(paths.day(chosen.id, date))}
              />
            </label>
          </p>
        </Section>
      )}
      <Folio>{i18n.t("A day belongs to the date on which its shift starts.")}</Folio>
    </PageBody>
  );
}

function LastDays({ crewId, today }: { crewId: string; today: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { data, error, refetch } = useQuery(
    dayEntryQueries.days(crewId, addDays(today, 1 - LAST_DAYS), today),
  );
  return (
    <DataTable
      caption={i18n.t("Last days")}
      rows={data?.rows ?? []}
      rowKey={({ date }) => date}
      state={error ? "failed" : data ? "ready" : "loading"}
      error={error}
      onRetry={() => void refetch()}
      columns={[
        {
          id: "date",
          head: i18n.t("Day"),
          isRowHead: true,
          cell: ({ date }) => (
            <TextLink to={paths.day(crewId, date)}>{formatDay(date, locale)}</TextLink>
          ),
        },
        { id: "entered", head: i18n.t("Entered"), cell: (day) => <Entered progress={day} /> },
      ]}
    />
  );
}
