/**
 * SQL: what is known of a protector on its wearer, on a date. Every argument is an SQL expression.
 */

/** Tests of a worker and a model up to a date, the latest first; another size than the assigned one says nothing of it. */
const testsOf = (worker: string, model: string, size: string, date: string, condition: string) =>
  `SELECT v.id FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id
   WHERE f.worker_id = ${worker} AND f.model_id = ${model} AND NOT f.is_void AND f.tested_on <= ${date} AND ${condition}
     AND (${size} IS NULL OR v.size IS NULL OR v.size = ${size})
   ORDER BY f.tested_on DESC, f.created_at DESC LIMIT 1`;

/** The revision of the fit test that counts: the latest, passed or not. */
export const fitInForce = (worker: string, model: string, size: string, date: string): string =>
  `(${testsOf(worker, model, size, date, "v.par_db IS NOT NULL")})`;

/** The revision that says whether the active part does its work on this worker. */
export const activeCheckInForce = (
  worker: string,
  model: string,
  size: string,
  date: string,
): string => `(${testsOf(worker, model, size, date, "v.active_passed IS NOT NULL")})`;

/** Test data of two models worn together. */
export const combinationInForce = (inner: string, outer: string, date: string): string =>
  `(SELECT c.id FROM protector_combinations c WHERE c.inner_model_id = ${inner} AND c.outer_model_id = ${outer} AND c.effective_from <= ${date}
    ORDER BY c.effective_from DESC, c.number DESC LIMIT 1)`;

/** Looks older than this say little of today. Common practice, no source. */
const LOOKS_COUNT_FOR = "1 year";

/** How often a worker was seen wearing it in a task and how often seen at all, as a JSON pair; null: never looked. */
export const wearingSeen = (worker: string, task: string, date: string): string =>
  `(SELECT json_build_array(sum(l.worn_count), sum(l.seen_count)) FROM wearing_looks l JOIN wearing_rounds o ON o.id = l.round_id
    WHERE l.worker_id = ${worker} AND l.task_id = ${task} AND l.seen_on <= ${date} AND l.seen_on > ${date} - interval '${LOOKS_COUNT_FOR}'
      AND o.struck_reason IS NULL HAVING count(*) > 0)`;
