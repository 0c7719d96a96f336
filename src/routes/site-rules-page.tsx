import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import { formatDate, localDateOf } from "../../shared/format/date";
import { Button } from "../components/button";
import { RecomputeProgress } from "../components/change-preview";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Escalation } from "../features/rules/escalation";
import { FitPolicy } from "../features/rules/fit-policy";
import { ruleQueries } from "../features/rules/queries";
import { RuleSetTable } from "../features/rules/rule-set-table";
import { SettingsForm } from "../features/rules/settings-form";
import { ruleSetTitle, SettingsTable } from "../features/rules/settings-table";
import { useEditParam } from "../lib/edit-param";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { RuleWays } from "./register-frame";

/** The rules of one site by date, and their change with a look at who changes verdict. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "" } = useParams();
  const { editing, edit, close } = useEditParam();
  const [isChanged, setIsChanged] = useState(false);
  const { data: site, error, refetch } = useQuery(ruleQueries.site(id));
  const found = useQuery(ruleQueries.ruleSets);
  const ruleSets = found.data?.rows ?? [];
  if (!site)
    return (
      <PageBody>
        <PageHead way={<RuleWays />} title={error ? i18n.t("Site") : " "} />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
      </PageBody>
    );
  const today = localDateOf(new Date().toISOString(), site.timeZone);
  const { settings } = site;
  const governing = ruleSets.find(
    ({ key, effectiveFrom, effectiveTo }) =>
      key === settings.governingRuleSet &&
      effectiveFrom <= today &&
      (effectiveTo === null || today <= effectiveTo),
  );
  const latest = ruleSets.filter(
    (ruleSet) =>
      !ruleSets.some((other) => other.key === ruleSet.key && other.version > ruleSet.version),
  );
  const mayChange = site.can.changeRules;
  return (
    <>
      <PageBody
        margin={
          <>
            <MarginNote title={i18n.t("Described for this site")} isRuled>
              <p>
                <TextLink to={`${paths.areas}?site=${site.id}`}>{i18n.t("Areas")}</TextLink>
              </p>
              <p>
                <TextLink to={`${paths.tasks}?site=${site.id}`}>{i18n.t("Tasks")}</TextLink>
              </p>
              <p>
                <TextLink to={`${paths.jobs}?site=${site.id}`}>{i18n.t("Jobs")}</TextLink>
              </p>
              <p>
                <TextLink to={`${paths.crews}?site=${site.id}`}>{i18n.t("Crews")}</TextLink>
              </p>
            </MarginNote>
            <MarginNote title={i18n.t("Time zone")}>
              <p>{site.timeZone}</p>
            </MarginNote>
            <MarginNote title={i18n.t("Notices wait")}>
              <p>
                {i18n.t("{count, plural, one {# minute} other {# minutes}} before they are sent", {
                  count: site.noticeDelayMin,
                })}
              </p>
            </MarginNote>
          </>
        }
      >
        <PageHead
          way={<RuleWays />}
          title={site.name}
          lead={i18n.t("{ruleSet} governs since {date}.", {
            ruleSet: ruleSetTitle(i18n, ruleSets, settings.governingRuleSet),
            date: formatDate(settings.effectiveFrom, locale),
          })}
          actions={
            mayChange &&
            editing === null && (
              <Button kind="primary" onClick={() => edit("rules")}>
                {i18n.t("Change the rules")}
              </Button>
            )
          }
        />
        {isChanged && <RecomputeProgress />}
        {mayChange && editing === "rules" && latest.length > 0 && (
          <Section title={i18n.t("New rules from a date on")} id="settings-form">
            <SettingsForm
              site={site}
              ruleSets={latest}
              today={today}
              onLeave={close}
              onSaved={() => {
                setIsChanged(true);
                close();
              }}
            />
          </Section>
        )}
        <Section title={i18n.t("Rules by date")} id="by-date">
          <SettingsTable site={site} ruleSets={ruleSets} today={today} />
        </Section>
        <Section title={i18n.t("Fit tests")} id="fit-policy">
          <FitPolicy key={site.revision} site={site} />
        </Section>
        {mayChange && (
          <Section title={i18n.t("Overdue findings")} id="escalation">
            <Escalation key={site.revision} siteId={site.id} />
          </Section>
        )}
        {governing && (
          <Section title={i18n._(governing.title)} id="governing">
            <RuleSetTable ruleSet={governing} />
          </Section>
        )}
        {found.error && <Failed error={found.error} onRetry={() => void found.refetch()} />}
      </PageBody>
      <Folio>
        {i18n.t(
          "A day is judged by the rules in force on its date. Judging anew is explicit and keeps both.",
        )}
      </Folio>
    </>
  );
}
