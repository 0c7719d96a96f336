import { ratesPair } from "./own-attenuation";

/**
 * SQL: when a fit has to be tested again by the policy of the site `s`, after a test of `testedOn`; null: the site
 * states nothing. Every argument is an SQL expression. Sooner after a fail, after the refit that followed one, and
 * after a device handed out since (`issuedOn`, null: none). That a refit is looked at again is common practice, no source.
 */
export const dueAfterTest = (
  testedOn: string,
  hasPassed: string,
  hadPassedBefore: string,
  issuedOn: string,
): string =>
  `least((${testedOn} + make_interval(months => s.fit_every_months))::date,
     CASE WHEN ${hasPassed} IS FALSE OR ${hadPassedBefore} IS FALSE OR ${issuedOn} > ${testedOn}
       THEN greatest(${testedOn}, ${issuedOn}) + s.fit_after_fail_days END)`;

/**
 * SQL: the models that workers wear alone today, each with the day by which its fit has to be tested (`due_on`) and the
 * last test (`tested_on`, null: never). `condition` narrows the assignments `a`; `sites` stands in for the table where
 * another policy is tried. A device never tested on its wearer has the days that the policy states from the day on which
 * it was given; where that was before the site asked for tests, those days are shared out over all who wear one, so that
 * they do not all fall due at once. That share follows from the worker and the model, and stays. Common practice, no source.
 */
export const fitDues = (condition: string, sites = "sites"): string =>
  `SELECT w.organization_id, w.site_id, u.worker_id, u.model_id, m.name AS protector, t.tested_on,
     CASE WHEN t.tested_on IS NOT NULL THEN ${dueAfterTest("t.tested_on", "t.passed[1]", "t.passed[2]", "i.issued_on")}
       WHEN s.fit_asked_from > greatest(u.since, i.issued_on)
       THEN s.fit_asked_from + 1 + (hashtext(u.worker_id::text || u.model_id) & 2147483647) % s.fit_first_days
       ELSE greatest(u.since, i.issued_on) + s.fit_first_days END AS due_on
   FROM (SELECT a.worker_id, a.inner_model_id AS model_id, min(lower(a.valid)) AS since FROM assignments a
         WHERE a.valid @> current_date AND a.outer_model_id IS NULL AND ${condition} GROUP BY a.worker_id, a.inner_model_id) u
   JOIN workers w ON w.id = u.worker_id AND (w.left_on IS NULL OR w.left_on >= current_date)
   JOIN ${sites} s ON s.id = w.site_id AND (s.fit_every_months IS NOT NULL OR s.fit_after_fail_days IS NOT NULL)
   JOIN protector_models m ON m.id = u.model_id
   CROSS JOIN LATERAL (
     SELECT max(x.tested_on) AS tested_on, array_agg(x.has_passed ORDER BY x.tested_on DESC, x.created_at DESC) AS passed
     FROM (SELECT f.tested_on, f.created_at, v.has_passed FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id
           WHERE f.worker_id = u.worker_id AND f.model_id = u.model_id AND NOT f.is_void AND ${ratesPair("v")}
           ORDER BY f.tested_on DESC, f.created_at DESC LIMIT 2) x) t
   CROSS JOIN LATERAL (
     SELECT max(n.issued_on) AS issued_on FROM protector_issues n
     WHERE n.worker_id = u.worker_id AND n.model_id = u.model_id AND n.ended_on IS NULL AND n.fit_test_id IS NULL) i`;
