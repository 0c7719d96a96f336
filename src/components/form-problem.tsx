import { ApiError } from "../lib/api";
import { Problem } from "./problem";

/** Every issue is of a field that the form has, so it stands there. */
const isSaidByFields = (error: unknown, fields: object): boolean =>
  error instanceof ApiError &&
  error.code === "invalid" &&
  error.issues.length > 0 &&
  error.issues.every(({ path }) => (path.split(".")[0] ?? "") in fields);

/** What went wrong with a whole form, above its buttons; the fields say their own. */
export function FormProblem({
  error,
  form,
}: {
  error: unknown;
  /** One whose fields show the server's issues (`showIssuesOn`). */
  form?: { getValues: () => object };
}) {
  if (error === null || error === undefined) return null;
  if (form && isSaidByFields(error, form.getValues())) return null;
  return (
    <p className="field-error" role="alert">
      <Problem error={error} />
    </p>
  );
}
