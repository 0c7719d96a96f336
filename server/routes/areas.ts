import { AtSiteQuery, IdParams } from "../../shared/schemas/common";
import { AreaInput, AreaList, AreaView } from "../../shared/schemas/site";
import { changeArea } from "../commands/change-area";
import { createArea } from "../commands/create-area";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Area, Site } from "../models/site";
import { may, programmePolicy, sitePolicy } from "../policies";
import { presentArea } from "../presenters/area";
import { listAreas } from "../queries/areas";

const view = async (actor: Actor, id: string) =>
  presentArea(actor, only(await listAreas(actor, { id })));

export function defineAreaRoutes(): void {
  endpoint.get(
    "/areas",
    {
      summary: "Areas and their zones",
      may: may.readProgramme,
      query: AtSiteQuery,
      reply: AreaList,
    },
    async ({ actor, query }) => ({
      rows: (await listAreas(actor, query)).map((area) => presentArea(actor, area)),
    }),
  );

  endpoint.post(
    "/areas",
    { summary: "Add an area", may: may.officer, body: AreaInput, reply: AreaView },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(programmePolicy, actor, "change", { siteId: site.id });
      const area = await createArea(actor, body);
      return view(actor, area.id);
    },
  );

  endpoint.put(
    "/areas/:id",
    {
      summary: "Change an area",
      may: may.officer,
      params: IdParams,
      body: AreaInput,
      reply: AreaView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const area = await findVisible(Area, programmePolicy, params.id, actor, { lock: true });
      authorize(programmePolicy, actor, "change", area);
      await requireRevision(area, ifMatch, () => view(actor, area.id));
      const site = await findVisible(Site, sitePolicy, area.siteId, actor);
      await changeArea(actor, area, site, body);
      return view(actor, area.id);
    },
  );
}
