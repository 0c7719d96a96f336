import type { I18n } from "@lingui/core";
import type { FieldPath, FieldValues, UseFormSetError } from "react-hook-form";
import { issueText } from "../../../shared/problems/issue-text";
import { recordingText } from "../../../shared/recordings/recording-text";
import { ApiError } from "../../lib/api";

/** As `showIssuesOn`, in the words of recordings. */
export function showRecordingIssuesOn<Values extends FieldValues>(
  form: { setError: UseFormSetError<Values> },
  i18n: I18n,
): (error: unknown) => void {
  return (error) => {
    if (!(error instanceof ApiError)) return;
    error.issues.forEach((issue, index) => {
      const message = recordingText(i18n, issue.code, issue.params) ?? issueText(i18n, issue);
      form.setError(
        (issue.path || "root") as FieldPath<Values>,
        { type: issue.code, message },
        { shouldFocus: index === 0 },
      );
    });
  };
}
