import { keepUntil, RETENTION, type RetentionKind } from "../../shared/rule-sets/retention";
import type {
  ErasureView,
  FormerWorker,
  HoldView,
  KeptBecause,
  RetentionFilter,
  TermView,
} from "../../shared/schemas/retention";
import { decodeCursor, encodeCursor } from "../lib/cursor";
import { row, rows } from "../lib/db";
import { inForce } from "../lib/grants";
import { type Actor, abilities, visible } from "../lib/policy";
import { erasurePolicy, holdPolicy, retentionPolicy } from "../policies";

/** Holds, orders and the people of one that are listed at most. */
const LIST_LIMIT = 200;
const PEOPLE_LIMIT = 500;

type Former = Omit<
  FormerWorker,
  "keepUntil" | "ruleSetKey" | "citation" | "sourceStatus" | "keptBecause"
> & {
  ruleSetKeys: string[];
  last: Record<RetentionKind, string | null>;
  ownYears: number | null;
  isHeld: boolean;
  hasOpenFinding: boolean;
  hasOtherRole: boolean;
};

/** SQL: rule sets that applied where a worker worked, governing and beside; of the alias `w`. */
const RULE_SETS_OF = `ARRAY(SELECT DISTINCT k.key FROM site_settings x, unnest(x.governing_rule_set || x.comparison_rule_sets) k(key)
  WHERE x.site_id = w.site_id OR x.site_id IN (SELECT d.site_id FROM days d WHERE d.worker_id = w.id) ORDER BY 1)`;

async function formerWorkers(
  condition: string,
  values: Record<string, unknown>,
): Promise<FormerWorker[]> {
  const found = await rows<Former>(
    `SELECT w.id, w.name, w.employee_number AS "employeeNumber", w.site_id AS "siteId", s.name AS "siteName", w.left_on::text AS "leftOn",
       ${RULE_SETS_OF} AS "ruleSetKeys",
       jsonb_build_object(
         'measurements', greatest((SELECT max(d.date) FROM days d WHERE d.worker_id = w.id), (SELECT max(r.date) FROM runs r WHERE r.worker_id = w.id)),
         'assessments', (SELECT max(d.date) FROM days d WHERE d.worker_id = w.id),
         'training', (SELECT max(t.held_on) FROM training_attendances a JOIN training_sessions t ON t.id = a.session_id WHERE a.worker_id = w.id)) AS last,
       (SELECT t.years_after_leaving FROM retention_terms t WHERE t.organization_id = w.organization_id ORDER BY t.number DESC LIMIT 1) AS "ownYears",
       EXISTS (SELECT 1 FROM legal_holds h WHERE h.lifted_at IS NULL AND (h.worker_id = w.id OR (h.worker_id IS NULL AND h.site_id = w.site_id))) AS "isHeld",
       EXISTS (SELECT 1 FROM findings f WHERE f.worker_id = w.id AND f.state <> 'closed') AS "hasOpenFinding",
       EXISTS (SELECT 1 FROM users u JOIN role_grants g ON g.user_id = u.id WHERE u.worker_id = w.id AND u.revoked_at IS NULL AND g.role <> 'worker' AND ${inForce("g")}) AS "hasOtherRole",
       EXISTS (SELECT 1 FROM erasure_people p WHERE p.worker_id = w.id AND p.state = 'waiting') AS "isProposed",
       jsonb_build_object(
         'letters', (SELECT count(*) FROM result_letters l WHERE l.worker_id = w.id),
         'notes', (SELECT count(*) FROM shifts x JOIN shift_revisions r ON r.shift_id = x.id WHERE x.worker_id = w.id AND r.note <> '')
           + (SELECT count(*) FROM findings f JOIN finding_steps t ON t.finding_id = f.id WHERE f.worker_id = w.id AND t.text <> '')
           + (SELECT count(*) FROM fit_tests x JOIN fit_test_revisions r ON r.fit_test_id = x.id WHERE x.worker_id = w.id AND r.note <> ''),
         'files', (SELECT count(*) FROM findings f JOIN finding_files p ON p.finding_id = f.id WHERE f.worker_id = w.id)
           + (SELECT count(*) FROM runs r JOIN run_files p ON p.run_id = r.id WHERE r.worker_id = w.id)) AS records
     FROM workers w JOIN sites s ON s.id = w.site_id
     WHERE w.left_on < current_date AND NOT EXISTS (SELECT 1 FROM erasure_people p WHERE p.worker_id = w.id AND p.state = 'erased') AND ${condition}
     ORDER BY w.left_on, w.id`,
    values,
  );
  return found.map(
    ({ ruleSetKeys, last, ownYears, isHeld, hasOpenFinding, hasOtherRole, ...worker }) => {
      const term = keepUntil({ leftOn: worker.leftOn, ruleSetKeys, last, ownYears });
      const because = (): KeptBecause | null => {
        if (isHeld) return "held";
        if (!term) return "no-term";
        // The day itself still belongs to the term.
        if (term.keepUntil >= new Date().toISOString().slice(0, 10)) return "not-due";
        if (hasOpenFinding) return "open-finding";
        return hasOtherRole ? "other-role" : null;
      };
      return {
        ...worker,
        keepUntil: term?.keepUntil ?? null,
        ruleSetKey: term?.ruleSetKey ?? null,
        citation: term?.period?.citation ?? null,
        sourceStatus: term?.period?.sourceStatus ?? null,
        keptBecause: because(),
      };
    },
  );
}

