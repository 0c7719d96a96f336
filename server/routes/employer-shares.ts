import { IdParams } from "../../shared/schemas/common";
import {
  EmployerShareInput,
  EmployerShareList,
  EmployerShareView,
  SharedResultFilter,
  SharedResultPage,
} from "../../shared/schemas/employer-share";
import { recordReads, recordSharedReads } from "../commands/record-read";
import { endEmployerShare, shareWithEmployer } from "../commands/share-with-employer";
import type { Config } from "../config";
import { streamSharedResults } from "../exports/shared-csv";
import { recordAudit } from "../lib/audit";
import { inTransaction } from "../lib/db";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { authorize, findVisible } from "../lib/policy";
import { Site } from "../models/site";
import { employerSharePolicy, may, sitePolicy } from "../policies";
import {
  listEmployerShares,
  listSharedResults,
  outsideEmployers,
} from "../queries/employer-shares";

/** People of agencies and contractors read the results of their own people at a site for a while. */
export function defineEmployerShareRoutes(config: Pick<Config<"web">, "DATABASE_URL">): void {
  endpoint.get(
    "/sites/:id/employer-shares",
    {
      summary: "People of outside employers who read their people's results at a site",
      may: may.shareWithEmployers,
      params: IdParams,
      reply: EmployerShareList,
    },
    async ({ actor, params }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor);
      authorize(employerSharePolicy, actor, "change", { siteId: site.id });
      return {
        rows: await listEmployerShares(actor, { siteId: site.id }),
        employers: await outsideEmployers(site.id),
      };
    },
  );

  endpoint.post(
    "/sites/:id/employer-shares",
    {
      summary: "Let somebody of an outside employer read its people's results until a day is over",
      may: may.shareWithEmployers,
      params: IdParams,
      body: EmployerShareInput,
      reply: EmployerShareView,
    },
    async ({ actor, params, body }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor);
      authorize(employerSharePolicy, actor, "change", { siteId: site.id });
      const id = await shareWithEmployer(actor, site, body);
      return only(await listEmployerShares(actor, { id }));
    },
  );

  endpoint.post(
    "/employer-shares/:id/end",
    {
      summary: "End what was shared with somebody of an employer before its time",
      may: may.shareWithEmployers,
      params: IdParams,
      reply: EmployerShareView,
      status: 200,
    },
    async ({ actor, params }) => {
      const share = only(await listEmployerShares(actor, params));
      authorize(employerSharePolicy, actor, "change", share);
      await endEmployerShare(actor, share);
      return only(await listEmployerShares(actor, params));
    },
  );

  endpoint.get(
    "/shared-results",
    {
      summary: "Results of one's own people, for somebody of their employer",
      may: may.readSharedResults,
      query: SharedResultFilter,
      reply: SharedResultPage,
      keepsReads: true,
    },
    async ({ actor, query }) => {
      const { page, workerIds } = await listSharedResults(actor, query);
      await recordReads(actor, workerIds, "result");
      return page;
    },
  );

  endpoint.get(
    "/shared-results.csv",
    {
      summary: "The same as a file, streamed",
      may: may.readSharedResults,
      streams: true,
    },
    async ({ actor, response }) => {
      // Kept before the first record leaves: a file that breaks off was read too.
      await inTransaction({ organizationId: actor.organizationId }, async () => {
        await recordSharedReads(actor);
        for (const siteId of new Set(actor.employerGrants.map((grant) => grant.siteId)))
          await recordAudit(actor, {
            action: "export-shared-results",
            subjectKind: "site",
            subjectId: siteId,
            values: {},
          });
      });
      response.attachment("results.csv").type("text/csv; charset=utf-8; header=present");
      await streamSharedResults(config.DATABASE_URL, actor, response);
    },
  );
}
