import { Problem } from "./problem";

/** What went wrong with a whole form, above its buttons; the fields say their own. */
export function FormProblem({ error }: { error: unknown }) {
  if (error === null || error === undefined) return null;
  return (
    <p className="field-error" role="alert">
      <Problem error={error} />
    </p>
  );
}
