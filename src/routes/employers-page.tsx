import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useSearchParams } from "react-router-dom";
import { EMPLOYER_DUTIES } from "../../shared/rule-sets/employer-duties";
import type { EmployerView } from "../../shared/schemas/employer";
import { ButtonLink } from "../components/button";
import { type DataColumn, DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { hasRole, useUser } from "../features/session/session";
import { EmployerForm } from "../features/workers/employer-form";
import { employerQueries } from "../features/workers/employer-queries";
import { bearerWord, dutyWord } from "../lib/employer-words";
import { paths } from "../paths";

const keyOf = ({ kind, name }: EmployerView) => `${kind}:${name ?? ""}`;

/** Agencies and contractors with people at a site: who does what for them. */
export function Component() {
  const { i18n } = useLingui();
  const user = useUser();
  const { sites } = user;
  const [search, setSearch] = useSearchParams();
  const site = sites.find(({ id }) => id === search.get("site")) ?? sites[0];
  const list = useQuery({ ...employerQueries.at(site?.id ?? ""), enabled: site !== undefined });
  const [said, setSaid] = useState("");
  const wanted = search.get("employer");
  const chosen = list.data?.find((employer) => keyOf(employer) === wanted);
  const kinds = { agency: i18n.t("agency"), contractor: i18n.t("contractor") };
  const columns: DataColumn<EmployerView>[] = [
    {
      id: "employer",
      head: i18n.t("Employer"),
      isRowHead: true,
      cell: (employer) => (
        <span className="two-lines">
          {employer.name !== null && employer.can.agree && site ? (
            <TextLink
              to={`${paths.employers}?${new URLSearchParams({ site: site.id, employer: keyOf(employer) })}#agreed`}
            >
              {employer.name}
            </TextLink>
          ) : (
            <span>{employer.name ?? i18n.t("name missing")}</span>
          )}
          <span className="beneath">{kinds[employer.kind]}</span>
        </span>
      ),
    },
    {
      id: "workers",
      head: i18n.t("Workers"),
      cell: ({ workers, workerCount }) => (
        <>
          {workers.map(({ id, name }, index) => (
            <span key={id}>
              {index > 0 && ", "}
              <TextLink to={paths.worker(id)}>{name}</TextLink>
            </span>
          ))}
          {workerCount > workers.length &&
            ` ${i18n.t("and {count} more", { count: workerCount - workers.length })}`}
          {workerCount === 0 && i18n.t("nobody now")}
        </>
      ),
    },
    ...EMPLOYER_DUTIES.map(
      (duty): DataColumn<EmployerView> => ({
        id: duty,
        head: dutyWord(i18n, duty),
        cell: ({ agreed, usual }) => {
          if (agreed) return bearerWord(i18n, agreed[duty]);
          if (!usual) return <span className="not-assessed">{i18n.t("not agreed")}</span>;
          return (
            <span className="not-assessed">
              {i18n.t("usually {bearer}", { bearer: bearerWord(i18n, usual.duties[duty]) })}
            </span>
          );
        },
      }),
    ),
    {
      id: "basis",
      head: i18n.t("Rests on"),
      cell: ({ agreed, usual, name }) => {
        if (agreed) return agreed.basis;
        if (name === null) return i18n.t("Name the employer on the workers’ records first.");
        return (
          <>
            {i18n.t("Not agreed yet.")}
            {usual && ` ${usual.citation}`}
            {usual?.sourceStatus === "from-memory" && (
              <span className="beneath block">{i18n.t("from memory")}</span>
            )}
          </>
        );
      },
    },
  ];
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("Usual and agreed")}>
            <p>
              {i18n.t(
                "Usual is how a rule is mostly read where nothing was agreed. It takes a duty from nobody.",
              )}
            </p>
          </MarginNote>
        }
      >
        <PageHead
          way={<TextLink to={paths.workers}>{i18n.t("Workers")}</TextLink>}
          title={i18n.t("Agencies and contractors")}
          lead={i18n.t("People who work here for another employer, and who does what for them.")}
          actions={
            hasRole(user, "officer") && (
              <ButtonLink
                to={site ? `${paths.employerShares}?site=${site.id}` : paths.employerShares}
              >
                {i18n.t("Share results with an employer")}
              </ButtonLink>
            )
          }
        />
        {sites.length > 1 && (
          <FilterRow label={i18n.t("Site")}>
            <FilterSelect
              label={i18n.t("Site")}
              value={site?.id ?? ""}
              choices={sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={(id) => {
                setSaid("");
                setSearch({ site: id }, { replace: true });
              }}
            />
          </FilterRow>
        )}
        <DataTable
          caption={i18n.t("Agencies and contractors")}
          columns={columns}
          rows={list.data ?? []}
          rowKey={keyOf}
          state={list.isPending ? "loading" : list.isError ? "failed" : "ready"}
          error={list.error}
          onRetry={() => void list.refetch()}
          stacksOnPhone
          empty={<Empty title={i18n.t("Nobody works here for another employer.")} />}
        />
        {site && chosen?.can.agree && chosen.name !== null && (
          <Section id="agreed" title={i18n.t("Agreed with {name}", { name: chosen.name })}>
            <EmployerForm
              key={`${site.id} ${keyOf(chosen)} ${chosen.revision}`}
              siteId={site.id}
              employer={chosen}
              name={chosen.name}
              onSaved={() => setSaid(i18n.t("Saved. What was agreed before stays on record."))}
            />
          </Section>
        )}
        <p className="mt-3">
          <Status>{said}</Status>
        </p>
      </PageBody>
      <Folio
        caution={i18n.t(
          "An aid, and no legal advice. What was agreed is as good as the paper that it names.",
        )}
      />
    </>
  );
}
