import { IdParams } from "../../shared/schemas/common";
import {
  ErasureInput,
  ErasureList,
  ErasureView,
  FormerWorkerPage,
  HoldInput,
  HoldList,
  HoldView,
  LiftInput,
  RetentionFilter,
  TermInput,
  TermView,
} from "../../shared/schemas/retention";
import { lockProposal } from "../commands/decide-proposal";
import { liftHold, placeHold } from "../commands/hold-records";
import { approveErasure, proposeErasure, withdrawErasure } from "../commands/propose-erasure";
import { setRetentionTerm } from "../commands/set-retention-term";
import { endpoint } from "../lib/endpoint";
import { only } from "../lib/only";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { holdPolicy, may, retentionPolicy, sitePolicy } from "../policies";
import { listErasures, listHolds, pageOfFormerWorkers, termView } from "../queries/retention";

/** An order that nobody else decides meanwhile, and who proposed it. */
async function erasureToDecide(actor: Actor, id: string) {
  const proposedBy = await lockProposal("erasures", id);
  return { erasure: only(await listErasures(actor, id)), proposedBy };
}

/** How long people stay in the records, what is held beyond that, and taking them out. */
export function defineRetentionRoutes(): void {
  endpoint.get(
    "/retention",
    {
      summary: "Terms by rule and the organization's own, and how many people are due",
      may: may.retain,
      reply: TermView,
    },
    ({ actor }) => termView(actor),
  );

  endpoint.put(
    "/retention",
    {
      summary: "Set the organization's own term",
      may: may.administer,
      body: TermInput,
      reply: TermView,
      needsRevision: true,
    },
    async ({ actor, body, ifMatch }) => {
      authorize(retentionPolicy, actor, "setTerm", { siteId: "" });
      await setRetentionTerm(actor, body, ifMatch);
      return termView(actor);
    },
  );

  endpoint.get(
    "/retention/people",
    {
      summary: "People who left, whose term is over or who are kept, and why",
      may: may.retain,
      query: RetentionFilter,
      reply: FormerWorkerPage,
    },
    async ({ actor, query }) => {
      if (query.siteId !== undefined) await findVisible(Site, sitePolicy, query.siteId, actor);
      return pageOfFormerWorkers(actor, query);
    },
  );

  endpoint.get(
    "/legal-holds",
    { summary: "Holds on records, those that stand first", may: may.retain, reply: HoldList },
    async ({ actor }) => ({ rows: await listHolds(actor) }),
  );

  endpoint.post(
    "/legal-holds",
    {
      summary: "Hold the records of a worker or of a site until it is lifted",
      may: may.retain,
      body: HoldInput,
      reply: HoldView,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(holdPolicy, actor, "lift", { siteId: site.id });
      return only(await listHolds(actor, await placeHold(actor, body)));
    },
  );

  endpoint.post(
    "/legal-holds/:id/lift",
    {
      summary: "Lift a hold, with the reason",
      may: may.retain,
      params: IdParams,
      body: LiftInput,
      reply: HoldView,
      status: 200,
    },
    async ({ actor, params, body }) => {
      const hold = only(await listHolds(actor, params.id));
      authorize(holdPolicy, actor, "lift", hold);
      await liftHold(actor, hold, body.reason);
      return only(await listHolds(actor, params.id));
    },
  );

  endpoint.get(
    "/erasures",
    {
      summary: "What was proposed to be erased, and how far it is",
      may: may.retain,
      reply: ErasureList,
    },
    async ({ actor }) => ({ rows: await listErasures(actor) }),
  );

  endpoint.post(
    "/erasures",
    {
      summary: "Propose to erase people whose term is over",
      may: may.retain,
      body: ErasureInput,
      reply: ErasureView,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(retentionPolicy, actor, "propose", { siteId: site.id });
      return only(await listErasures(actor, await proposeErasure(actor, body)));
    },
  );

  endpoint.post(
    "/erasures/:id/approval",
    {
      summary: "Approve what somebody else proposed: it is then done",
      may: may.retain,
      params: IdParams,
      reply: ErasureView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, ifMatch }) => {
      const { erasure, proposedBy } = await erasureToDecide(actor, params.id);
      await requireRevision(erasure, ifMatch, async () => erasure);
      await approveErasure(actor, erasure, proposedBy);
      return only(await listErasures(actor, params.id));
    },
  );

  endpoint.post(
    "/erasures/:id/withdrawal",
    {
      summary: "Withdraw a proposal that was not approved",
      may: may.retain,
      params: IdParams,
      reply: ErasureView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, ifMatch }) => {
      const { erasure } = await erasureToDecide(actor, params.id);
      await requireRevision(erasure, ifMatch, async () => erasure);
      await withdrawErasure(actor, erasure);
      return only(await listErasures(actor, params.id));
    },
  );
}
