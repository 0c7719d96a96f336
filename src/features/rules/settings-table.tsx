import { useLingui } from "@lingui/react";
import type { RuleSetVersion } from "../../../shared/acoustics/types";
import { formatInstant, formatShortDate } from "../../../shared/format/date";
import { formatLimit } from "../../../shared/format/level";
import type { SiteView } from "../../../shared/schemas/site";
import { DataTable } from "../../components/data-table";
import { useLocale } from "../../lib/i18n";

type Version = SiteView["settingsHistory"][number];

/** The name of a rule set as a site's settings hold it. */
export function ruleSetTitle(
  i18n: { _: (id: string) => string },
  ruleSets: readonly RuleSetVersion[],
  key: string,
): string {
  const found = ruleSets.find((ruleSet) => ruleSet.key === key);
  return found ? i18n._(found.title) : key;
}

/** What a site's verdicts rested on, by date, the latest first. */
export function SettingsTable({
  site,
  ruleSets,
  today,
}: {
  site: SiteView;
  ruleSets: readonly RuleSetVersion[];
  today: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const state = (version: Version) =>
    version.id === site.settings.id
      ? i18n.t("in force")
      : version.effectiveFrom > today
        ? i18n.t("to come")
        : "";
  return (
    <DataTable<Version>
      caption={i18n.t("Rules of {site} by date", { site: site.name })}
      rows={site.settingsHistory}
      rowKey={({ id }) => id}
      isTwoLine
      isSelected={({ id }) => id === site.settings.id}
      columns={[
        {
          id: "from",
          head: i18n.t("From"),
          isRowHead: true,
          cell: (version) => (
            <span className="two-lines">
              {formatShortDate(version.effectiveFrom, locale)}
              <span className="beneath">{state(version)}</span>
            </span>
          ),
        },
        {
          id: "governing",
          head: i18n.t("Governs"),
          cell: (version) => <b>{ruleSetTitle(i18n, ruleSets, version.governingRuleSet)}</b>,
        },
        {
          id: "comparison",
          head: i18n.t("For comparison"),
          cell: (version) =>
            version.comparisonRuleSets.map((key) => ruleSetTitle(i18n, ruleSets, key)).join(", ") ||
            i18n.t("none"),
        },
        {
          id: "wear",
          head: i18n.t("Worn from"),
          unit: "dB(A)",
          kind: "figure",
          cell: (version) => formatLimit(version.wearFromDb, locale),
        },
        {
          id: "counts",
          head: i18n.t("Counts"),
          cell: (version) => (
            <span className="two-lines">
              {version.usesUncertainty ? i18n.t("uncertainty") : i18n.t("no uncertainty")}
              <span className="beneath">
                {version.creditsActivePart
                  ? i18n.t("active part, where checked")
                  : i18n.t("active part off")}
              </span>
            </span>
          ),
        },
        {
          id: "why",
          head: i18n.t("Reason, and who entered it"),
          cell: (version) => (
            <span className="two-lines">
              {version.reason ?? i18n.t("first rules")}
              <span className="beneath">
                {[version.authorName, formatInstant(version.createdAt, site.timeZone, locale)]
                  .filter(Boolean)
                  .join(", ")}
              </span>
            </span>
          ),
        },
      ]}
    />
  );
}
