import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useSearchParams } from "react-router-dom";
import type { EmployerShareView } from "../../shared/schemas/employer-share";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { shareQueries } from "../features/employer-shares/queries";
import { ShareForm } from "../features/employer-shares/share-form";
import { SharesTable } from "../features/employer-shares/shares-table";
import { hasRole, useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { untilText } from "../lib/until-text";
import { paths } from "../paths";
import "../styles/people.css";

/** Somebody of an agency or a contractor reads its people's results at a site for a while. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const { sites } = user;
  const [search, setSearch] = useSearchParams();
  const site = sites.find(({ id }) => id === search.get("site")) ?? sites[0];
  const list = useQuery({ ...shareQueries.at(site?.id ?? ""), enabled: site !== undefined });
  const [shared, setShared] = useState<EmployerShareView | null>(null);
  return (
    <>
      <PageBody>
        <PageHead
          way={
            hasRole(user, "officer") ? (
              <TextLink to={paths.employers}>{i18n.t("Agencies and contractors")}</TextLink>
            ) : (
              <TextLink to={paths.people}>{i18n.t("People")}</TextLink>
            )
          }
          title={i18n.t("Results shared with employers")}
          lead={i18n.t(
            "Somebody of an employer reads the results of its own people at one site, and nothing else. Access ends by itself.",
          )}
        />
        {sites.length > 1 && (
          <FilterRow label={i18n.t("Site")}>
            <FilterSelect
              label={i18n.t("Site")}
              value={site?.id ?? ""}
              choices={sites.map(({ id, name }) => ({ value: id, label: name }))}
              onChange={(id) => {
                setShared(null);
                setSearch({ site: id }, { replace: true });
              }}
            />
          </FilterRow>
        )}
        <Section title={i18n.t("Let somebody of an employer in")} id="let-in">
          {site && list.data && list.data.employers.length > 0 && (
            <ShareForm
              key={site.id}
              site={site}
              employers={list.data.employers}
              onShared={setShared}
            />
          )}
          {list.data?.employers.length === 0 && (
            <Empty title={i18n.t("Nobody works here for another employer.")} />
          )}
          <p className="mt-3">
            <Status>
              {shared &&
                i18n.t("{name} may read the results of {employer}. Access ends: {time}.", {
                  name: shared.name,
                  employer: shared.employerName,
                  time: untilText(i18n, shared.endsAt, shared.timeZone, locale),
                })}
            </Status>
          </p>
        </Section>
        <Section title={i18n.t("Who is let in")} id="shares">
          <SharesTable
            shares={list.data?.rows ?? []}
            state={list.isPending ? "loading" : list.isError ? "failed" : "ready"}
            error={list.error}
            onRetry={() => void list.refetch()}
          />
        </Section>
      </PageBody>
      <Folio
        caution={i18n.t(
          "Letting somebody in, and ending it, are events in the trail. Each worker sees who reads.",
        )}
      />
    </>
  );
}
