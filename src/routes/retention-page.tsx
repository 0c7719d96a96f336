import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useSearchParams } from "react-router-dom";
import type { PeriodView, TermView } from "../../shared/schemas/retention";
import { type DataColumn, DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { DuePeople, KeptPeople } from "../features/people/due-people";
import { ErasuresTable } from "../features/people/erasures-table";
import { HoldForm, HoldsTable } from "../features/people/holds-table";
import { retentionQueries } from "../features/people/retention-queries";
import { kindWord, termWord } from "../features/people/retention-words";
import { RuleSetTitle, RuleSource } from "../features/people/rule-cells";
import { TermForm } from "../features/people/term-form";
import { TransferForm } from "../features/people/transfer-form";
import { SuccessionDuties, TransfersTable } from "../features/people/transfers-table";
import { hasRole, useUser } from "../features/session/session";
import { paths } from "../paths";
import "../styles/people.css";

/** How long people stay in the records, what is held beyond that, and taking them out with two people's word. */
export function Component() {
  const { i18n } = useLingui();
  const user = useUser();
  const { sites } = user;
  const [search, setSearch] = useSearchParams();
  const site = sites.find(({ id }) => id === search.get("site")) ?? sites[0];
  const term = useQuery(retentionQueries.term);
  const [said, setSaid] = useState("");
  const zone = site?.timeZone ?? "UTC";
  return (
    <>
      <PageBody
        margin={
          <>
            <MarginNote title={i18n.t("What goes, what stays")}>
              <p>
                {i18n.t(
                  "Name, number, addresses, notes, files and the values of events go. Results stay with all that they were computed from, under a number that is drawn.",
                )}
              </p>
              <p>
                {i18n.t(
                  "Backups and files that were taken before still hold the person. Whoever keeps them keeps to the same term.",
                )}
              </p>
            </MarginNote>
            <MarginNote title={i18n.t("Who decides")}>
              <p>
                {i18n.t(
                  "One proposes, another approves. The program never erases whoever works here, is held, or is within the longest term.",
                )}
              </p>
            </MarginNote>
            <MarginNote title={i18n.t("When a site passes on")}>
              <p>
                {i18n.t(
                  "The successor gets one ZIP: a year’s file for each year, complete, each of which can be checked by itself. It is done once they have signed for the very file that went out.",
                )}
              </p>
              <p>
                {i18n.t(
                  "Nothing is erased by it, no term changes, and a hold does not prevent it.",
                )}
              </p>
            </MarginNote>
          </>
        }
      >
        <PageHead
          way={
            hasRole(user, "administrator") ? (
              <TextLink to={paths.people}>{i18n.t("People")}</TextLink>
            ) : (
              <TextLink to={paths.workers}>{i18n.t("Workers")}</TextLink>
            )
          }
          title={i18n.t("Keeping and erasing")}
          lead={i18n.t(
            "How long people who left stay in the records: the longest term that applies, and no day less.",
          )}
        />
        {sites.length > 1 && (
          <FilterRow label={i18n.t("Site")}>
            <FilterSelect
              label={i18n.t("Site")}
              value={site?.id ?? ""}
              choices={sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={(id) => setSearch({ site: id }, { replace: true })}
            />
          </FilterRow>
        )}
        {site && (
          <Section id="due" title={i18n.t("Whose term is over")}>
            <DuePeople key={site.id} siteId={site.id} />
          </Section>
        )}
        <Section id="erasures" title={i18n.t("Proposed and erased")}>
          <ErasuresTable timeZone={zone} />
        </Section>
        {site && (
          <Section id="kept" title={i18n.t("Who is kept")}>
            <KeptPeople siteId={site.id} />
          </Section>
        )}
        <Section id="holds" title={i18n.t("Holds")}>
          <HoldsTable timeZone={zone} />
          {site && (
            <>
              <h3 className="mt-4 mb-2">{i18n.t("Hold records at {site}", { site: site.name })}</h3>
              <HoldForm
                key={site.id}
                siteId={site.id}
                onPlaced={() => setSaid(i18n.t("Held. Nothing of it is erased."))}
              />
            </>
          )}
        </Section>
        <Section id="transfers" title={i18n.t("Handing over to a successor")}>
          <TransfersTable timeZone={zone} />
          {site && (
            <>
              <h3 className="mt-4 mb-2">
                {i18n.t("Hand the records of {site} over", { site: site.name })}
              </h3>
              <TransferForm
                key={site.id}
                siteId={site.id}
                onProposed={() => setSaid(i18n.t("Proposed. Somebody else approves it."))}
              />
            </>
          )}
          <h3 className="mt-4 mb-2">{i18n.t("What rules ask of it")}</h3>
          <SuccessionDuties />
        </Section>
        <Section id="terms" title={i18n.t("Terms")}>
          <Terms term={term.data} query={term} />
          {term.data?.can.change && (
            <>
              <h3 className="mt-4 mb-2">{i18n.t("The organization’s own term")}</h3>
              <TermForm
                key={term.data.revision}
                term={term.data}
                onSaved={() => setSaid(i18n.t("Saved. Who is due was worked out again."))}
              />
            </>
          )}
        </Section>
        <p className="mt-3">
          <Status>{said}</Status>
        </p>
      </PageBody>
      <Folio
        caution={i18n.t(
          "Terms are an aid. What applies to you, a lawyer or the authority says; terms from memory are marked.",
        )}
      />
    </>
  );
}

type TermRow = { key: string; ruleSetKey: string; period: PeriodView | null };

function Terms({
  term,
  query,
}: {
  term: TermView | undefined;
  query: { isPending: boolean; isError: boolean; error: unknown; refetch: () => unknown };
}) {
  const { i18n } = useLingui();
  const rows: TermRow[] = (term?.ruleSetKeys ?? []).flatMap((ruleSetKey): TermRow[] => {
    const periods = term?.periods.filter((period) => period.ruleSetKey === ruleSetKey) ?? [];
    if (periods.length === 0) return [{ key: ruleSetKey, ruleSetKey, period: null }];
    return periods.map((period) => ({
      key: `${ruleSetKey} ${period.kind} ${period.counts}`,
      ruleSetKey,
      period,
    }));
  });
  const columns: DataColumn<TermRow>[] = [
    {
      id: "rule",
      head: i18n.t("Rule set"),
      isRowHead: true,
      cell: ({ ruleSetKey }) => <RuleSetTitle ruleSetKey={ruleSetKey} />,
    },
    {
      id: "kind",
      head: i18n.t("What"),
      cell: ({ period }) => period && kindWord(i18n, period.kind),
    },
    {
      id: "term",
      head: i18n.t("Term"),
      cell: ({ period }) =>
        period ? (
          termWord(i18n, period)
        ) : (
          <span className="not-assessed">{i18n.t("none that is known here")}</span>
        ),
    },
    {
      id: "citation",
      head: i18n.t("Source"),
      cell: ({ period }) => period && <RuleSource {...period} />,
    },
  ];
  return (
    <>
      <DataTable
        caption={i18n.t("Terms by rule set")}
        columns={columns}
        rows={rows}
        rowKey={({ key }) => key}
        state={query.isPending ? "loading" : query.isError ? "failed" : "ready"}
        error={query.error}
        onRetry={() => void query.refetch()}
        stacksOnPhone
        empty={<Empty title={i18n.t("No site has rules yet.")} />}
      />
      {term && (
        <p className="mt-3">
          {term.yearsAfterLeaving === null
            ? i18n.t(
                "The organization has no term of its own: where a rule sets none, nobody is erased.",
              )
            : i18n.t(
                "{count, plural, one {The organization keeps people for # year after leaving, or longer where a rule asks for it.} other {The organization keeps people for # years after leaving, or longer where a rule asks for it.}}",
                { count: term.yearsAfterLeaving },
              )}
        </p>
      )}
    </>
  );
}
