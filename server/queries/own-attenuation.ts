/**
 * SQL: what is known of a protector on its wearer, on a date. Every argument is an SQL expression.
 */

/** One ear alone was tried. `fit` is a revision's alias. */
const isOneEar = (fit: string) => `num_nulls(${fit}.left_db, ${fit}.right_db) = 1`;

/** Whether the pair passed; null: not known, or one ear alone reached the need and the other may be the weaker. */
export const pairPassed = (fit: string): string =>
  `CASE WHEN ${fit}.has_passed AND ${isOneEar(fit)} THEN NULL ELSE ${fit}.has_passed END`;

/** A test that says something of the pair of ears: both were tried, or the one that was falls short of the need. */
export const ratesPair = (fit: string): string =>
  `(${fit}.par_db IS NOT NULL AND (NOT ${isOneEar(fit)} OR (${fit}.has_passed IS FALSE AND ${fit}.need_db > 0)))`;

/** Tests of a worker and a model up to a date, the latest first; another size than the assigned one says nothing of it. */
const testsOf = (worker: string, model: string, size: string, date: string, condition: string) =>
  `SELECT v.id FROM fit_tests f JOIN fit_test_revisions v ON v.id = f.current_revision_id
   WHERE f.worker_id = ${worker} AND f.model_id = ${model} AND NOT f.is_void AND f.tested_on <= ${date} AND ${condition}
     AND (${size} IS NULL OR v.size IS NULL OR v.size = ${size})
   ORDER BY f.tested_on DESC, f.created_at DESC LIMIT 1`;

/** The revision of the fit test that counts: the latest of the pair of ears, passed or not. */
export const fitInForce = (worker: string, model: string, size: string, date: string): string =>
  `(${testsOf(worker, model, size, date, ratesPair("v"))})`;

/** Two microphones were at one ear alone. `fit` is a revision's alias. */
const isOneEarChecked = (fit: string) =>
  `(${fit}.facts #>> '{bands,left}' IS NULL) <> (${fit}.facts #>> '{bands,right}' IS NULL)`;

/**
 * The revision that says whether the active part does its work on this worker: each cup cancels for itself, so one ear
 * alone can fail it but not pass it.
 */
export const activeCheckInForce = (
  worker: string,
  model: string,
  size: string,
  date: string,
): string =>
  `(${testsOf(worker, model, size, date, `(v.active_passed IS FALSE OR (v.active_passed AND NOT (${isOneEarChecked("v")})))`)})`;

/** Test data of two models worn together. */
export const combinationInForce = (inner: string, outer: string, date: string): string =>
  `(SELECT c.id FROM protector_combinations c WHERE c.inner_model_id = ${inner} AND c.outer_model_id = ${outer} AND c.effective_from <= ${date}
    ORDER BY c.effective_from DESC, c.number DESC LIMIT 1)`;

/** Looks older than this say little of today. Common practice, no source. */
const LOOKS_COUNT_FOR = "1 year";

/** Of a look of a round: an own report of the same worker, task and day came later and stands, so that this one says nothing. */
export const lookReplaced = (look: string, round: string): string =>
  `(${round}.source = 'own-report' AND EXISTS (SELECT 1 FROM wearing_looks n JOIN wearing_rounds p ON p.id = n.round_id
    WHERE n.worker_id = ${look}.worker_id AND n.task_id = ${look}.task_id AND n.seen_on = ${look}.seen_on AND p.source = 'own-report'
      AND p.struck_reason IS NULL AND (p.created_at, p.id) > (${round}.created_at, ${round}.id)))`;

/** Looks at a worker in a task that count on a date. */
const looksOf = (worker: string, task: string, date: string): string =>
  `wearing_looks l JOIN wearing_rounds o ON o.id = l.round_id
    WHERE l.worker_id = ${worker} AND l.task_id = ${task} AND l.seen_on <= ${date} AND l.seen_on > ${date} - interval '${LOOKS_COUNT_FOR}'
      AND o.struck_reason IS NULL AND NOT ${lookReplaced("l", "o")}`;

/** How often a worker was seen wearing it in a task and how often seen at all, as a JSON pair; null: never looked. */
export const wearingSeen = (worker: string, task: string, date: string): string =>
  `(SELECT json_build_array(sum(l.worn_count), sum(l.seen_count)) FROM ${looksOf(worker, task, date)} HAVING count(*) > 0)`;

/** Behind `wearingSeen`, by source: [source, latest round's id, rounds, worn, seen], as a JSON list; null: never looked. */
export const wearingSeenFrom = (worker: string, task: string, date: string): string =>
  `(SELECT json_agg(json_build_array(g.source, g.last, g.rounds, g.worn, g.seen) ORDER BY g.source DESC) FROM (
     SELECT o.source, (array_agg(o.id ORDER BY o.seen_on DESC, o.created_at DESC, o.id))[1] AS last, count(*) AS rounds, sum(l.worn_count) AS worn, sum(l.seen_count) AS seen
     FROM ${looksOf(worker, task, date)} GROUP BY o.source) g)`;
