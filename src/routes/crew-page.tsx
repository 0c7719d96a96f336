import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import { formatShortDate } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import type { CrewDetail } from "../../shared/schemas/crew";
import { Button, ButtonLink } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextButton, TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { CrewForm } from "../features/crews/crew-form";
import { crewQueries } from "../features/crews/queries";
import { EndSpanForm, MemberForm, type Span, SupervisorForm } from "../features/crews/span-forms";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { RuleWays } from "./register-frame";
import { useSiteChoice } from "./site-choice";

interface Dated {
  readonly fromDate: string;
  readonly toDate: string | null;
}
type When = "now" | "to-come" | "past";

const whenOf = ({ fromDate, toDate }: Dated, today: string): When =>
  fromDate > today ? "to-come" : toDate !== null && toDate < today ? "past" : "now";
const ORDER: readonly When[] = ["now", "to-come", "past"];

const inOrder = <Row extends Dated>(rows: readonly Row[], today: string): Row[] =>
  rows.toSorted((a, b) => ORDER.indexOf(whenOf(a, today)) - ORDER.indexOf(whenOf(b, today)));

/** One crew: its members and supervisors by date. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const [ending, setEnding] = useState<{ kind: Span; id: string; name: string } | null>(null);
  const { data: crew, error, refetch } = useQuery(crewQueries.one(id));
  if (!crew)
    return (
      <PageBody>
        <PageHead way={<RuleWays />} title={error ? i18n.t("Crew") : " "} />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
      </PageBody>
    );
  const today = choice.todayAt(crew.siteId);
  const mayChange = crew.can.change;
  const groupLabel: Record<When, string> = {
    now: i18n.t("Today"),
    "to-come": i18n.t("To come"),
    past: i18n.t("Earlier"),
  };
  const groupOf = (row: Dated) => {
    const when = whenOf(row, today);
    return { key: when, label: groupLabel[when] };
  };
  const dates = <Row extends Dated>() => [
    {
      id: "from",
      head: i18n.t("First day"),
      cell: (row: Row) => formatShortDate(row.fromDate, locale),
    },
    {
      id: "to",
      head: i18n.t("Last day"),
      cell: (row: Row) =>
        row.toDate === null ? i18n.t("open") : formatShortDate(row.toDate, locale),
    },
  ];
  const endColumn = <Row extends Dated & { id: string }>(
    kind: Span,
    nameOf: (row: Row) => string,
  ) =>
    mayChange
      ? [
          {
            id: "end",
            head: <span className="sr-only">{i18n.t("What can be done")}</span>,
            kind: "right" as const,
            cell: (row: Row) =>
              whenOf(row, today) !== "past" && (
                <TextButton
                  aria-label={i18n.t("Last day of {name}", { name: nameOf(row) })}
                  onClick={() => setEnding({ kind, id: row.id, name: nameOf(row) })}
                >
                  {i18n.t("End")}
                </TextButton>
              ),
          },
        ]
      : [];
  const endForm = (kind: Span) =>
    ending?.kind === kind && (
      <div className="my-4">
        <EndSpanForm
          key={ending.id}
          crew={crew}
          kind={kind}
          spanId={ending.id}
          name={ending.name}
          lastDay={today}
          onDone={() => setEnding(null)}
        />
      </div>
    );
  const loans = crew.memberships.filter((row) => row.isLoan && whenOf(row, today) === "now").length;
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("Usual shift")} isRuled>
            <Leaders
              items={[
                { key: "start", label: i18n.t("Start"), value: crew.usualStart },
                {
                  key: "length",
                  label: i18n.t("Length"),
                  value: formatDuration(crew.usualLengthMin, locale),
                },
              ]}
            />
          </MarginNote>
        }
      >
        <PageHead
          way={<RuleWays />}
          title={crew.name}
          lead={i18n.t(
            "{site}. {members, plural, =0 {No members} one {# member} other {# members}} today{loans, plural, =0 {} one {, one of them on loan} other {, # of them on loan}}.",
            { site: crew.siteName, members: crew.membersToday, loans },
          )}
          actions={
            editing === null && (
              <>
                {crew.can.enterDay && (
                  <ButtonLink kind="primary" to={paths.day(crew.id, today)}>
                    {i18n.t("Enter the day")}
                  </ButtonLink>
                )}
                {mayChange && (
                  <Button onClick={() => edit("crew")}>{i18n.t("Change the crew")}</Button>
                )}
              </>
            )
          }
        />
        {mayChange && editing === "crew" && (
          <Section title={i18n.t("Change {name}", { name: crew.name })} id="crew-form">
            <CrewForm crew={crew} siteId={crew.siteId} sites={[]} onSaved={close} onLeave={close} />
          </Section>
        )}
        <Section title={i18n.t("Members")} id="members">
          {endForm("memberships")}
          {mayChange && editing === "member" ? (
            <div className="my-4">
              <MemberForm crew={crew} today={today} onDone={close} />
            </div>
          ) : null}
          <DataTable<CrewDetail["memberships"][number]>
            caption={i18n.t("Members by date")}
            rows={inOrder(crew.memberships, today)}
            rowKey={(row) => row.id}
            groupOf={groupOf}
            isSelected={(row) => row.id === ending?.id}
            empty={<Empty title={i18n.t("Nobody is in this crew yet.")} />}
            columns={[
              {
                id: "worker",
                head: i18n.t("Worker"),
                isRowHead: true,
                sortValue: (row) => row.workerName,
                cell: (row) => (
                  <TextLink to={paths.worker(row.workerId)}>{row.workerName}</TextLink>
                ),
              },
              {
                id: "number",
                head: i18n.t("Number"),
                kind: "figure",
                sortValue: (row) => row.employeeNumber,
                cell: (row) => row.employeeNumber,
              },
              ...dates<CrewDetail["memberships"][number]>(),
              {
                id: "loan",
                head: i18n.t("How"),
                cell: (row) => (row.isLoan ? i18n.t("on loan") : i18n.t("own crew")),
              },
              ...endColumn<CrewDetail["memberships"][number]>(
                "memberships",
                (row) => row.workerName,
              ),
            ]}
          />
          {mayChange && editing === null && (
            <p className="mt-3">
              <Button onClick={() => edit("member")}>{i18n.t("Add a member")}</Button>
            </p>
          )}
        </Section>
        <Section title={i18n.t("Supervisors")} id="supervisors">
          {endForm("supervisors")}
          {mayChange && editing === "supervisor" ? (
            <div className="my-4">
              <SupervisorForm crew={crew} today={today} onDone={close} />
            </div>
          ) : null}
          <DataTable<CrewDetail["supervisors"][number]>
            caption={i18n.t("Supervisors by date")}
            rows={inOrder(crew.supervisors, today)}
            rowKey={(row) => row.id}
            groupOf={groupOf}
            isSelected={(row) => row.id === ending?.id}
            empty={
              <Empty title={i18n.t("This crew has no supervisor yet.")}>
                {i18n.t("Nobody is told about its workers.")}
              </Empty>
            }
            columns={[
              {
                id: "name",
                head: i18n.t("Supervisor"),
                isRowHead: true,
                sortValue: (row) => row.userName,
                cell: (row) => row.userName,
              },
              ...dates<CrewDetail["supervisors"][number]>(),
              ...endColumn<CrewDetail["supervisors"][number]>("supervisors", (row) => row.userName),
            ]}
          />
          {mayChange && editing === null && (
            <p className="mt-3">
              <Button onClick={() => edit("supervisor")}>{i18n.t("Add a supervisor")}</Button>
            </p>
          )}
        </Section>
      </PageBody>
      <Folio>
        {i18n.t("Membership is dated: a supervisor sees a day by the membership on that day.")}
      </Folio>
    </>
  );
}
