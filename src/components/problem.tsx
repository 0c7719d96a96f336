import { useLingui } from "@lingui/react";
import { useLocation } from "react-router-dom";
import { ApiError } from "../lib/api";
import { problemText } from "../lib/problem-text";
import { paths } from "../paths";
import { TextLink } from "./link";

/** To the sign-in, and back to this page. */
export function SignInAgain() {
  const { i18n } = useLingui();
  const { pathname, search } = useLocation();
  return (
    <TextLink to={`${paths.signIn}?returnTo=${encodeURIComponent(pathname + search)}`}>
      {i18n.t("Sign in again")}
    </TextLink>
  );
}

/** An error's sentence; where nobody is signed in any more, with the way back. */
export function Problem({ error }: { error: unknown }) {
  const { i18n } = useLingui();
  return (
    <>
      {problemText(i18n, error)}
      {error instanceof ApiError && error.status === 401 && (
        <>
          {" "}
          <SignInAgain />
        </>
      )}
    </>
  );
}
