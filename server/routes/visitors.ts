import { IdParams } from "../../shared/schemas/common";
import { VisitorInput, VisitorList, VisitorView } from "../../shared/schemas/visitor";
import { endVisit, letVisitorIn } from "../commands/let-visitor-in";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { may, sitePolicy, visitPolicy } from "../policies";
import { listVisitors } from "../queries/visitors";

/** Somebody from outside reads one year of one site for a while. */
export function defineVisitorRoutes(): void {
  endpoint.get(
    "/visitors",
    {
      summary: "Visitors, those who may come in first",
      may: may.administer,
      reply: VisitorList,
    },
    async ({ actor }) => ({ rows: await listVisitors(actor) }),
  );

  endpoint.post(
    "/visitors",
    {
      summary: "Let somebody read one year of one site until a day is over",
      may: may.administer,
      body: VisitorInput,
      reply: VisitorView,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(visitPolicy, actor, "change", { siteId: site.id });
      return only(await listVisitors(actor, await letVisitorIn(actor, site, body)));
    },
  );

  endpoint.post(
    "/visitors/:id/end",
    {
      summary: "End a visit before its time",
      may: may.administer,
      params: IdParams,
      reply: VisitorView,
      status: 200,
    },
    async ({ actor, params }) => {
      const visit = only(await listVisitors(actor, params.id));
      authorize(visitPolicy, actor, "change", visit);
      await endVisit(actor, visit);
      return only(await listVisitors(actor, params.id));
    },
  );
}
