import { z } from "zod";
import { AtSiteQuery, IdParams } from "../../shared/schemas/common";
import {
  CrewDetail,
  CrewInput,
  CrewList,
  DatedEnd,
  MembershipInput,
  SupervisorInput,
  SupervisorNameList,
  SupervisorNameQuery,
} from "../../shared/schemas/crew";
import { addCrewMember } from "../commands/add-crew-member";
import { addCrewSupervisor } from "../commands/add-crew-supervisor";
import { changeCrew } from "../commands/change-crew";
import { createCrew } from "../commands/create-crew";
import { endCrewSpan } from "../commands/end-crew-span";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { Crew, Worker } from "../models/worker";
import { crewPolicy, may, sitePolicy, workerPolicy } from "../policies";
import { presentCrew, presentCrewDetail } from "../presenters/crew";
import { listCrews, listMemberships, listSupervisorNames, listSupervisors } from "../queries/crews";

const SpanParams = IdParams.extend({ spanId: z.uuid() });

async function view(actor: Actor, id: string) {
  const crew = only(await listCrews(actor, { id }));
  return presentCrewDetail(
    actor,
    crew,
    await listMemberships(actor, crew),
    await listSupervisors(id),
  );
}

/** The crew, locked, where this actor may change it. */
async function crewToChange(actor: Actor, id: string): Promise<Crew> {
  const crew = await findVisible(Crew, crewPolicy, id, actor, { lock: true });
  authorize(crewPolicy, actor, "change", crew);
  return crew;
}

export function defineCrewRoutes(): void {
  endpoint.get(
    "/crews",
    { summary: "Crews", may: may.readCrews, query: AtSiteQuery, reply: CrewList },
    async ({ actor, query }) => ({
      rows: (await listCrews(actor, query)).map((crew) => presentCrew(actor, crew)),
    }),
  );

  endpoint.get(
    "/supervisors",
    {
      summary: "Who may be given a crew of a site",
      may: may.officer,
      query: SupervisorNameQuery,
      reply: SupervisorNameList,
    },
    async ({ actor, query }) => {
      const site = await findVisible(Site, sitePolicy, query.siteId, actor);
      authorize(crewPolicy, actor, "change", { siteId: site.id });
      return { rows: await listSupervisorNames(site.id) };
    },
  );

  endpoint.get(
    "/crews/:id",
    {
      summary: "One crew with its dated members and supervisors",
      may: may.readCrews,
      params: IdParams,
      reply: CrewDetail,
    },
    async ({ actor, params }) => view(actor, params.id),
  );

  endpoint.post(
    "/crews",
    { summary: "Add a crew", may: may.officer, body: CrewInput, reply: CrewDetail },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(crewPolicy, actor, "change", { siteId: site.id });
      const crew = await createCrew(actor, body);
      return view(actor, crew.id);
    },
  );

  endpoint.put(
    "/crews/:id",
    {
      summary: "Change a crew",
      may: may.officer,
      params: IdParams,
      body: CrewInput,
      reply: CrewDetail,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const crew = await crewToChange(actor, params.id);
      await requireRevision(crew, ifMatch, () => view(actor, crew.id));
      await changeCrew(actor, crew, body);
      return view(actor, crew.id);
    },
  );

  endpoint.post(
    "/crews/:id/memberships",
    {
      summary: "Put a worker into a crew from a date on",
      may: may.officer,
      params: IdParams,
      body: MembershipInput,
      reply: CrewDetail,
    },
    async ({ actor, params, body }) => {
      const crew = await crewToChange(actor, params.id);
      const worker = await findVisible(Worker, workerPolicy, body.workerId, actor);
      await addCrewMember(actor, crew, worker, body);
      return view(actor, crew.id);
    },
  );

  endpoint.post(
    "/crews/:id/supervisors",
    {
      summary: "Give a crew a supervisor from a date on",
      may: may.officer,
      params: IdParams,
      body: SupervisorInput,
      reply: CrewDetail,
    },
    async ({ actor, params, body }) => {
      const crew = await crewToChange(actor, params.id);
      await addCrewSupervisor(actor, crew, body);
      return view(actor, crew.id);
    },
  );

  for (const [part, kind] of [
    ["memberships", "member"],
    ["supervisors", "supervisor"],
  ] as const) {
    endpoint.patch(
      `/crews/:id/${part}/:spanId`,
      {
        summary:
          kind === "member" ? "Last day of a membership" : "Last day of a supervisor with a crew",
        may: may.officer,
        params: SpanParams,
        body: DatedEnd,
        reply: CrewDetail,
        needsRevision: true,
      },
      async ({ actor, params, body, ifMatch }) => {
        const crew = await crewToChange(actor, params.id);
        await requireRevision(crew, ifMatch, () => view(actor, crew.id));
        await endCrewSpan(actor, crew, kind, params.spanId, body.toDate);
        return view(actor, crew.id);
      },
    );
  }
}
