import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useNavigate } from "react-router-dom";
import { formatDuration } from "../../shared/format/duration";
import type { CrewView } from "../../shared/schemas/crew";
import { Button } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { CrewForm } from "../features/crews/crew-form";
import { crewQueries } from "../features/crews/queries";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { RuleWays, SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";

/** The crews of the sites with their usual shift, their size today and their supervisors. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const navigate = useNavigate();
  const choice = useSiteChoice();
  const { editing, edit, close } = useEditParam();
  const { data, isPending, error, refetch } = useQuery(crewQueries.list(choice.site?.id));
  const rows = data?.rows ?? [];
  const without = rows.filter(
    ({ isArchived, supervisorNames }) => !isArchived && supervisorNames.length === 0,
  ).length;
  return (
    <>
      <PageBody>
        <PageHead
          way={<RuleWays />}
          title={i18n.t("Crews")}
          lead={
            data &&
            (without > 0
              ? i18n.t(
                  "{without, plural, one {# crew has} other {# crews have}} no supervisor today: nobody is told about their workers.",
                  { without },
                )
              : i18n.t("Each crew has a supervisor today."))
          }
          actions={
            choice.isOfficer &&
            editing === null && (
              <Button kind="primary" onClick={() => edit("new")}>
                {i18n.t("New crew")}
              </Button>
            )
          }
        />
        <SiteChoice choice={choice} />
        {choice.isOfficer && editing === "new" && (
          <Section title={i18n.t("New crew")} id="crew-form">
            <CrewForm
              crew={null}
              siteId={choice.site?.id ?? choice.sites[0]?.id ?? ""}
              sites={choice.sites.map(({ id, name }) => ({ value: id, label: name }))}
              onSaved={({ id }) => void navigate(paths.crew(id))}
              onLeave={close}
            />
          </Section>
        )}
        <DataTable<CrewView>
          caption={i18n.t("Crews")}
          state={isPending ? "loading" : error ? "failed" : "ready"}
          error={error}
          onRetry={() => void refetch()}
          rows={rows}
          rowKey={({ id }) => id}
          groupOf={({ siteName, isArchived }) =>
            isArchived
              ? { key: "archived", label: i18n.t("No longer in use") }
              : { key: siteName, label: siteName }
          }
          empty={
            <Empty title={i18n.t("No crew is described yet.")}>
              {i18n.t("Days are entered by crew; a supervisor sees the days of own crews.")}
            </Empty>
          }
          columns={[
            {
              id: "name",
              head: i18n.t("Crew"),
              isRowHead: true,
              sortValue: ({ name }) => name,
              cell: ({ id, name }) => <TextLink to={paths.crew(id)}>{name}</TextLink>,
            },
            {
              id: "start",
              head: i18n.t("Usual start"),
              kind: "figure",
              sortValue: ({ usualStart }) => usualStart,
              cell: ({ usualStart }) => usualStart,
            },
            {
              id: "length",
              head: i18n.t("Usual length"),
              kind: "figure",
              sortValue: ({ usualLengthMin }) => usualLengthMin,
              cell: ({ usualLengthMin }) => formatDuration(usualLengthMin, locale),
            },
            {
              id: "members",
              head: i18n.t("Members today"),
              kind: "figure",
              sortValue: ({ membersToday }) => membersToday,
              cell: ({ membersToday }) => (
                <span className={membersToday === 0 ? "is-zero" : undefined}>{membersToday}</span>
              ),
            },
            {
              id: "supervisors",
              head: i18n.t("Supervisors today"),
              cell: ({ supervisorNames }) => supervisorNames.join(", ") || <b>{i18n.t("none")}</b>,
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t("Membership is dated: a supervisor sees a day by the membership on that day.")}
      </Folio>
    </>
  );
}
