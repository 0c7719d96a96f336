import { IdParams } from "../../shared/schemas/common";
import { PlanView } from "../../shared/schemas/plan";
import {
  TimetableInput,
  TimetableKeep,
  TimetableQuery,
  TimetableSubject,
  TimetableView,
} from "../../shared/schemas/timetable";
import { keepTimetable } from "../commands/keep-timetable";
import { cancelTimetable, startTimetable } from "../commands/start-timetable";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Timetable } from "../models/plan";
import { may, planPolicy } from "../policies";
import { planView } from "../queries/plans";
import { timetableMaterial, timetableSubject } from "../queries/timetable-subject";
import { timetableView } from "../queries/timetables";

export function defineTimetableRoutes(): void {
  endpoint.get(
    "/timetables/subject",
    {
      summary:
        "The people of a crew or a group, and what an hour of each task takes of their limit",
      may: may.officer,
      query: TimetableQuery,
      reply: TimetableSubject,
    },
    ({ actor, query }) => timetableSubject(actor, query),
  );

  endpoint.post(
    "/timetables",
    {
      summary: "Search for a timetable: who does what when, nobody over, the fairest dose",
      may: may.officer,
      body: TimetableInput,
      reply: TimetableView,
    },
    async ({ actor, body }) => {
      const { scopeKind, scopeId } = body;
      const material = await timetableMaterial(actor, { scopeKind, scopeId });
      authorize(planPolicy, actor, "keep", material.scope);
      return timetableView(actor, await startTimetable(actor, material, body));
    },
  );

  endpoint.get(
    "/timetables/:id",
    {
      summary: "How far the search for a timetable is, then what came of it",
      may: may.readFitting,
      params: IdParams,
      reply: TimetableView,
    },
    async ({ actor, params }) => {
      const { id } = await findVisible(Timetable, planPolicy, params.id, actor);
      return timetableView(actor, id);
    },
  );

  endpoint.post(
    "/timetables/:id/cancel",
    {
      summary: "Give the search for a timetable up",
      may: may.officer,
      params: IdParams,
      reply: TimetableView,
      status: 200,
    },
    async ({ actor, params }) => {
      const found = await findVisible(Timetable, planPolicy, params.id, actor, { lock: true });
      authorize(planPolicy, actor, "keep", found);
      await cancelTimetable(actor, found);
      return timetableView(actor, found.id);
    },
  );

  endpoint.post(
    "/timetables/:id/keep",
    {
      summary: "Keep a timetable that was found as a plan",
      may: may.officer,
      params: IdParams,
      body: TimetableKeep,
      reply: PlanView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const found = await findVisible(Timetable, planPolicy, params.id, actor, { lock: true });
      authorize(planPolicy, actor, "keep", found);
      const view = await timetableView(actor, found.id);
      await requireRevision(found, ifMatch, async () => view);
      return planView(actor, await keepTimetable(actor, view, body.name));
    },
  );
}
