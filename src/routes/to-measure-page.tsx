import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatShortDate } from "../../shared/format/date";
import { changeKindTitle } from "../../shared/surveys/words";
import { ButtonLink } from "../components/button";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { NeedsTable } from "../features/surveys/needs-table";
import { surveyQueries } from "../features/surveys/queries";
import { RemeasureInterval } from "../features/surveys/remeasure-form";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import { SiteChoice } from "./register-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/surveys.css";

/** What needs measuring, and why; each group opens a survey half filled in. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const choice = useSiteChoice();
  const { data, isPending, error, refetch } = useQuery(surveyQueries.needs(choice.site?.id));
  const waiting = data?.rows.filter(({ surveyId }) => surveyId === null).length ?? 0;
  const underWay = (data?.rows.length ?? 0) - waiting;
  return (
    <>
      <PageBody
        margin={
          data && (
            <MarginNote title={i18n.t("Measured again")} isRuled>
              {data.sites.map((site) => (
                <RemeasureInterval key={site.id} site={site} />
              ))}
            </MarginNote>
          )
        }
      >
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("To be measured")}
          lead={
            data ? (
              i18n.t(
                "{waiting, plural, =0 {No group waits} one {# of {groups} groups waits} other {# of {groups} groups wait}}{underWay, plural, =0 {.} other {; for # a survey is under way.}}",
                { waiting, underWay, groups: data.groupsCount },
              )
            ) : (
              <span className="loading-line" />
            )
          }
          actions={
            <>
              {choice.isOfficer && (
                <ButtonLink kind="primary" to={paths.newSurvey}>
                  {i18n.t("New survey")}
                </ButtonLink>
              )}
              <ButtonLink to={paths.workplaceChanges}>{i18n.t("Register of changes")}</ButtonLink>
            </>
          }
        />
        <SiteChoice choice={choice} />
        <NeedsTable
          rows={data?.rows ?? []}
          groupsCount={data?.groupsCount ?? 0}
          canPlan={choice.isOfficer}
          showsSite={choice.site === null && choice.sites.length > 1}
          state={isPending ? "loading" : error ? "failed" : "ready"}
          error={error}
          onRetry={() => void refetch()}
        />
        {data && data.protectors.length > 0 && (
          <Section title={i18n.t("Protectors chosen before a change")} id="protectors">
            <ul className="need-reasons">
              {data.protectors.map((one) => (
                <li key={one.changeId}>
                  <span>
                    {i18n.t("{subject}, {kind}, since {date}: {what}", {
                      subject: one.subjectName,
                      kind: changeKindTitle(i18n, one.kind),
                      date: formatShortDate(one.happenedOn, locale),
                      what: one.what,
                    })}
                  </span>{" "}
                  <TextLink to={paths.protectorsBefore(one.changeId)}>
                    {i18n.t(
                      "{count, plural, one {# protector was} other {# protectors were}} chosen before it",
                      { count: one.assignmentsCount },
                    )}
                  </TextLink>
                </li>
              ))}
            </ul>
          </Section>
        )}
      </PageBody>
      <Folio>
        {i18n.t(
          "A level counts as measured where samples stand behind it. A change asks for what was measured before it to be measured again.",
        )}
      </Folio>
    </>
  );
}
