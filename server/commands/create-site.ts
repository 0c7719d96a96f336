import type { z } from "zod";
import type { NewSiteInput } from "../../shared/schemas/site";
import { recordAudit } from "../lib/audit";
import type { Actor } from "../lib/policy";
import { Site } from "../models/site";
import { insertSettings } from "./add-site-settings";
import { checkSettings, checkTimeZone } from "./check-site";

export async function createSite(actor: Actor, input: z.infer<typeof NewSiteInput>): Promise<Site> {
  const { settings, ...facts } = input;
  checkSettings(settings, ["settings"]);
  await checkTimeZone(facts.timeZone);
  const site = await Site.create({ organizationId: actor.organizationId, ...facts });
  await insertSettings(actor, site, { ...settings, reason: null });
  await recordAudit(actor, {
    action: "create-site",
    subjectKind: "site",
    subjectId: site.id,
    values: input,
  });
  return site;
}
