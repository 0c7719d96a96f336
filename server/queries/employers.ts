import { usualDuties } from "../../shared/rule-sets/employer-duties";
import type { EmployerView } from "../../shared/schemas/employer";
import { rows } from "../lib/db";
import { type Actor, abilities, visible } from "../lib/policy";
import { employerPolicy } from "../policies";

/** Names beside an employer, and employers of a site, that are listed at most. */
const NAMES_LIMIT = 50;
const LIST_LIMIT = 200;

type Row = Omit<EmployerView, "agreed" | "usual" | "can"> & {
  ruleSetKey: string | null;
  agreed: NonNullable<EmployerView["agreed"]> | null;
};

/** Employers who have people at a site, or with whom something was agreed there: those without an agreement first. */
export async function listEmployers(
  actor: Actor,
  siteId: string,
  only: { kind: string; name: string } | null = null,
): Promise<EmployerView[]> {
  const found = await rows<Row>(
    `WITH present AS (
       SELECT w.employer AS kind, nullif(btrim(w.employer_name), '') AS name, w.id, w.name AS worker
       FROM workers w
       WHERE w.site_id = :siteId AND w.employer <> 'own' AND (w.left_on IS NULL OR w.left_on >= current_date) AND ${visible(employerPolicy, actor, "w")}
     ), latest AS (
       SELECT DISTINCT ON (d.kind, d.name) d.*, u.name AS author FROM employer_duties d JOIN users u ON u.id = d.agreed_by
       WHERE d.site_id = :siteId AND ${visible(employerPolicy, actor, "d")} ORDER BY d.kind, d.name, d.number DESC
     ), named AS (
       SELECT kind, name FROM present UNION SELECT kind, name FROM latest
     )
     SELECT n.kind, n.name, coalesce(l.number, 0) AS revision,
       (SELECT count(*)::int FROM present p WHERE p.kind = n.kind AND p.name IS NOT DISTINCT FROM n.name) AS "workerCount",
       (SELECT coalesce(jsonb_agg(jsonb_build_object('id', f.id, 'name', f.worker) ORDER BY f.worker, f.id), '[]') FROM (
          SELECT p.id, p.worker FROM present p WHERE p.kind = n.kind AND p.name IS NOT DISTINCT FROM n.name ORDER BY p.worker, p.id LIMIT ${NAMES_LIMIT}) f) AS workers,
       CASE WHEN l.id IS NOT NULL THEN jsonb_build_object('measure', l.measure, 'protect', l.protect, 'train', l.train, 'keep', l.keep, 'tell', l.tell,
         'basis', l.basis, 'by', l.author, 'at', to_char(l.agreed_at AT TIME ZONE 'UTC', 'YYYY-MM-DD"T"HH24:MI:SS.MS"Z"')) END AS agreed,
       (SELECT x.governing_rule_set FROM site_settings x WHERE x.site_id = :siteId AND x.effective_from <= current_date ORDER BY x.effective_from DESC, x.number DESC LIMIT 1) AS "ruleSetKey"
     FROM named n LEFT JOIN latest l ON l.kind = n.kind AND l.name = n.name
     WHERE CAST(:kind AS text) IS NULL OR (n.kind = :kind AND n.name = :name)
     ORDER BY l.id IS NOT NULL, n.name NULLS FIRST, n.kind LIMIT ${LIST_LIMIT}`,
    { siteId, kind: only?.kind ?? null, name: only?.name ?? null },
  );
  return found.map(({ ruleSetKey, ...employer }) => ({
    ...employer,
    usual: ruleSetKey === null ? null : usualDuties(ruleSetKey, employer.kind),
    can: abilities(employerPolicy, actor, { siteId }),
  }));
}
