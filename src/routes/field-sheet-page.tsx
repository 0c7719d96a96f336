import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { Button, ButtonLink } from "../components/button";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { PageBody, PageHead } from "../components/page";
import { FieldSheetPage, sheetSubjects } from "../features/surveys/field-sheet";
import { surveyQueries } from "../features/surveys/queries";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import { useSiteChoice } from "./site-choice";
import "../styles/field-sheet.css";

/** What is carried along when it is measured: a page of A4 for each task, or for each worker. */
export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const choice = useSiteChoice();
  const { data: survey, error, refetch } = useQuery(surveyQueries.one(id));
  const subjects = survey ? sheetSubjects(survey, i18n.t("The whole of the work")) : [];
  return (
    <div className="field-sheets">
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Field sheet")}
          lead={
            survey
              ? i18n.t("{survey}: {count, plural, one {# page} other {# pages}} of A4.", {
                  survey: survey.name,
                  count: subjects.length,
                })
              : undefined
          }
          actions={
            survey && (
              <>
                <Button kind="primary" onClick={() => window.print()}>
                  {i18n.t("Print")}
                </Button>
                <ButtonLink to={paths.survey(id)}>{i18n.t("Back to the survey")}</ButtonLink>
              </>
            )
          }
        />
        {error && <Failed error={error} onRetry={() => void refetch()} />}
        {survey && subjects.length === 0 && (
          <Empty title={i18n.t("Nobody has been drawn yet, so there is no page to print.")} />
        )}
        {survey &&
          subjects.map((subject, index) => (
            <FieldSheetPage
              key={subject.key}
              survey={survey}
              subject={subject}
              siteName={choice.siteName(survey.siteId)}
              page={index + 1}
              pages={subjects.length}
            />
          ))}
      </PageBody>
    </div>
  );
}
