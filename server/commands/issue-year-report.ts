import { isDeepStrictEqual } from "node:util";
import type { YearReportInput } from "../../shared/schemas/report";
import { recordAudit } from "../lib/audit";
import { row } from "../lib/db";
import { AppError } from "../lib/errors";
import { only } from "../lib/only";
import type { Actor } from "../lib/policy";
import { trailHead } from "../queries/trail-check";
import { lastYearReport, resultsInForce, yearReportFigures } from "../queries/year-reports";

/** How often it is tried to find the year at rest: results may be computed anew meanwhile. */
const TRIES = 3;

/**
 * Issues a report of a site's year: its figures and the results that they rest on are kept as they are now, so that it can be
 * taken again as it was. The site is locked, so that numbers follow one another. Gives the report's id.
 *
 * @throws AppError nothing-to-do: no day of that year has a result; try-again: the year did not come to rest.
 */
export async function issueYearReport(actor: Actor, asked: YearReportInput): Promise<string> {
  const last = await lastYearReport(asked);
  for (let attempt = 0; attempt < TRIES; attempt += 1) {
    const before = await resultsInForce(actor, asked);
    if (before.results.length === 0) throw new AppError("nothing-to-do", 422);
    const figures = await yearReportFigures(actor, asked, last);
    const after = await resultsInForce(actor, asked);
    if (!isDeepStrictEqual(before, after)) continue;
    const seal = await trailHead(actor.organizationId);
    const number = (last?.number ?? 0) + 1;
    const made = await row<{ id: string }>(
      `INSERT INTO year_reports (organization_id, site_id, year, number, as_of, figures, results, results_sha256, seal_number, seal_sha256, author_id)
       VALUES (:organizationId, :siteId, :year, :number, clock_timestamp(), CAST(:figures AS jsonb), CAST(:results AS uuid[]), decode(:sha256, 'hex'),
         :sealNumber, decode(:sealHash, 'hex'), :userId) RETURNING id`,
      {
        organizationId: actor.organizationId,
        userId: actor.userId,
        ...asked,
        number,
        figures: JSON.stringify(figures),
        results: `{${before.results.join(",")}}`,
        sha256: before.sha256,
        sealNumber: seal?.number ?? null,
        sealHash: seal?.hash ?? null,
      },
    );
    const { id } = only(made ? [made] : []);
    await recordAudit(actor, {
      action: "issue-year-report",
      subjectKind: "site",
      subjectId: asked.siteId,
      values: { year: asked.year, number, results: before.results.length, sha256: before.sha256 },
    });
    return id;
  }
  throw new AppError("try-again", 409);
}
