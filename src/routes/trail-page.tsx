import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useMemo } from "react";
import { useSearchParams } from "react-router-dom";
import { formatInstant } from "../../shared/format/date";
import type { AuditEventView } from "../../shared/schemas/audit-event";
import { ButtonLink } from "../components/button";
import { type DataColumn, DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextButton } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { hasRole, useUser } from "../features/session/session";
import { EventValues } from "../features/trail/event-values";
import { trailQuery } from "../features/trail/queries";
import {
  actionWord,
  isSubjectKind,
  SUBJECT_KINDS,
  subjectWord,
} from "../features/trail/trail-words";
import { type Names, nameText } from "../features/trail/value-text";
import { useLocale } from "../lib/i18n";
import { useIsPhone } from "../lib/use-is-phone";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/trail.css";

/** Who did what, and when; the latest first. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const isPhone = useIsPhone();
  const user = useUser();
  const { sites } = user;
  const [search, setSearch] = useSearchParams();
  const kind = search.get("about");
  const subjectKind = isSubjectKind(kind) ? kind : null;
  const subjectId = search.get("one");
  const trail = useInfiniteQuery(trailQuery({ subjectKind, subjectId }));
  const rows = useMemo(() => trail.data?.pages.flatMap((page) => page.rows) ?? [], [trail.data]);
  const names: Names = useMemo(
    () =>
      new Map(trail.data?.pages.flatMap((page) => page.names.map((thing) => [thing.id, thing]))),
    [trail.data],
  );
  // All rows in one zone, that of the reader's first site, so that their order shows; another site's own time beneath.
  const ownZone = sites[0]?.timeZone ?? "UTC";
  const zoneOf = ({ timeZone }: AuditEventView) => timeZone ?? ownZone;

  const narrow = (about: string | null, one: string | null) => {
    const next = new URLSearchParams();
    if (about) next.set("about", about);
    if (one) next.set("one", one);
    setSearch(next);
  };

  const wordsOf = (event: AuditEventView) => ({
    i18n,
    locale,
    names,
    timeZone: zoneOf(event),
    subjectKind: event.subjectKind,
  });
  const wideColumns: DataColumn<AuditEventView>[] = [
    {
      id: "at",
      head: i18n.t("When"),
      unit: ownZone,
      cell: (event) => (
        <span className="event-time">
          {formatInstant(event.at, ownZone, locale)}
          {zoneOf(event) !== ownZone && (
            <span className="event-zone">
              {formatInstant(event.at, zoneOf(event), locale)} {zoneOf(event)}
            </span>
          )}
        </span>
      ),
    },
    {
      id: "actor",
      head: i18n.t("Who"),
      isRowHead: true,
      cell: ({ actorName }) =>
        actorName === null ? (
          <span className="event-program">{i18n.t("the program")}</span>
        ) : (
          <bdi>{actorName}</bdi>
        ),
    },
    { id: "action", head: i18n.t("What"), cell: ({ action }) => actionWord(i18n, action) },
    {
      id: "subject",
      head: i18n.t("About"),
      cell: (event) => {
        const kind = subjectWord(i18n, event.subjectKind);
        if (event.subjectId === null) return kind;
        const named = names.has(event.subjectId) ? nameText(wordsOf(event), event.subjectId) : "";
        return (
          <span className="event-about">
            {kind}{" "}
            <TextButton
              aria-label={i18n.t("Only this one: {subject}", {
                subject: [kind, named].filter(Boolean).join(" "),
              })}
              onClick={() => narrow(event.subjectKind, event.subjectId)}
            >
              {named || i18n.t("only this one")}
            </TextButton>
          </span>
        );
      },
    },
    {
      id: "values",
      head: i18n.t("What changed"),
      cell: (event) => <EventValues values={event.values} words={wordsOf(event)} />,
    },
    {
      id: "sealed",
      head: i18n.t("Sealed"),
      cell: ({ isSealed }) => (isSealed ? i18n.t("yes") : i18n.t("not yet")),
    },
  ];
  // A phone has no room for columns: what they say stands beneath each other.
  const phoneColumns: DataColumn<AuditEventView>[] = [
    {
      id: "event",
      head: i18n.t("Event"),
      unit: ownZone,
      cell: (event) => (
        <div className="event-stack">
          {wideColumns
            .filter(({ id }) => id !== "sealed")
            .map(({ id, cell }) => (
              <div key={id} className={`event-${id}`}>
                {cell(event)}
              </div>
            ))}
        </div>
      ),
    },
  ];

  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("Trail")}
          lead={i18n.t("Who did what, and when. Nothing here is ever changed or taken out.")}
          actions={
            <>
              {hasRole(user, "auditor", "administrator") && (
                <>
                  <ButtonLink to={paths.reads}>{i18n.t("Who read whose record")}</ButtonLink>
                  <ButtonLink to={paths.trailHead}>{i18n.t("The head outside")}</ButtonLink>
                </>
              )}
              {hasRole(user, "auditor") && (
                <ButtonLink to={paths.trailCheck}>{i18n.t("Check the trail")}</ButtonLink>
              )}
            </>
          }
        />
        <FilterRow label={i18n.t("Narrow the trail")}>
          <FilterSelect
            label={i18n.t("About")}
            value={subjectKind ?? ""}
            choices={[
              { value: "", label: i18n.t("Everything") },
              ...SUBJECT_KINDS.map((value) => ({ value, label: subjectWord(i18n, value) })),
            ]}
            onChange={(value) => narrow(value || null, null)}
          />
          {subjectId && (
            <span className="trail-one">
              {i18n.t("One only.")}{" "}
              <TextButton onClick={() => narrow(subjectKind, null)}>
                {i18n.t("Show all")}
              </TextButton>
            </span>
          )}
        </FilterRow>
        <DataTable
          caption={i18n.t("Trail")}
          columns={isPhone ? phoneColumns : wideColumns}
          rows={rows}
          rowKey={({ id }) => id}
          state={
            trail.isPending ? "loading" : trail.isError && rows.length === 0 ? "failed" : "ready"
          }
          error={trail.error}
          onRetry={() => void trail.refetch()}
          empty={<Empty title={i18n.t("No event is about this.")} />}
          more={{
            hasMore: trail.hasNextPage,
            isLoading: trail.isFetchingNextPage,
            onMore: () => void trail.fetchNextPage(),
          }}
        />
      </PageBody>
      <Folio caution={i18n.t("Each event is sealed into a chain shortly after it is written.")} />
    </>
  );
}
