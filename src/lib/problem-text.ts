import type { I18n } from "@lingui/core";
import { codeText } from "../../shared/problems/code-text";
import { ApiError } from "./api";

/** What to say about an error of any kind; an unknown code speaks with the problem's own words. */
export function problemText(i18n: I18n, error: unknown): string {
  if (error instanceof ApiError)
    return (
      codeText(i18n, error.code, error.params) ?? (error.message || i18n.t("It could not be done."))
    );
  return i18n.t("This part could not be read.");
}
