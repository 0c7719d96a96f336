import { useLingui } from "@lingui/react";
import { useInfiniteQuery } from "@tanstack/react-query";
import { useMemo } from "react";
import { useSearchParams } from "react-router-dom";
import { formatInstant } from "../../shared/format/date";
import type { AuditEventView } from "../../shared/schemas/audit-event";
import { type DataColumn, DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextButton } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { useUser } from "../features/session/session";
import { EventValues } from "../features/trail/event-values";
import { trailQuery } from "../features/trail/queries";
import {
  actionWord,
  isSubjectKind,
  SUBJECT_KINDS,
  subjectWord,
} from "../features/trail/trail-words";
import { useLocale } from "../lib/i18n";
import "../styles/findings.css";
import "../styles/trail.css";

/** Who did what, and when; the latest first. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { sites } = useUser();
  const timeZone = sites[0]?.timeZone ?? "UTC";
  const [search, setSearch] = useSearchParams();
  const kind = search.get("about");
  const subjectKind = isSubjectKind(kind) ? kind : null;
  const subjectId = search.get("one");
  const trail = useInfiniteQuery(trailQuery({ subjectKind, subjectId }));
  const rows = useMemo(() => trail.data?.pages.flatMap((page) => page.rows) ?? [], [trail.data]);

  const narrow = (about: string | null, one: string | null) => {
    const next = new URLSearchParams();
    if (about) next.set("about", about);
    if (one) next.set("one", one);
    setSearch(next);
  };

  const columns: DataColumn<AuditEventView>[] = [
    {
      id: "at",
      head: i18n.t("When"),
      unit: timeZone,
      cell: ({ at }) => <span className="event-time">{formatInstant(at, timeZone, locale)}</span>,
    },
    {
      id: "actor",
      head: i18n.t("Who"),
      isRowHead: true,
      cell: ({ actorName }) =>
        actorName ?? <span className="event-program">{i18n.t("the program")}</span>,
    },
    { id: "action", head: i18n.t("What"), cell: ({ action }) => actionWord(i18n, action) },
    {
      id: "subject",
      head: i18n.t("About"),
      cell: (event) =>
        event.subjectId === null ? (
          subjectWord(i18n, event.subjectKind)
        ) : (
          <TextButton
            aria-label={i18n.t("Only this one: {subject}", {
              subject: subjectWord(i18n, event.subjectKind),
            })}
            onClick={() => narrow(event.subjectKind, event.subjectId)}
          >
            {subjectWord(i18n, event.subjectKind)}
          </TextButton>
        ),
    },
    {
      id: "values",
      head: i18n.t("What changed"),
      cell: ({ values }) => <EventValues values={values} />,
    },
    {
      id: "sealed",
      head: i18n.t("Sealed"),
      cell: ({ isSealed }) => (isSealed ? i18n.t("yes") : i18n.t("not yet")),
      hidesOnPhone: true,
    },
  ];

  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("Trail")}
          lead={i18n.t("Who did what, and when. Nothing here is ever changed or taken out.")}
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
          columns={columns}
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
