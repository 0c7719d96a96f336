import { IdParams } from "../../shared/schemas/common";
import { SiteFiguresQuery, SiteFiguresView } from "../../shared/schemas/site-figures";
import { endpoint } from "../lib/endpoint";
import { findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { counterAt, may, siteFiguresPolicy } from "../policies";
import { siteFigures } from "../queries/site-figures";

/** What a workers' representative sees. */
export function defineSiteFiguresRoutes(): void {
  endpoint.get(
    "/sites/:id/figures",
    {
      summary: "A site in counts of people, without names and without counts of fewer than five",
      may: may.readSiteFigures,
      params: IdParams,
      query: SiteFiguresQuery,
      reply: SiteFiguresView,
    },
    async ({ actor, params, query }) => {
      const site = await findVisible(Site, siteFiguresPolicy, params.id, actor);
      return siteFigures(counterAt(actor, site.id), { siteId: site.id, year: query.year });
    },
  );
}
