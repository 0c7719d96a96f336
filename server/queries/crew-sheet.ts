import type { z } from "zod";
import type { ExpectedDay } from "../../shared/findings/expected";
import { isAsked } from "../../shared/findings/orders";
import { formatTime } from "../../shared/format/date";
import type { CrewSheetRow, CrewSheetView } from "../../shared/schemas/crew";
import { todayAt } from "../lib/calendar";
import { row, rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import type { Crew } from "../models/worker";
import { crewPolicy } from "../policies";
import { sheetOrders } from "./crew-orders";
import { dayFiguresOf } from "./day-figures";
import { crewMembers } from "./day-grid";
import { evaluateExpected, summarizeExpected } from "./expected-days";
import { waitingHandOver } from "./hand-over-waiting";
import { nextShiftDate } from "./next-shift";
import { settingsInForce } from "./site-settings";

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
  const expected = await expectedOf(crew, expectedDate, members, settings);
  const orders = await sheetOrders(
    actor,
    members.map(({ id }) => id),
    expectedDate,
    expected,
  );
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
    ahead: CrewSheetRow["ahead"] = null,
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
    order: orders.get(member.id)?.order ?? null,
    ahead,
  });
  const byUrgency = (a: CrewSheetRow, b: CrewSheetRow) =>
    Number(isAsked(b)) - Number(isAsked(a)) ||
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
      rows: members
        .map((member) => {
          const day = expected.get(member.id);
          const ahead = orders.get(member.id)?.ahead ?? null;
          return toRow(member, day ? figuresOf(member.id, day) : null, ahead);
        })
        .sort(byUrgency),
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

/** The days of those who are there. */
function expectedOf(
  { siteId, usualLengthMin }: Crew,
  date: string,
  members: Awaited<ReturnType<typeof crewMembers>>,
  settings: Awaited<ReturnType<typeof settingsInForce>>,
): Promise<Map<string, ExpectedDay>> {
  const there = members
    .filter(({ isAbsent, lentTo }) => !isAbsent && lentTo === null)
    .map((member) => ({ ...member, usualLengthMin }));
  return evaluateExpected(siteId, date, there, settings);
}

function figuresOf(workerId: string, day: ExpectedDay): NonNullable<CrewSheetRow["figures"]> {
  const { decidingTaskId: _, dosePct: __, doseBound: ___, ...figures } = summarizeExpected(day);
  // Nothing is stored of a day to come: the id is the worker's own, so that a list has a key.
  return { ...figures, resultId: workerId, origin: "computed" };
}
