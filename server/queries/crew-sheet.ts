import type { z } from "zod";
import { evaluateDay } from "../../shared/acoustics/day";
import { buildDayInput, type DayContext } from "../../shared/day/build-day-input";
import { summarizeDay } from "../../shared/day/summarize-day";
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
import { assignmentsOn, crewMembers, gridTasks, lastWearing, modelsOn } from "./day-grid";
import { RULES_UNTIL } from "./finding-view";
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
  const expected = await expectedDays(crew, expectedDate, members, settings);
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
    worker: { id: member.id, name: member.name, employeeNumber: member.employeeNumber },
    isAbsent: member.isAbsent,
    isLoan: member.isLoan,
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
  };
}

/** By the clock of the site; one that runs past midnight is over on the next date only. */
function isShiftOver({ usualStart, usualLengthMin }: Crew, timeZone: string): boolean {
  const [hour, minute] = usualStart.split(":").map(Number);
  const now = formatTime(new Date().toISOString(), timeZone).split(":").map(Number);
  return (now[0] ?? 0) * 60 + (now[1] ?? 0) >= (hour ?? 0) * 60 + (minute ?? 0) + usualLengthMin;
}

async function expectedDays(
  crew: Crew,
  date: string,
  members: Awaited<ReturnType<typeof crewMembers>>,
  settings: Awaited<ReturnType<typeof settingsInForce>>,
) {
  const { governing } = settings;
  const ids = `{${members.map(({ id }) => id).join(",")}}`;
  const assignments = await assignmentsOn(ids, date);
  const worn = await lastWearing(ids, date);
  const models = await modelsOn(
    [
      ...new Set(
        assignments.flatMap(({ innerModelId, outerModelId }) =>
          outerModelId ? [innerModelId, outerModelId] : [innerModelId],
        ),
      ),
    ],
    date,
  );
  const context: DayContext = {
    tasks: new Map((await gridTasks(crew.siteId, date)).map((task) => [task.id, task])),
    models: new Map(models.map((model) => [model.modelId, model])),
    site: {
      wearFromDb: settings.wearFromDb,
      creditsActivePart: settings.creditsActivePart,
      usesUncertainty: settings.usesUncertainty,
    },
  };
  return new Map(
    members.flatMap((member): [string, NonNullable<CrewSheetRow["figures"]>][] => {
      if (member.isAbsent || member.nominal.length === 0) return [];
      const tasks = member.nominal.map(({ taskId, durationMin }) => ({
        taskId,
        durationMin,
        wornPct: worn.get(member.id)?.[taskId] ?? null,
        wornIsShiftWide: false,
      }));
      const nominalMin = tasks.reduce((sum, { durationMin }) => sum + durationMin, 0);
      const shift = {
        id: "expected",
        lengthMin: Math.max(crew.usualLengthMin, nominalMin),
        tasks,
        unaccounted: { how: "like-the-rest" } as const,
        readings: [],
      };
      const input = buildDayInput(
        member,
        date,
        [shift],
        assignments.filter(({ workerId }) => workerId === member.id),
        context,
      );
      const {
        decidingTaskId: _,
        dosePct: __,
        doseBound: ___,
        ...figures
      } = summarizeDay(input, evaluateDay(input, governing, []), governing);
      // Nothing is stored of a day to come: the id is the worker's own, so that a list has a key.
      return [[member.id, { ...figures, resultId: member.id, origin: "computed" }]];
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
