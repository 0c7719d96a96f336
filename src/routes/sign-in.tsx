import { useLingui } from "@lingui/react";
import { useSearchParams } from "react-router-dom";
import { codeText } from "../../shared/problems/code-text";
import { LangSwitch } from "../components/lang-switch";
import { Folio, Page, PageBody, PageHead, RunningHead } from "../components/page";

/** Before anybody is signed in: the language, and the way to the provider. */
export function Component() {
  const { i18n } = useLingui();
  const [search] = useSearchParams();
  const returnTo = search.get("returnTo") ?? "/";
  const minutes = Number(search.get("minutes"));
  const problem = codeText(
    i18n,
    search.get("problem") ?? "",
    Number.isInteger(minutes) && minutes > 0 ? { minutes } : {},
  );
  return (
    <Page head={<RunningHead account={<LangSwitch />} />} folio={<Folio />}>
      <PageBody>
        <PageHead
          title={i18n.t("Sign in")}
          lead={
            search.has("failed")
              ? i18n.t("The sign-in was not completed. Nothing has happened; try again.")
              : i18n.t(
                  "Noise at work and hearing protectors: who was in how much, what reached the ear, what to do.",
                )
          }
        />
        {problem && <p role="alert">{problem}</p>}
        <p>
          <a
            className="button is-primary"
            href={`/api/auth/sign-in?returnTo=${encodeURIComponent(returnTo)}`}
          >
            {i18n.t("Go to sign-in")}
          </a>
        </p>
      </PageBody>
    </Page>
  );
}
