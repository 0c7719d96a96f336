import { IdParams } from "../../shared/schemas/common";
import {
  DayGridView,
  DayQuery,
  DaySaveInput,
  DaySaveView,
  ShiftCorrection,
  ShiftView,
  ShiftVoid,
} from "../../shared/schemas/shift";
import { CrewDays, CrewDaysQuery } from "../../shared/schemas/waiting";
import { correctShift } from "../commands/correct-shift";
import { saveDay } from "../commands/save-day";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { Shift } from "../models/shift";
import { Crew } from "../models/worker";
import { crewPolicy, may, shiftPolicy } from "../policies";
import { crewProgress } from "../queries/crew-progress";
import { dayGrid } from "../queries/day-grid";
import { shiftView } from "../queries/shift-view";

export function defineDayEntryRoutes(): void {
  endpoint.get(
    "/crews/:id/days",
    {
      summary: "How far a crew's days are entered",
      may: may.officer,
      params: IdParams,
      query: CrewDaysQuery,
      reply: CrewDays,
    },
    async ({ actor, params, query }) => {
      const crew = await findVisible(Crew, crewPolicy, params.id, actor);
      return { rows: await crewProgress(crew.id, query.from, query.to) };
    },
  );

  endpoint.get(
    "/crews/:id/day",
    {
      summary: "What a crew's day is entered with",
      may: may.officer,
      params: IdParams,
      query: DayQuery,
      reply: DayGridView,
    },
    async ({ actor, params, query }) => {
      const crew = await findVisible(Crew, crewPolicy, params.id, actor);
      authorize(crewPolicy, actor, "enterDay", crew);
      return dayGrid(crew, query.date);
    },
  );

  endpoint.post(
    "/crews/:id/day",
    {
      summary: "Save the rows of a crew's day that stand",
      may: may.officer,
      params: IdParams,
      body: DaySaveInput,
      reply: DaySaveView,
    },
    async ({ actor, params, body }) => {
      const crew = await findVisible(Crew, crewPolicy, params.id, actor);
      authorize(crewPolicy, actor, "enterDay", crew);
      return saveDay(actor, crew, body.date, body.rows);
    },
  );

  endpoint.get(
    "/shifts/:id",
    {
      summary: "A shift with its revisions",
      may: may.readDays,
      params: IdParams,
      reply: ShiftView,
      reads: { kind: "shift", worker: (_, { workerId }) => workerId },
    },
    async ({ actor, params }) => {
      const shift = await findVisible(Shift, shiftPolicy, params.id, actor);
      return shiftView(actor, shift);
    },
  );

  endpoint.put(
    "/shifts/:id",
    {
      summary: "Correct a shift with a reason",
      may: may.officer,
      params: IdParams,
      body: ShiftCorrection,
      reply: ShiftView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const shift = await findVisible(Shift, shiftPolicy, params.id, actor, { lock: true });
      authorize(shiftPolicy, actor, "correct", shift);
      await correctShift(actor, shift, { ...body, isVoid: false }, ifMatch);
      return shiftView(actor, await shift.reload());
    },
  );

  endpoint.delete(
    "/shifts/:id",
    {
      summary: "Strike a shift that was never worked, with a reason",
      may: may.officer,
      params: IdParams,
      body: ShiftVoid,
      reply: ShiftView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const shift = await findVisible(Shift, shiftPolicy, params.id, actor, { lock: true });
      authorize(shiftPolicy, actor, "correct", shift);
      await correctShift(actor, shift, { isVoid: true, reason: body.reason }, ifMatch);
      return shiftView(actor, await shift.reload());
    },
  );
}
