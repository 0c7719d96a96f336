import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { A_WEIGHTING_DB, weightedSumDb } from "../../shared/acoustics/protection/octave-band";
import { formatLevel } from "../../shared/format/level";
import type { WarningSignalView } from "../../shared/schemas/warning-signal";
import { ButtonLink } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { signalQueries } from "../features/signals/queries";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { ProtectorWays } from "./protector-frame";
import { SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";

/** The signals that must be heard at each site, protector or not. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const { data, isPending, error, refetch } = useQuery(signalQueries.list(choice.site?.id));
  return (
    <>
      <PageBody>
        <PageHead
          way={<ProtectorWays />}
          title={i18n.t("Warning signals")}
          lead={i18n.t(
            "What has to be heard through a protector. Each is held against the noise of the tasks and what is worn there.",
          )}
          actions={
            choice.isOfficer && (
              <ButtonLink
                kind="primary"
                to={choice.site ? `${paths.newSignal}?site=${choice.site.id}` : paths.newSignal}
              >
                {i18n.t("New signal")}
              </ButtonLink>
            )
          }
        />
        <SiteChoice choice={choice} />
        <DataTable<WarningSignalView>
          caption={i18n.t("Warning signals")}
          state={isPending ? "loading" : error ? "failed" : "ready"}
          error={error}
          onRetry={() => void refetch()}
          rows={data?.rows ?? []}
          rowKey={({ id }) => id}
          isTwoLine
          stacksOnPhone
          groupOf={({ siteId, siteName, isArchived }) =>
            isArchived
              ? { key: "archived", label: i18n.t("No longer in use") }
              : { key: siteId, label: siteName }
          }
          empty={
            <Empty title={i18n.t("No signal is on record here yet.")}>
              {i18n.t("A siren, a reversing alarm, an evacuation signal: enter its octave bands.")}
            </Empty>
          }
          columns={[
            {
              id: "name",
              head: i18n.t("Signal"),
              isRowHead: true,
              cell: ({ id, name, meaning }) => (
                <span className="two-lines">
                  <TextLink to={paths.signal(id)}>{name}</TextLink>
                  {meaning !== "" && <span className="beneath">{meaning}</span>}
                </span>
              ),
            },
            {
              id: "area",
              head: i18n.t("Area"),
              cell: ({ areaName }) => areaName ?? i18n.t("the whole site"),
            },
            {
              id: "level",
              head: i18n.t("A-weighted"),
              unit: "dB(A)",
              kind: "figure",
              cell: ({ octaveBandsDb }) =>
                formatLevel(weightedSumDb(octaveBandsDb, A_WEIGHTING_DB), locale),
            },
          ]}
        />
      </PageBody>
      <Folio>
        {i18n.t(
          "ISO 7731: audible where a signal passes the masked threshold by 10 dB in at least one octave band.",
        )}
      </Folio>
    </>
  );
}
