import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { lazy, Suspense } from "react";
import { ButtonLink } from "../components/button";
import { Folio, MarginNote, PageBody, PageHead } from "../components/page";
import { siteQueries } from "../features/sites-admin/queries";
import { SitesTable } from "../features/sites-admin/sites-table";
import { useEditParam } from "../lib/edit-param";
import { paths } from "../paths";
import { Loading } from "./loading";

/** With the forms, so that the list does not wait for them. */
const SiteFormPage = lazy(() =>
  import("./site-form-page").then(({ SiteFormPage }) => ({ default: SiteFormPage })),
);

/** The sites of the organization; a form stands in its place while one is changed. */
export function Component() {
  const { i18n } = useLingui();
  const { editing, edit, close } = useEditParam();
  const sites = useQuery(siteQueries.list);
  const can = useQuery(siteQueries.can);
  if (editing !== null)
    return (
      <Suspense fallback={<Loading />}>
        <SiteFormPage id={editing} sites={sites} onClose={close} />
      </Suspense>
    );
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("Rules")}>
            <p>
              {i18n.t(
                "A site’s rules are chosen with it and later changed by its safety officer, with a reason and from a date.",
              )}
            </p>
          </MarginNote>
        }
      >
        <PageHead
          title={i18n.t("Sites")}
          lead={i18n.t("Where people work: time zone, language, and how long notices wait.")}
          actions={
            can.data?.create && (
              <ButtonLink kind="primary" to={{ pathname: paths.sites, search: "?edit=new" }}>
                {i18n.t("New site")}
              </ButtonLink>
            )
          }
        />
        <SitesTable
          sites={sites.data ?? []}
          state={sites.isPending ? "loading" : sites.isError ? "failed" : "ready"}
          error={sites.error}
          onRetry={() => void sites.refetch()}
          onEdit={edit}
        />
      </PageBody>
      <Folio caution={i18n.t("Each change is an event in the trail.")} />
    </>
  );
}
