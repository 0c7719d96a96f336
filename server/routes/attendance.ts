import { z } from "zod";
import { AbsenceInput, AttendanceView, LoanInput } from "../../shared/schemas/attendance";
import { IdParams } from "../../shared/schemas/common";
import { DatedEnd } from "../../shared/schemas/crew";
import { endAbsence, strikeAbsence } from "../commands/change-absence";
import { endLoan, takeBackLoan } from "../commands/change-loan";
import { lendWorker } from "../commands/lend-worker";
import { markAbsent } from "../commands/mark-absent";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { type Actor, findVisible } from "../lib/policy";
import { Crew, Worker } from "../models/worker";
import { chargePolicy, may, workerPolicy } from "../policies";
import { attendance } from "../queries/attendance";

const SpanParams = IdParams.extend({ spanId: z.uuid() });

const crewInCharge = (actor: Actor, id: string) => findVisible(Crew, chargePolicy, id, actor);

/** The crew that somebody is lent to; its name is all that whoever lends sees of it. */
async function crewOfSite(siteId: string, id: string): Promise<Crew> {
  const found = await Crew.findOne({ where: { id, siteId } });
  if (!found) throw notFound();
  return found;
}

export function defineAttendanceRoutes(): void {
  endpoint.get(
    "/crews/:id/attendance",
    {
      summary: "Who of a crew is not in, and who is lent to whom",
      may: may.planPeople,
      params: IdParams,
      reply: AttendanceView,
    },
    async ({ actor, params }) => attendance(await crewInCharge(actor, params.id)),
  );

  endpoint.post(
    "/crews/:id/absences",
    {
      summary: "Say that somebody of a crew is not in, from a day to a day; no reason is asked",
      may: may.planPeople,
      params: IdParams,
      body: AbsenceInput,
      reply: AttendanceView,
    },
    async ({ actor, params, body }) => {
      const crew = await crewInCharge(actor, params.id);
      const worker = await findVisible(Worker, workerPolicy, body.workerId, actor);
      await markAbsent(actor, crew, worker, body);
      return attendance(crew);
    },
  );

  endpoint.post(
    "/crews/:id/loans",
    {
      summary: "Lend a member of a crew to another crew of the site, from a day to a day",
      may: may.planPeople,
      params: IdParams,
      body: LoanInput,
      reply: AttendanceView,
    },
    async ({ actor, params, body }) => {
      const crew = await crewInCharge(actor, params.id);
      const worker = await findVisible(Worker, workerPolicy, body.workerId, actor);
      await lendWorker(actor, crew, worker, await crewOfSite(crew.siteId, body.crewId), body);
      return attendance(crew);
    },
  );

  for (const [part, end, takeBack, what] of [
    ["absences", endAbsence, strikeAbsence, "an absence"],
    ["loans", endLoan, takeBackLoan, "a loan"],
  ] as const) {
    endpoint.patch(
      `/crews/:id/${part}/:spanId`,
      {
        summary: `The last day of ${what}`,
        may: may.planPeople,
        params: SpanParams,
        body: DatedEnd,
        reply: AttendanceView,
        needsRevision: true,
      },
      async ({ actor, params, body, ifMatch }) => {
        const crew = await crewInCharge(actor, params.id);
        await end(actor, crew, params.spanId, body.toDate, ifMatch, () => attendance(crew));
        return attendance(crew);
      },
    );

    endpoint.post(
      `/crews/:id/${part}/:spanId/strike`,
      {
        summary: `Take back ${what} entered by mistake`,
        may: may.planPeople,
        params: SpanParams,
        reply: AttendanceView,
        status: 200,
        needsRevision: true,
      },
      async ({ actor, params, ifMatch }) => {
        const crew = await crewInCharge(actor, params.id);
        await takeBack(actor, crew, params.spanId, ifMatch, () => attendance(crew));
        return attendance(crew);
      },
    );
  }
}