/** Whether one person may be erased as things stand. Null: employed, erased already, or not there. */
export async function formerWorker(id: string): Promise<FormerWorker | null> {
  return (await formerWorkers("w.id = :id", { id }))[0] ?? null;
}

/** People who left, of sites that the actor looks after; with a list of ids only those. */
export function visibleFormerWorkers(
  actor: Actor,
  { siteId, ids }: { siteId?: string | undefined; ids?: readonly string[] },
): Promise<FormerWorker[]> {
  return formerWorkers(
    `${visible(retentionPolicy, actor, "w")} ${siteId === undefined ? "" : "AND w.site_id = :siteId"} ${ids ? "AND w.id = ANY (CAST(:ids AS uuid[]))" : ""}`,
    { siteId, ids: `{${(ids ?? []).join(",")}}` },
  );
}

/** Due first by how long ago it fell due; kept ones by when they fall due, those of whom nobody can say first. */
export async function pageOfFormerWorkers(
  actor: Actor,
  { siteId, show, cursor, limit }: RetentionFilter,
): Promise<{ rows: FormerWorker[]; next: string | null }> {
  const keyOf = ({ keepUntil: until, id }: FormerWorker) => `${until ?? ""} ${id}`;
  const all = (await visibleFormerWorkers(actor, { siteId }))
    .filter(({ keptBecause }) => (keptBecause === null) === (show === "due"))
    .sort((a, b) => (keyOf(a) < keyOf(b) ? -1 : 1));
  const after = String(decodeCursor(cursor, 1)?.[0] ?? "");
  const rest = all.filter((one) => keyOf(one) > after);
  const page = rest.slice(0, limit);
  const last = page.at(-1);
  return {
    rows: page,
    next: last && rest.length > page.length ? encodeCursor([keyOf(last)]) : null,
  };
}

/** The organization's own term, what rules say at the actor's sites, and how many people it is about. */
export async function termView(actor: Actor): Promise<TermView> {
  const { organizationId } = actor;
  const own = await row<{ yearsAfterLeaving: number | null; revision: number }>(
    `SELECT years_after_leaving AS "yearsAfterLeaving", number AS revision FROM retention_terms WHERE organization_id = :organizationId ORDER BY number DESC LIMIT 1`,
    { organizationId },
  );
  const keys = await rows<{ key: string }>(
    `SELECT DISTINCT k.key FROM site_settings x, unnest(x.governing_rule_set || x.comparison_rule_sets) k(key)
     WHERE ${visible(retentionPolicy, actor, "x")} ORDER BY 1`,
  );
  const people = await visibleFormerWorkers(actor, {});
  const due = people.filter(({ keptBecause }) => keptBecause === null);
  return {
    yearsAfterLeaving: own?.yearsAfterLeaving ?? null,
    revision: own?.revision ?? 0,
    ruleSetKeys: keys.map(({ key }) => key),
    periods: keys.flatMap(({ key }) =>
      (RETENTION[key] ?? []).map((period) => ({ ruleSetKey: key, ...period })),
    ),
    counts: {
      due: due.length,
      proposed: due.filter(({ isProposed }) => isProposed).length,
      kept: people.length - due.length,
    },
    can: { change: retentionPolicy.can.setTerm(actor, { siteId: "" }) },
  };
}

type HoldRow = Omit<HoldView, "worker" | "lifted" | "can" | "placedAt"> & {
  placedAt: Date;
  workerId: string | null;
  workerName: string | null;
  liftedBy: string | null;
  liftedAt: Date | null;
  liftedReason: string | null;
};

