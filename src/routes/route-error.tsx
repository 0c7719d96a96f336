import { useLingui } from "@lingui/react";
import { isRouteErrorResponse, useRouteError } from "react-router-dom";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Page, PageBody, PageHead, RunningHead } from "../components/page";
import { problemText } from "../lib/problem-text";
import { paths } from "../paths";

/** What stands in place of a page that broke: what happened, and what still holds. */
export function RouteError() {
  const { i18n } = useLingui();
  const error = useRouteError();
  const isMissing = isRouteErrorResponse(error) && error.status === 404;
  return (
    <Page head={<RunningHead />}>
      <PageBody>
        <PageHead
          title={
            isMissing ? i18n.t("There is no such page") : i18n.t("This page could not be shown")
          }
        />
        <Failed onRetry={() => window.location.reload()}>{problemText(i18n, error)}</Failed>
        <p>
          <TextLink to={paths.home}>{i18n.t("To your first page")}</TextLink>
        </p>
      </PageBody>
    </Page>
  );
}
