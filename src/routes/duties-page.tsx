import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import { dutyKindWord } from "../../shared/findings/duty-words";
import { localDateOf } from "../../shared/format/date";
import { DUTY_KINDS, DutyKind } from "../../shared/schemas/duty";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { CalendarFeed } from "../features/duties/calendar-feed";
import { DutiesTable } from "../features/duties/duties-table";
import { MonthGrid } from "../features/duties/month-grid";
import { dutyQueries } from "../features/duties/queries";
import { monthAfter, weeksOf } from "../features/duties/weeks-of";
import { useLocale } from "../lib/i18n";
import { useNow } from "../lib/use-now";
import { useSiteChoice } from "./site-choice";
import "../styles/findings.css";
import "../styles/duties.css";

/** All that is due: one list, worst first, and one calendar. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const now = useNow();
  const [search, setSearch] = useSearchParams();
  const kind = DutyKind.safeParse(search.get("kind")).data;
  const siteId = choice.site?.id;
  const zone = (choice.site ?? choice.sites[0])?.timeZone ?? "UTC";
  const today = localDateOf(now.toISOString(), zone);
  const asked = search.get("month");
  const month = asked !== null && /^\d{4}-(0[1-9]|1[0-2])$/.test(asked) ? asked : today.slice(0, 7);
  const weeks = weeksOf(month);
  const list = useInfiniteQuery(dutyQueries.list({ siteId, kind }));
  const ofMonth = useQuery(
    dutyQueries.between({
      siteId,
      kind,
      from: weeks[0]?.[0] ?? today,
      to: weeks.at(-1)?.at(-1) ?? today,
    }),
  );
  const narrow = (name: string, value: string) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (value === "") next.delete(name);
        else next.set(name, value);
        return next;
      },
      { replace: true },
    );
  const monthLink = (months: number) => {
    const next = new URLSearchParams(search);
    next.set("month", monthAfter(month, months));
    return `?${next}#calendar`;
  };
  const monthName = new Intl.DateTimeFormat(locale, {
    month: "long",
    year: "numeric",
    timeZone: "UTC",
  }).format(new Date(`${month}-01T00:00:00Z`));
  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("Due")}
          lead={i18n.t(
            "What the rules, the site and people themselves have set a day for. Overdue stands first.",
          )}
        />
        <FilterRow label={i18n.t("Narrow what is due")}>
          <FilterSelect
            label={i18n.t("Kind")}
            value={kind ?? ""}
            onChange={(value) => narrow("kind", value)}
            choices={[
              { value: "", label: i18n.t("Any kind") },
              ...DUTY_KINDS.map((one) => ({ value: one, label: dutyKindWord(i18n, one) })),
            ]}
          />
          {choice.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={siteId ?? ""}
              onChange={(value) => narrow("site", value)}
              choices={[
                { value: "", label: i18n.t("All sites") },
                ...choice.sites.map(({ id, name }) => ({ value: id, label: name })),
              ]}
            />
          )}
        </FilterRow>
        <DutiesTable
          rows={list.data?.pages.flatMap(({ rows }) => rows) ?? []}
          todayAt={choice.todayAt}
          showsSite={siteId === undefined && choice.sites.length > 1}
          state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
          error={list.error}
          onRetry={() => void list.refetch()}
          more={{
            hasMore: list.hasNextPage,
            isLoading: list.isFetchingNextPage,
            onMore: () => void list.fetchNextPage(),
          }}
          empty={
            <Empty title={i18n.t("Nothing is due.")}>
              {i18n.t("Nothing of that kind has a day set for it.")}
            </Empty>
          }
        />
        <Section title={monthName} id="calendar">
          <nav className="month-ways no-print" aria-label={i18n.t("Months")}>
            <TextLink to={monthLink(-1)}>{i18n.t("Month before")}</TextLink>{" "}
            <TextLink to={monthLink(1)}>{i18n.t("Month after")}</TextLink>
          </nav>
          {ofMonth.error && <Failed error={ofMonth.error} onRetry={() => void ofMonth.refetch()} />}
          <MonthGrid
            month={month}
            today={today}
            items={ofMonth.data?.rows ?? []}
            isLoading={ofMonth.isPending}
          />
          {ofMonth.data?.next && (
            <p className="table-foot">
              {i18n.t("More is due in these weeks than a calendar holds: the list has all of it.")}
            </p>
          )}
        </Section>
        <Section title={i18n.t("In your own calendar")} id="calendar-feed">
          <CalendarFeed timeZone={zone} />
        </Section>
      </PageBody>
      <Folio>{i18n.t("Days are those of each site’s own time zone.")}</Folio>
    </>
  );
}
