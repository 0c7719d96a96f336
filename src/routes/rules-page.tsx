import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import type { RuleSetVersion } from "../../shared/acoustics/types";
import { formatShortDate } from "../../shared/format/date";
import { formatLimit } from "../../shared/format/level";
import type { SiteView } from "../../shared/schemas/site";
import { DataTable } from "../components/data-table";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { ruleQueries } from "../features/rules/queries";
import { RuleSetTable } from "../features/rules/rule-set-table";
import { datesWords } from "../features/rules/rule-words";
import { ruleSetTitle } from "../features/rules/settings-table";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { RuleWays } from "./register-frame";

const idOf = ({ key, version }: RuleSetVersion) => `${key}-${version}`;

/** Which rules govern which site, and every rule set as a table. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [search] = useSearchParams();
  const sites = useQuery(ruleQueries.listSites());
  const found = useQuery(ruleQueries.ruleSets);
  const ruleSets = found.data?.rows ?? [];
  const rows = sites.data?.rows ?? [];
  const governs = (key: string) => rows.filter((site) => site.settings.governingRuleSet === key);
  const compares = (key: string) =>
    rows.filter((site) => site.settings.comparisonRuleSets.includes(key));
  const shown =
    ruleSets.find((ruleSet) => idOf(ruleSet) === search.get("set")) ??
    ruleSets.find(({ key }) => key === rows[0]?.settings.governingRuleSet) ??
    (sites.isPending ? undefined : ruleSets[0]);
  const stateOf = ({ isPending, error }: { isPending: boolean; error: unknown }) =>
    isPending ? "loading" : error ? "failed" : "ready";
  return (
    <>
      <PageBody>
        <PageHead
          way={<RuleWays />}
          title={i18n.t("Rules")}
          lead={i18n.t(
            "The governing rule set decides and makes findings; the others are computed beside it.",
          )}
        />
        <DataTable<SiteView>
          caption={i18n.t("Sites and their rules")}
          state={stateOf(sites)}
          error={sites.error}
          onRetry={() => void sites.refetch()}
          rows={rows}
          rowKey={({ id }) => id}
          isTwoLine
          stacksOnPhone
          columns={[
            {
              id: "site",
              head: i18n.t("Site"),
              isRowHead: true,
              cell: (site) => <TextLink to={paths.site(site.id)}>{site.name}</TextLink>,
            },
            {
              id: "governing",
              head: i18n.t("Governs"),
              cell: (site) => (
                <span className="two-lines">
                  <b>{ruleSetTitle(i18n, ruleSets, site.settings.governingRuleSet)}</b>
                  <span className="beneath">
                    {i18n.t("since {date}", {
                      date: formatShortDate(site.settings.effectiveFrom, locale),
                    })}
                  </span>
                </span>
              ),
            },
            {
              id: "comparison",
              head: i18n.t("For comparison"),
              cell: (site) =>
                site.settings.comparisonRuleSets
                  .map((key) => ruleSetTitle(i18n, ruleSets, key))
                  .join(", ") || i18n.t("none"),
            },
            {
              id: "wear",
              hidesOnPhone: true,
              head: i18n.t("Worn from"),
              unit: "dB(A)",
              kind: "figure",
              cell: (site) => formatLimit(site.settings.wearFromDb, locale),
            },
            {
              id: "uncertainty",
              head: i18n.t("Uncertainty"),
              hidesOnPhone: true,
              cell: (site) =>
                site.settings.usesUncertainty ? i18n.t("counts") : i18n.t("does not count"),
            },
            {
              id: "active",
              head: i18n.t("Active part"),
              hidesOnPhone: true,
              cell: (site) =>
                site.settings.creditsActivePart ? i18n.t("counts, where checked") : i18n.t("off"),
            },
          ]}
        />
        <Section title={i18n.t("Rule sets")} id="rule-sets">
          <DataTable<RuleSetVersion>
            caption={i18n.t("Rule sets")}
            state={stateOf(found)}
            error={found.error}
            onRetry={() => void found.refetch()}
            rows={ruleSets}
            rowKey={idOf}
            isSelected={(ruleSet) => ruleSet === shown}
            columns={[
              {
                id: "title",
                head: i18n.t("Rule set"),
                isRowHead: true,
                cell: (ruleSet) => (
                  <TextLink
                    to={`?set=${idOf(ruleSet)}#rule-set`}
                    preventScrollReset
                    aria-current={ruleSet === shown ? "true" : undefined}
                  >
                    {i18n._(ruleSet.title)}
                  </TextLink>
                ),
              },
              {
                id: "citation",
                head: i18n.t("Citation"),
                hidesOnPhone: true,
                cell: ({ citation }) => citation,
              },
              {
                id: "version",
                head: i18n.t("Version"),
                kind: "figure",
                hidesOnPhone: true,
                cell: ({ version }) => version,
              },
              {
                id: "dates",
                head: i18n.t("Dates"),
                hidesOnPhone: true,
                cell: (ruleSet) => datesWords(i18n, ruleSet, locale),
              },
              {
                id: "used",
                head: i18n.t("Used here"),
                cell: ({ key }) => (
                  <span className="two-lines">
                    {governs(key).length > 0 && (
                      <span>
                        {i18n.t("governs {sites}", {
                          sites: governs(key)
                            .map(({ name }) => name)
                            .join(", "),
                        })}
                      </span>
                    )}
                    {compares(key).length > 0 && (
                      <span className="beneath">
                        {i18n.t("for comparison at {sites}", {
                          sites: compares(key)
                            .map(({ name }) => name)
                            .join(", "),
                        })}
                      </span>
                    )}
                  </span>
                ),
              },
            ]}
          />
        </Section>
        {shown && (
          <Section title={i18n._(shown.title)} id="rule-set">
            <RuleSetTable ruleSet={shown} />
          </Section>
        )}
        {found.error && !shown && <Failed error={found.error} />}
      </PageBody>
      <Folio>
        {i18n.t(
          "What a rule does not state stays empty and shows as not stated. A line from memory has to be held against the official text.",
        )}
      </Folio>
    </>
  );
}
