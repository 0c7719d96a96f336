import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { GroupForm } from "../features/people/group-form";
import { GroupsTable } from "../features/people/groups-table";
import { peopleQueries } from "../features/people/queries";
import { useUser } from "../features/session/session";
import { paths } from "../paths";
import "../styles/people.css";

/** Roles that follow the groups of the sign-in service. */
export function Component() {
  const { i18n } = useLingui();
  const { sites } = useUser();
  const groups = useQuery(peopleQueries.groups);
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.people}>{i18n.t("People")}</TextLink>}
          title={i18n.t("Roles by group")}
          lead={i18n.t(
            "Whoever the sign-in service puts into a group has its role from their next sign-in on, and loses it the same way. Roles given by hand stay as they are.",
          )}
        />
        <Section title={i18n.t("Which group gives which role")} id="groups">
          <GroupsTable
            mappings={groups.data ?? []}
            state={groups.isPending ? "loading" : groups.isError ? "failed" : "ready"}
            error={groups.error}
            onRetry={() => void groups.refetch()}
          />
        </Section>
        <Section title={i18n.t("Give a group a role")} id="give">
          <GroupForm sites={sites} />
        </Section>
      </PageBody>
      <Folio
        caution={i18n.t(
          "The last administrator stays one whatever the groups say; the trail says when that was so.",
        )}
      >
        <TextLink to={paths.trail}>{i18n.t("Trail")}</TextLink>
      </Folio>
    </>
  );
}
