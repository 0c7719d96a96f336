import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { accessQueries } from "../features/access/queries";
import { ReadersTable } from "../features/access/readers-table";
import { paths } from "../paths";
import "../styles/access.css";

/** Who can see one worker's record. */
export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const readers = useQuery(accessQueries.worker(id));
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.worker(id)}>{i18n.t("Worker")}</TextLink>}
          title={i18n.t("Who can see this record")}
          lead={i18n.t("By the roles as they stand now. The worker sees this list too.")}
        />
        <ReadersTable
          caption={i18n.t("Who can see this record")}
          readers={readers.data}
          of="record"
          error={readers.error}
          onRetry={() => void readers.refetch()}
        />
      </PageBody>
      <Folio caution={i18n.t("Opening a record leaves an entry that its worker can read.")} />
    </>
  );
}
