import { useLingui } from "@lingui/react";
import { issueText } from "../../shared/problems/issue-text";
import { ApiError } from "../lib/api";
import { FormProblem } from "./form-problem";

/** What went wrong where no field could say it: each issue in its sentence, else the error's own. */
export function ProblemIssues({ error }: { error: unknown }) {
  const { i18n } = useLingui();
  if (!(error instanceof ApiError) || error.issues.length === 0)
    return <FormProblem error={error} />;
  return (
    <div role="alert">
      {[...new Set(error.issues.map((issue) => issueText(i18n, issue)))].map((sentence) => (
        <p key={sentence} className="field-error">
          {sentence}
        </p>
      ))}
    </div>
  );
}
