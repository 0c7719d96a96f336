import { useLingui } from "@lingui/react";
import { ButtonLink } from "../components/button";
import { LangSwitch } from "../components/lang-switch";
import { Page, PageBody, PageHead, RunningHead } from "../components/page";
import { paths } from "../paths";

export function Component() {
  const { i18n } = useLingui();
  return (
    <Page head={<RunningHead account={<LangSwitch />} />}>
      <PageBody>
        <PageHead
          title={i18n.t("You are signed out")}
          lead={i18n.t("Here and at the sign-in service.")}
        />
        <p>
          <ButtonLink to={paths.signIn} reloadDocument>
            {i18n.t("Sign in again")}
          </ButtonLink>
        </p>
      </PageBody>
    </Page>
  );
}
