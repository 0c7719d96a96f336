import type { z } from "zod";
import type { ExpectedDay } from "../../shared/findings/expected";
import { isAsked } from "../../shared/findings/orders";
import type { CrewSheetRow, CrewSheetView } from "../../shared/schemas/crew";
import { rows } from "../lib/db";
import { type Actor, visible } from "../lib/policy";
import type { Crew } from "../models/worker";
import { crewPolicy } from "../policies";
import { comingDays } from "./coming-days";
import { sheetOrders } from "./crew-orders";
import { dayFiguresOf } from "./day-figures";
import { crewMembers } from "./day-grid";
import { evaluateExpected, summarizeExpected } from "./expected-days";
import { waitingHandOver } from "./hand-over-waiting";
import { settingsInForce } from "./site-settings";

/** A crew's expected day, computed from roster, nominal day and usual task levels, beside its last recorded one. */
export async function crewSheet(actor: Actor, crew: Crew): Promise<z.input<typeof CrewSheetView>> {
  const coming = (await comingDays([crew.id])).get(crew.id);
  if (!coming) throw new Error("the crew was found just before");
  const { timeZone, lastDate, date: expectedDate } = coming;
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
