import { z } from "zod";
import { IdParams } from "../../shared/schemas/common";
import {
  EscalationInput,
  EscalationList,
  EscalationView,
  FindingFileInput,
  FindingFileRemoval,
  FollowUpView,
  MeasureInput,
  MeasureStrike,
  MeasureView,
} from "../../shared/schemas/follow-up";
import { attachFindingFile } from "../commands/attach-finding-file";
import { changeMeasure } from "../commands/change-measure";
import { recordMeasure } from "../commands/record-measure";
import { removeFindingFile } from "../commands/remove-finding-file";
import { setEscalation } from "../commands/set-escalation";
import { strikeMeasure } from "../commands/strike-measure";
import { endpoint } from "../lib/endpoint";
import { notFound } from "../lib/errors";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Finding } from "../models/finding";
import { Site } from "../models/site";
import { findingPolicy, may, sitePolicy } from "../policies";
import { visibleFiles } from "../queries/files";
import { findMeasure, followUpOf, listEscalations } from "../queries/follow-up";

const MeasureParams = IdParams.extend({ measureId: z.uuid() });

/** The finding, if this officer may act on it. */
async function findingToFollow(actor: Actor, id: string): Promise<Finding> {
  const finding = await findVisible(Finding, findingPolicy, id, actor, { lock: true });
  authorize(findingPolicy, actor, "handle", finding);
  return finding;
}

async function measureOf(findingId: string, id: string): Promise<MeasureView> {
  const measure = await findMeasure(findingId, id);
  if (!measure) throw notFound();
  return measure;
}

export function defineFollowUpRoutes(): void {
  endpoint.get(
    "/findings/:id/follow-up",
    {
      summary: "Whether a finding can be trusted, what would mend it for good, and the proof",
      may: may.readDays,
      params: IdParams,
      reply: FollowUpView,
    },
    async ({ actor, params }) =>
      followUpOf(actor, await findVisible(Finding, findingPolicy, params.id, actor)),
  );

  endpoint.post(
    "/findings/:id/measures",
    {
      summary: "Enter a measure, planned or done, under one of the five kinds of control",
      may: may.officer,
      params: IdParams,
      body: MeasureInput,
      reply: MeasureView,
    },
    async ({ actor, params, body }) => {
      const finding = await findingToFollow(actor, params.id);
      return measureOf(finding.id, await recordMeasure(actor, finding, body));
    },
  );

  endpoint.put(
    "/findings/:id/measures/:measureId",
    {
      summary: "A measure is done, put off, or put in other words",
      may: may.officer,
      params: MeasureParams,
      body: MeasureInput,
      reply: MeasureView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const finding = await findingToFollow(actor, params.id);
      const measure = await measureOf(finding.id, params.measureId);
      await requireRevision(measure, ifMatch, async () => measure);
      await changeMeasure(actor, finding, measure, body);
      return measureOf(finding.id, measure.id);
    },
  );

  endpoint.post(
    "/findings/:id/measures/:measureId/strike",
    {
      summary: "Strike a measure out, with the reason",
      may: may.officer,
      params: MeasureParams,
      body: MeasureStrike,
      reply: MeasureView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const finding = await findingToFollow(actor, params.id);
      const measure = await measureOf(finding.id, params.measureId);
      await requireRevision(measure, ifMatch, async () => measure);
      await strikeMeasure(actor, finding, measure, body.reason);
      return measureOf(finding.id, measure.id);
    },
  );

  endpoint.post(
    "/findings/:id/files",
    {
      summary: "Attach a paper that was sent before",
      may: may.officer,
      params: IdParams,
      body: FindingFileInput,
      reply: FollowUpView.pick({ files: true }),
    },
    async ({ actor, params, body }) => {
      const finding = await findingToFollow(actor, params.id);
      const [file] = await visibleFiles(actor, [body.fileId]);
      if (!file) throw notFound();
      await attachFindingFile(actor, finding, file, body.title);
      return followUpOf(actor, finding);
    },
  );

  endpoint.post(
    "/findings/:id/files/:attachmentId/removal",
    {
      summary: "Take a paper off a finding, with the reason",
      may: may.officer,
      params: IdParams.extend({ attachmentId: z.uuid() }),
      body: FindingFileRemoval,
      reply: FollowUpView.pick({ files: true }),
      status: 200,
    },
    async ({ actor, params, body }) => {
      const finding = await findingToFollow(actor, params.id);
      await removeFindingFile(actor, finding, params.attachmentId, body.reason);
      return followUpOf(actor, finding);
    },
  );

  endpoint.get(
    "/escalations",
    {
      summary: "Whom overdue findings go up to, site by site",
      may: may.officer,
      reply: EscalationList,
    },
    async ({ actor }) => ({ rows: await listEscalations(actor) }),
  );

  endpoint.put(
    "/sites/:id/escalation",
    {
      summary: "Name whom a site's overdue findings go up to",
      may: may.officer,
      params: IdParams,
      body: EscalationInput,
      reply: EscalationView,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const site = await findVisible(Site, sitePolicy, params.id, actor, { lock: true });
      authorize(sitePolicy, actor, "changeRules", site);
      const before = only(await listEscalations(actor, site.id));
      await requireRevision(site, ifMatch, async () => before);
      await setEscalation(actor, before, body.userId);
      return only(await listEscalations(actor, site.id));
    },
  );
}
