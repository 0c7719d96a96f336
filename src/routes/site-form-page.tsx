import { useLingui } from "@lingui/react";
import type { UseQueryResult } from "@tanstack/react-query";
import { localDateOf } from "../../shared/format/date";
import type { SiteView } from "../../shared/schemas/site";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { PageBody, PageHead } from "../components/page";
import { NewSiteForm, SiteForm } from "../features/sites-admin/site-forms";
import { paths } from "../paths";
import "../styles/register.css";
import "../styles/sites-admin.css";

/** One site, or a new one. */
export function SiteFormPage({
  id,
  sites,
  onClose,
}: {
  id: string;
  sites: UseQueryResult<SiteView[]>;
  onClose: () => void;
}) {
  const { i18n } = useLingui();
  const site = sites.data?.find((one) => one.id === id);
  const way = <TextLink to={paths.sites}>{i18n.t("Sites")}</TextLink>;
  if (id === "new") {
    const here = Intl.DateTimeFormat().resolvedOptions().timeZone;
    return (
      <PageBody>
        <PageHead
          way={way}
          title={i18n.t("New site")}
          lead={i18n.t("With its first rules: without rules no day can be judged.")}
        />
        <NewSiteForm
          today={localDateOf(new Date().toISOString(), here)}
          onSaved={onClose}
          onLeave={onClose}
        />
      </PageBody>
    );
  }
  return (
    <PageBody>
      <PageHead way={way} title={site?.name ?? <span className="loading-line" />} />
      {sites.isError && <Failed error={sites.error} onRetry={() => void sites.refetch()} />}
      {sites.isSuccess && !site && <Empty title={i18n.t("There is no site at this address.")} />}
      {site && <SiteForm key={site.revision} site={site} onSaved={onClose} onLeave={onClose} />}
    </PageBody>
  );
}
