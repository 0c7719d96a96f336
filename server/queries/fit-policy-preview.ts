import type { FitPolicyInput, FitPolicyPreview } from "../../shared/schemas/fit";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { fitDues } from "./fit-dues";

/** SQL: since when a site asks for tests of fit at all; a change of the figures moves nobody's date. */
export const ASKED_FROM = (everyMonths: string, afterFailDays: string): string =>
  `CASE WHEN ${everyMonths} IS NOT NULL OR ${afterFailDays} IS NOT NULL THEN coalesce(fit_asked_from, current_date) END`;

/** What would be due at a site if it tested fits like that. */
export async function previewFitPolicy(
  { id: siteId }: { id: string },
  { everyMonths, afterFailDays, firstDays }: FitPolicyInput,
): Promise<FitPolicyPreview> {
  const tried = `(SELECT id, CAST(:everyMonths AS int) AS fit_every_months, CAST(:afterFailDays AS int) AS fit_after_fail_days,
      CAST(:firstDays AS int) AS fit_first_days, ${ASKED_FROM("CAST(:everyMonths AS int)", "CAST(:afterFailDays AS int)")} AS fit_asked_from
    FROM sites WHERE id = :siteId)`;
  return only(
    await rows<FitPolicyPreview>(
      `SELECT count(*) FILTER (WHERE due_on <= current_date)::int AS "dueNowCount",
         count(*) FILTER (WHERE tested_on IS NULL AND due_on > current_date)::int AS "untestedCount",
         (min(due_on) FILTER (WHERE tested_on IS NULL AND due_on > current_date))::text AS "untestedFrom",
         (max(due_on) FILTER (WHERE tested_on IS NULL AND due_on > current_date))::text AS "untestedTo"
       FROM (${fitDues("TRUE", tried)}) d`,
      { siteId, everyMonths, afterFailDays, firstDays },
    ),
  );
}
