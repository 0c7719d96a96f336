import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import { Button } from "../components/button";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { PageBody, PageHead } from "../components/page";
import { IssueSlipPage } from "../features/choosing/issue-slip";
import { choiceQueries } from "../features/choosing/queries";
import { useUser } from "../features/session/session";
import { ProtectorWays } from "./protector-frame";
import "../styles/choosing.css";
import "../styles/field-sheet.css";

/** What goes along with a protector: a page for each worker, to be signed. */
export function Component() {
  const { i18n } = useLingui();
  const [search] = useSearchParams();
  const workerIds = search.get("workers") ?? "";
  const { name } = useUser();
  const { data, error, refetch } = useQuery(choiceQueries.slips(workerIds));
  return (
    <div className="field-sheets">
      <PageBody>
        <PageHead
          way={<ProtectorWays />}
          title={i18n.t("Issue slips")}
          lead={
            data &&
            i18n.t(
              "{count, plural, one {# page} other {# pages}} of A4, with what is assigned today.",
              {
                count: data.length,
              },
            )
          }
          actions={
            data && (
              <Button kind="primary" onClick={() => window.print()}>
                {i18n.t("Print")}
              </Button>
            )
          }
        />
        {workerIds === "" && (
          <Empty title={i18n.t("Nobody is named.")}>
            {i18n.t("Slips are printed from a worker’s page, or after choosing for a group.")}
          </Empty>
        )}
        {error && <Failed error={error} onRetry={() => void refetch()} />}
        {data?.map((slip) => (
          <IssueSlipPage key={slip.worker.id} slip={slip} issuedBy={name} />
        ))}
      </PageBody>
    </div>
  );
}
