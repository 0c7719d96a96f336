import type { FieldPath, FieldValues, UseFormSetError } from "react-hook-form";
import { showIssuesOn } from "../../components/form";
import { ApiError } from "../../lib/api";

/** The server's issues of the facts stand at the cells; one that names no field of the form stands for the whole. */
export function showFitIssuesOn<Values extends FieldValues>(
  form: { setError: UseFormSetError<Values>; getValues: () => Values },
  i18n: Parameters<typeof showIssuesOn>[1],
): (error: unknown) => void {
  const show = showIssuesOn<Values>(form, i18n);
  return (error) => {
    if (!(error instanceof ApiError)) return;
    const fields = Object.keys(form.getValues());
    const issues = error.issues.map((issue) => {
      const [name = ""] = issue.path.replace(/^facts\./, "").split(".");
      return { ...issue, path: (fields.includes(name) ? name : "root") as FieldPath<Values> };
    });
    show(new ApiError(error.status, error.code, error.params, issues, error.body, error.message));
  };
}
