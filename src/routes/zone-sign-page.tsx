import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { Button } from "../components/button";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { PageBody, PageHead } from "../components/page";
import { MandatoryHearingSign } from "../features/areas/mandatory-hearing-sign";
import { areaQueries } from "../features/areas/queries";
import { RuleWays } from "./register-frame";
import "../styles/choosing.css";
import "../styles/field-sheet.css";

/** The sign of a protection zone, a page of A4 for its entrances. */
export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const { data, error, refetch } = useQuery(areaQueries.list());
  const area = data?.rows.find((row) => row.id === id);
  return (
    <div className="field-sheets">
      <PageBody>
        <PageHead
          way={<RuleWays />}
          title={i18n.t("Sign of the zone")}
          lead={area?.name}
          actions={
            area &&
            area.zone !== "none" && (
              <Button kind="primary" onClick={() => window.print()}>
                {i18n.t("Print")}
              </Button>
            )
          }
        />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
        {data && !area && <Empty title={i18n.t("There is no such area.")} />}
        {area?.zone === "none" && (
          <Empty title={i18n.t("{area} is no protection zone.", { area: area.name })}>
            {i18n.t("A sign hangs where protectors have to be worn.")}
          </Empty>
        )}
        {area && area.zone !== "none" && (
          <article className="field-sheet zone-sign" aria-label={area.name}>
            <MandatoryHearingSign title={i18n.t("Wear hearing protection")} />
            <p className="zone-sign-words">{i18n.t("Wear hearing protection")}</p>
            <p className="zone-sign-area">{area.name}</p>
            {area.zone === "double" && (
              <p className="zone-sign-double">{i18n.t("Two together: a plug under a muff")}</p>
            )}
          </article>
        )}
      </PageBody>
    </div>
  );
}