/** Holds that stand, then those that were lifted, the latest first. */
export async function listHolds(actor: Actor, id: string | null = null): Promise<HoldView[]> {
  const found = await rows<HoldRow>(
    `SELECT h.id, h.site_id AS "siteId", s.name AS "siteName", w.id AS "workerId", w.name AS "workerName", h.reason, p.name AS "placedBy", h.placed_at AS "placedAt",
       l.name AS "liftedBy", h.lifted_at AS "liftedAt", h.lifted_reason AS "liftedReason", h.revision
     FROM legal_holds h JOIN sites s ON s.id = h.site_id LEFT JOIN workers w ON w.id = h.worker_id
     JOIN users p ON p.id = h.placed_by LEFT JOIN users l ON l.id = h.lifted_by
     WHERE ${visible(holdPolicy, actor, "h")} AND (CAST(:id AS uuid) IS NULL OR h.id = :id)
     ORDER BY h.lifted_at IS NOT NULL, h.placed_at DESC, h.id LIMIT ${LIST_LIMIT}`,
    { id },
  );
  return found.map(
    ({ workerId, workerName, liftedBy, liftedAt, liftedReason, placedAt, ...hold }) => ({
      ...hold,
      placedAt: placedAt.toISOString(),
      worker: workerId !== null && workerName !== null ? { id: workerId, name: workerName } : null,
      lifted:
        liftedBy !== null && liftedAt !== null
          ? { by: liftedBy, at: liftedAt.toISOString(), reason: liftedReason ?? "" }
          : null,
      can: abilities(holdPolicy, actor, hold),
    }),
  );
}

type ErasureRow = Omit<ErasureView, "proposedAt" | "approvedAt" | "doneAt" | "can"> & {
  proposedAt: Date;
  approvedAt: Date | null;
  doneAt: Date | null;
  proposedById: string;
};

/** What was proposed to be erased, the latest first, with how far it is. */
export async function listErasures(actor: Actor, id: string | null = null): Promise<ErasureView[]> {
  const found = await rows<ErasureRow>(
    `SELECT e.id, e.site_id AS "siteId", s.name AS "siteName", e.state, e.proposed_by AS "proposedById", p.name AS "proposedBy", e.proposed_at AS "proposedAt",
       a.name AS "approvedBy", e.approved_at AS "approvedAt", w.name AS "withdrawnBy", e.done_at AS "doneAt", e.revision,
       (SELECT count(*)::int FROM erasure_people x WHERE x.erasure_id = e.id AND x.state = 'waiting') AS waiting,
       (SELECT count(*)::int FROM erasure_people x WHERE x.erasure_id = e.id AND x.state = 'erased') AS erased,
       (SELECT coalesce(jsonb_agg(jsonb_build_object('because', k.because, 'count', k.count) ORDER BY k.because), '[]') FROM (
          SELECT x.kept_because AS because, count(*) AS count FROM erasure_people x WHERE x.erasure_id = e.id AND x.state = 'kept' GROUP BY 1) k) AS kept,
       (SELECT coalesce(jsonb_agg(jsonb_build_object('id', n.id, 'name', n.name, 'keepUntil', n.keep_until) ORDER BY n.name, n.id), '[]') FROM (
          SELECT o.id, o.name, x.keep_until::text FROM erasure_people x JOIN workers o ON o.id = x.worker_id WHERE x.erasure_id = e.id ORDER BY o.name, o.id LIMIT ${PEOPLE_LIMIT}) n) AS people
     FROM erasures e JOIN sites s ON s.id = e.site_id JOIN users p ON p.id = e.proposed_by
     LEFT JOIN users a ON a.id = e.approved_by LEFT JOIN users w ON w.id = e.withdrawn_by
     WHERE ${visible(erasurePolicy, actor, "e")} AND (CAST(:id AS uuid) IS NULL OR e.id = :id) ORDER BY e.proposed_at DESC, e.id LIMIT ${id === null ? 50 : 1}`,
    { id },
  );
  return found.map(({ proposedById, proposedAt, approvedAt, doneAt, ...erasure }) => ({
    ...erasure,
    proposedAt: proposedAt.toISOString(),
    approvedAt: approvedAt?.toISOString() ?? null,
    doneAt: doneAt?.toISOString() ?? null,
    can: abilities(erasurePolicy, actor, {
      siteId: erasure.siteId,
      state: erasure.state,
      proposedBy: proposedById,
    }),
  }));
}
