import type { z } from "zod";
import type { TimetableView } from "../../shared/schemas/timetable";
import { rows } from "../lib/db";
import { only } from "../lib/only";
import { type Actor, abilities, visible } from "../lib/policy";
import { planPolicy } from "../policies";

interface Found extends Omit<TimetableView, "scope" | "can"> {
  siteId: string;
  siteName: string;
  scopeKind: TimetableView["scope"]["scopeKind"];
  scopeId: string;
  scopeName: string | null;
}

/** A timetable that was asked for: how far the search is, then what came of it. */
export async function timetableView(
  actor: Actor,
  id: string,
): Promise<z.input<typeof TimetableView>> {
  const { siteId, siteName, scopeKind, scopeId, scopeName, ...view } = only(
    await rows<Found>(
      `SELECT t.id, t.site_id AS "siteId", s.name AS "siteName", t.scope_kind AS "scopeKind", t.scope_id AS "scopeId",
         CASE t.scope_kind WHEN 'job' THEN (SELECT name FROM jobs WHERE id = t.scope_id) ELSE (SELECT name FROM crews WHERE id = t.scope_id) END AS "scopeName",
         t.state, t.progress_pct AS "progressPct", t.base_date::text AS "baseDate", t.governing_rule_set AS "ruleSetKey",
         t.governing_version AS "ruleSetVersion", t.method_version AS "methodVersion", t.request, t.basis, t.answer,
         t.plan_id AS "planId", t.revision
       FROM timetables t JOIN sites s ON s.id = t.site_id WHERE t.id = :id AND ${visible(planPolicy, actor, "t")}`,
      { id },
    ),
  );
  return {
    ...view,
    scope: { scopeKind, scopeId, name: scopeName ?? "", siteId, siteName },
    can: { keep: abilities(planPolicy, actor, { siteId }).keep },
  };
}
