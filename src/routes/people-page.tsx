import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { ButtonLink } from "../components/button";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { PeopleTable } from "../features/people/people-table";
import { peopleQueries } from "../features/people/queries";
import { useUser } from "../features/session/session";
import { paths } from "../paths";
import "../styles/people.css";

/** Who may sign in, and as what. */
export function Component() {
  const { i18n } = useLingui();
  const { sites } = useUser();
  const people = useQuery(peopleQueries.list);
  return (
    <>
      <PageBody>
        <PageHead
          title={i18n.t("People")}
          lead={i18n.t("Who may sign in, and as what. A role takes effect at the next click.")}
          actions={
            <>
              <ButtonLink to={paths.groups}>{i18n.t("Roles by group")}</ButtonLink>
              <ButtonLink to={paths.retention}>{i18n.t("Keeping and erasing")}</ButtonLink>
              <ButtonLink to={paths.employerShares}>{i18n.t("Employers")}</ButtonLink>
              <ButtonLink to={paths.visitors}>{i18n.t("Visitors")}</ButtonLink>
              <ButtonLink kind="primary" to={paths.person("new")}>
                {i18n.t("New person")}
              </ButtonLink>
            </>
          }
        />
        <PeopleTable
          people={people.data ?? []}
          state={people.isPending ? "loading" : people.isError ? "failed" : "ready"}
          error={people.error}
          onRetry={() => void people.refetch()}
          timeZone={sites[0]?.timeZone ?? "UTC"}
          namesZone={new Set(sites.map(({ timeZone }) => timeZone)).size > 1}
        />
      </PageBody>
      <Folio caution={i18n.t("Granting and ending access are events in the trail.")}>
        <TextLink to={paths.trail}>{i18n.t("Trail")}</TextLink>
      </Folio>
    </>
  );
}
