import { IdParams } from "../../shared/schemas/common";
import { EmployerDutiesInput, EmployerList, EmployerView } from "../../shared/schemas/employer";
import { agreeEmployerDuties } from "../commands/agree-employer-duties";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { employerPolicy, may, sitePolicy } from "../policies";
import { listEmployers } from "../queries/employers";

/** Agencies and contractors with people at a site, and who does what for them. */
export function defineEmployerRoutes(): void {
  endpoint.get(
    "/sites/:id/employers",
    {
      summary: "Agencies and contractors with people at a site, and who does what for them",
      may: may.readEmployers,
      params: IdParams,
      reply: EmployerList,
    },
    async ({ actor, params }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor);
      return { rows: await listEmployers(actor, site.id) };
    },
  );

  endpoint.put(
    "/sites/:id/employers",
    {
      summary: "Record what was agreed with an employer about its people at a site",
      may: may.officer,
      params: IdParams,
      body: EmployerDutiesInput,
      reply: EmployerView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor);
      authorize(employerPolicy, actor, "agree", { siteId: site.id });
      return agreeEmployerDuties(actor, site.id, body, ifMatch);
    },
  );
}
