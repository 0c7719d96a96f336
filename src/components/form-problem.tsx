import { useLingui } from "@lingui/react";
import { problemText } from "../lib/problem-text";

/** What went wrong with a whole form, above its buttons; the fields say their own. */
export function FormProblem({ error }: { error: unknown }) {
  const { i18n } = useLingui();
  if (error === null || error === undefined) return null;
  return (
    <p className="field-error" role="alert">
      {problemText(i18n, error)}
    </p>
  );
}
