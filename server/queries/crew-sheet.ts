import type { z } from "zod";
import { foldOrders, ORDER_KINDS } from "../../shared/findings/orders";
import { formatTime } from "../../shared/format/date";
import type { CrewSheetRow, CrewSheetView } from "../../shared/schemas/crew";
import type { FindingKind, FindingState } from "../../shared/schemas/finding";
import { todayAt } from "../lib/calendar";
import { row, rows } from "../lib/db";
import { groupBy } from "../lib/group-by";
import { type Actor, visible } from "../lib/policy";
import type { Crew } from "../models/worker";
import { crewPolicy, findingPolicy } from "../policies";
import { dayFiguresOf } from "./day-figures";
import { crewMembers } from "./day-grid";
import { expectedDays } from "./expected-days";
import { RULES_UNTIL } from "./finding-view";
import { waitingHandOver } from "./hand-over-waiting";
import { nextShiftDate } from "./next-shift";
import { settingsInForce } from "./site-settings";

interface OrderRow {
  workerId: string;
  findingId: string;
  kind: FindingKind;
  state: FindingState;
  facts: Record<string, unknown>;
  lastDate: string;
  rulesUntil: string | null;
  revision: number;
  siteId: string;
}

/** A crew's expected day, computed from roster, nominal day and usual task levels, beside its last recorded one. */
export async function crewSheet(actor: Actor, crew: Crew): Promise<z.input<typeof CrewSheetView>> {
  const site = await row<{ timeZone: string }>(
    `SELECT time_zone AS "timeZone" FROM sites WHERE id = :id`,
    { id: crew.siteId },
  );
  const timeZone = site?.timeZone ?? "UTC";
  const today = todayAt(timeZone);
  const last = await row<{ date: string }>(
    "SELECT max(date)::text AS date FROM days WHERE crew_id = :crewId AND date <= CAST(:today AS date) AND current_result_id IS NOT NULL",
    { crewId: crew.id, today },
  );
  const lastDate = last?.date ?? null;
  // A shift that is over and recorded is expected no more.
  const expectedDate =
    lastDate === today && isShiftOver(crew, timeZone) ? await nextShiftDate(crew.id, today) : today;
  const settings = await settingsInForce(crew.siteId, expectedDate);
  const members = await crewMembers(crew.id, expectedDate);
  const orders = await openOrders(
    actor,
    members.map(({ id }) => id),
  );
  const expected = await expectedOf(crew, expectedDate, members, settings);
  const before = lastDate ? await crewMembers(crew.id, lastDate) : [];
  const recorded = lastDate
    ? await dayFiguresOf(
        before.map(({ id }) => id),
        lastDate,
      )
    : new Map();
  const toRow = (
    member: (typeof members)[number],
    figures: CrewSheetRow["figures"],
  ): CrewSheetRow => ({
    worker: {
      id: member.id,
      name: member.name,
      employeeNumber: member.employeeNumber,
      employer: member.employer,
      employerName: member.employerName,
    },
    isAbsent: member.isAbsent,
    isLoan: member.isLoan,
    lentBy: member.lentBy,
    lentTo: member.lentTo,
    figures,
    order: orders.get(member.id) ?? null,
  });
  const byUrgency = (a: CrewSheetRow, b: CrewSheetRow) =>
    Number(b.order !== null) - Number(a.order !== null) ||
    (b.figures?.atEarDb ?? -1) - (a.figures?.atEarDb ?? -1) ||
    a.worker.name.localeCompare(b.worker.name);
  return {
    crew: {
      id: crew.id,
      name: crew.name,
      siteId: crew.siteId,
      usualStart: crew.usualStart.slice(0, 5),
      usualLengthMin: crew.usualLengthMin,
      timeZone,
    },
    crews: await rows<{ id: string; name: string }>(
      `SELECT c.id, c.name FROM crews c WHERE NOT c.is_archived AND ${visible(crewPolicy, actor, "c")} ORDER BY c.name`,
    ),
    governingRuleSet: settings.governingRuleSet,
    ruleSetVersion: settings.ruleSetVersion,
    expected: {
      date: expectedDate,
      rows: members.map((member) => toRow(member, expected.get(member.id) ?? null)).sort(byUrgency),
    },
    last: {
      date: lastDate,
      rows: before.map((member) => toRow(member, recorded.get(member.id) ?? null)).sort(byUrgency),
    },
    handOver: await waitingHandOver(actor, crew.id),
  };
}

/** By the clock of the site; one that runs past midnight is over on the next date only. */
function isShiftOver({ usualStart, usualLengthMin }: Crew, timeZone: string): boolean {
  const [hour, minute] = usualStart.split(":").map(Number);
  const now = formatTime(new Date().toISOString(), timeZone).split(":").map(Number);
  return (now[0] ?? 0) * 60 + (now[1] ?? 0) >= (hour ?? 0) * 60 + (minute ?? 0) + usualLengthMin;
}

/** The figures of those who are there. */
async function expectedOf(
  { siteId, usualLengthMin }: Crew,
  date: string,
  members: Awaited<ReturnType<typeof crewMembers>>,
  settings: Awaited<ReturnType<typeof settingsInForce>>,
) {
  const there = members
    .filter(({ isAbsent, lentTo }) => !isAbsent && lentTo === null)
    .map((member) => ({ ...member, usualLengthMin }));
  const days = await expectedDays(siteId, date, there, settings);
  return new Map(
    [...days].map(([workerId, summary]): [string, NonNullable<CrewSheetRow["figures"]>] => {
      const { decidingTaskId: _, dosePct: __, doseBound: ___, ...figures } = summary;
      // Nothing is stored of a day to come: the id is the worker's own, so that a list has a key.
      return [workerId, { ...figures, resultId: workerId, origin: "computed" }];
    }),
  );
}

/**
 * One order for each worker, from what the rules that govern now ask for. What rests on earlier rules stays on the sheet,
 * named as such, only until a day has been judged by the new ones: from then on that day decides, and the finding is the
 * officer's to close.
 */
async function openOrders(
  actor: Actor,
  workerIds: readonly string[],
): Promise<Map<string, NonNullable<CrewSheetRow["order"]>>> {
  if (workerIds.length === 0) return new Map();
  const found = await rows<OrderRow>(
    `SELECT * FROM (SELECT f.worker_id AS "workerId", f.id AS "findingId", f.kind, f.state, f.facts, f.last_date::text AS "lastDate",
       ${RULES_UNTIL} AS "rulesUntil", f.revision, f.site_id AS "siteId" FROM findings f
     WHERE f.worker_id = ANY (CAST(:ids AS uuid[])) AND f.state <> 'closed' AND ${visible(findingPolicy, actor, "f")}) open
     WHERE "rulesUntil" IS NULL OR NOT EXISTS (SELECT 1 FROM days d WHERE d.worker_id = open."workerId"
       AND d.date >= CAST(open."rulesUntil" AS date) AND d.current_result_id IS NOT NULL)`,
    { ids: `{${workerIds.join(",")}}` },
  );
  const ofSheet = found.filter(({ kind }) => ORDER_KINDS.includes(kind));
  return new Map(
    [...groupBy(ofSheet, ({ workerId }) => workerId)].map(([workerId, findings]) => {
      const { siteId, ...lead } = foldOrders(findings)[0]!.lead;
      const { findingId, kind, state, facts, rulesUntil, revision } = lead;
      const canMarkDone = findingPolicy.can.markDone(actor, { siteId }) && state !== "done";
      return [workerId, { findingId, kind, state, facts, rulesUntil, revision, canMarkDone }];
    }),
  );
}
