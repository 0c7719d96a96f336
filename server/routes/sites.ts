import { IdParams } from "../../shared/schemas/common";
import { FitDistribution, FitPolicyInput, FitPolicyPreview } from "../../shared/schemas/fit";
import {
  NewSiteInput,
  SiteInput,
  SiteList,
  SiteSettingsInput,
  SiteView,
} from "../../shared/schemas/site";
import { addSiteSettings } from "../commands/add-site-settings";
import { changeSite } from "../commands/change-site";
import { createSite } from "../commands/create-site";
import { setFitPolicy } from "../commands/set-fit-policy";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { may, sitePolicy } from "../policies";
import { presentSite } from "../presenters/site";
import { fitDistribution } from "../queries/fit-distribution";
import { previewFitPolicy } from "../queries/fit-policy-preview";
import { listSites } from "../queries/sites";

const view = async (actor: Actor, id: string) =>
  presentSite(actor, only(await listSites(actor, id)));

export function defineSiteRoutes(): void {
  endpoint.get(
    "/sites",
    { summary: "Sites and the rules in force at each", may: may.readSites, reply: SiteList },
    async ({ actor }) => ({
      rows: (await listSites(actor)).map((site) => presentSite(actor, site)),
      can: { create: sitePolicy.can.create(actor, { id: "" }) },
    }),
  );

  endpoint.get(
    "/sites/:id",
    {
      summary: "One site with the history of its rules",
      may: may.readSites,
      params: IdParams,
      reply: SiteView,
    },
    async ({ actor, params }) => view(actor, params.id),
  );

  endpoint.post(
    "/sites",
    {
      summary: "Add a site with its first rules",
      may: may.administer,
      body: NewSiteInput,
      reply: SiteView,
    },
    async ({ actor, body }) => {
      authorize(sitePolicy, actor, "create", { id: "" });
      const site = await createSite(actor, body);
      return view(actor, site.id);
    },
  );

  endpoint.put(
    "/sites/:id",
    {
      summary: "Change a site's name, time zone, language or delay of notices",
      may: may.administer,
      params: IdParams,
      body: SiteInput,
      reply: SiteView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor, { lock: true });
      authorize(sitePolicy, actor, "change", site);
      await requireRevision(site, ifMatch, () => view(actor, site.id));
      await changeSite(actor, site, body);
      return view(actor, site.id);
    },
  );

  endpoint.put(
    "/sites/:id/fit-policy",
    {
      summary: "How sure a fit has to be, and when it is tested again",
      may: may.officer,
      params: IdParams,
      body: FitPolicyInput,
      reply: SiteView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor, { lock: true });
      authorize(sitePolicy, actor, "changeRules", site);
      const before = await view(actor, site.id);
      await requireRevision(site, ifMatch, async () => before);
      await setFitPolicy(actor, site, before.fitPolicy, body);
      return view(actor, site.id);
    },
  );

  endpoint.post(
    "/sites/:id/fit-policy/preview",
    {
      summary: "What would be due by another policy of fitting",
      may: may.officer,
      params: IdParams,
      body: FitPolicyInput,
      reply: FitPolicyPreview,
      storesNothing: true,
    },
    async ({ actor, params, body }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor);
      authorize(sitePolicy, actor, "changeRules", site);
      return previewFitPolicy(site, body);
    },
  );

  endpoint.get(
    "/sites/:id/fits",
    {
      summary: "A site's own fits by model, beside what the label says",
      may: may.readFitting,
      params: IdParams,
      reply: FitDistribution,
    },
    async ({ actor, params }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor);
      return fitDistribution(actor, site.id);
    },
  );

  endpoint.post(
    "/sites/:id/settings",
    {
      summary: "New rules for a site from a date on",
      may: may.officer,
      params: IdParams,
      body: SiteSettingsInput,
      reply: SiteView,
    },
    async ({ actor, params, body }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor, { lock: true });
      authorize(sitePolicy, actor, "changeRules", site);
      await addSiteSettings(actor, site, body);
      return view(actor, site.id);
    },
  );
}
