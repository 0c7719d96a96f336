import { useLingui } from "@lingui/react";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { ReadsTable } from "../features/access/reads-table";
import { paths } from "../paths";
import "../styles/access.css";

/** Who read whose record, for those who look after it. */
export function Component() {
  const { i18n } = useLingui();
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.trail}>{i18n.t("Trail")}</TextLink>}
          title={i18n.t("Who read whose record")}
          lead={i18n.t(
            "Once for each reader, worker, part of the record and day. Nothing here is ever changed or taken out.",
          )}
        />
        <ReadsTable />
      </PageBody>
      <Folio caution={i18n.t("Reading one’s own record leaves no entry.")} />
    </>
  );
}
