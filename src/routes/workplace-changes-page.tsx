import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { formatInstant, formatShortDate } from "../../shared/format/date";
import type { WorkplaceChangeView } from "../../shared/schemas/workplace-change";
import { changeKindTitle } from "../../shared/surveys/words";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { TextButton, TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { jobQueries } from "../features/jobs/queries";
import { ChangeForm, StrikeChange } from "../features/surveys/change-form";
import { workplaceChangeQueries } from "../features/surveys/queries";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import { SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/surveys.css";

/** What has changed at the sites: it re-opens monitoring, and the protectors chosen on it. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const [striking, setStriking] = useState<WorkplaceChangeView | null>(null);
  const list = useInfiniteQuery(workplaceChangeQueries.list(choice.site?.id));
  const jobs = useQuery(jobQueries.list());
  const rows = list.data?.pages.flatMap((page) => page.rows) ?? [];
  const zoneOf = (siteId: string) =>
    choice.sites.find(({ id }) => id === siteId)?.timeZone ?? "UTC";
  const subjectPath = ({ taskId, areaId, jobId }: WorkplaceChangeView) =>
    taskId ? paths.task(taskId) : areaId ? paths.areas : jobId ? paths.group(jobId) : paths.jobs;
  return (
    <>
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Register of changes")}
          lead={i18n.t(
            "A change to process, machine, control or pattern of work asks for what was measured before it to be measured again, and for another look at the protectors chosen on it.",
          )}
          actions={
            choice.isOfficer &&
            editing === null && (
              <Button kind="primary" onClick={() => edit("new")}>
                {i18n.t("New change")}
              </Button>
            )
          }
        />
        <SiteChoice choice={choice} />
        {choice.isOfficer && editing === "new" && (
          <Section title={i18n.t("New change")} id="change-form">
            <ChangeForm
              siteId={choice.site?.id ?? choice.sites[0]?.id ?? ""}
              sites={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              todayAt={choice.todayAt}
              jobsOf={(siteId) =>
                (jobs.data?.rows ?? [])
                  .filter((job) => job.siteId === siteId && !job.isArchived)
                  .map(({ id, name }) => ({ value: id, label: name }))
              }
              onDone={close}
            />
          </Section>
        )}
        <DataTable<WorkplaceChangeView>
          caption={i18n.t("Changes, the latest first")}
          rows={rows}
          rowKey={({ id }) => id}
          isTwoLine
          stacksOnPhone
          state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
          error={list.error}
          onRetry={() => void list.refetch()}
          more={{
            hasMore: list.hasNextPage,
            isLoading: list.isFetchingNextPage,
            onMore: () => void list.fetchNextPage(),
          }}
          empty={
            <Empty title={i18n.t("No change is on record.")}>
              {i18n.t("A new machine, another material, a control taken away: it belongs here.")}
            </Empty>
          }
          columns={[
            {
              id: "date",
              head: i18n.t("Since"),
              isRowHead: true,
              cell: ({ happenedOn, struckReason }) => (
                <span className="two-lines">
                  <span className={struckReason === null ? undefined : "is-struck"}>
                    {formatShortDate(happenedOn, locale)}
                  </span>
                  {struckReason !== null && <span className="beneath">{i18n.t("struck")}</span>}
                </span>
              ),
            },
            {
              id: "subject",
              head: i18n.t("Made to"),
              cell: (change) => (
                <span className="two-lines">
                  <TextLink to={subjectPath(change)}>{change.subjectName}</TextLink>
                  <span className="beneath">
                    {[
                      changeKindTitle(i18n, change.kind),
                      choice.site === null && choice.sites.length > 1
                        ? choice.siteName(change.siteId)
                        : null,
                    ]
                      .filter(Boolean)
                      .join(", ")}
                  </span>
                </span>
              ),
            },
            {
              id: "what",
              head: i18n.t("What has changed"),
              cell: ({ what, struckReason }) => (
                <span className="two-lines">
                  <span className={struckReason === null ? undefined : "is-struck"}>{what}</span>
                  {struckReason !== null && (
                    <span className="beneath">
                      {i18n.t("struck: {reason}", { reason: struckReason })}
                    </span>
                  )}
                </span>
              ),
            },
            {
              id: "author",
              head: i18n.t("Entered by"),
              hidesOnPhone: true,
              cell: ({ authorName, createdAt, siteId }) => (
                <span className="two-lines">
                  <span>{authorName ?? "–"}</span>
                  <span className="beneath">
                    {formatInstant(createdAt, zoneOf(siteId), locale)}
                  </span>
                </span>
              ),
            },
            {
              id: "strike",
              head: <span className="sr-only">{i18n.t("What can be done")}</span>,
              kind: "right",
              cell: (change) =>
                change.can.change &&
                change.struckReason === null && (
                  <TextButton
                    aria-label={i18n.t("Strike the change of {date} to {subject}", {
                      date: formatShortDate(change.happenedOn, locale),
                      subject: change.subjectName,
                    })}
                    onClick={() => setStriking(change)}
                  >
                    {i18n.t("Strike")}
                  </TextButton>
                ),
            },
          ]}
        />
        {striking && <StrikeChange change={striking} onDone={() => setStriking(null)} />}
      </PageBody>
      <Folio>{i18n.t("Entries are never deleted; one made by mistake is struck.")}</Folio>
    </>
  );
}
