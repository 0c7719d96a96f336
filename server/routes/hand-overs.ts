import { IdParams, PageQuery } from "../../shared/schemas/common";
import {
  HandOverDraft,
  HandOverInput,
  HandOverPage,
  HandOverView,
} from "../../shared/schemas/hand-over";
import { giveHandOver, receiveHandOver } from "../commands/give-hand-over";
import { endpoint } from "../lib/endpoint";
import { findVisible } from "../lib/policy";
import { Crew } from "../models/worker";
import { chargePolicy, handOverCrewPolicy, may } from "../policies";
import { handOverDraft, handOverView, listHandOvers } from "../queries/hand-overs";

export function defineHandOverRoutes(): void {
  endpoint.get(
    "/crews/:id/hand-over-draft",
    {
      summary: "What there is to hand over of a crew now, and to whom",
      may: may.planPeople,
      params: IdParams,
      reply: HandOverDraft,
    },
    async ({ actor, params }) =>
      handOverDraft(actor, await findVisible(Crew, chargePolicy, params.id, actor)),
  );

  endpoint.get(
    "/crews/:id/hand-overs",
    {
      summary: "Hand-overs of a crew, the latest first",
      may: may.readCrews,
      params: IdParams,
      query: PageQuery,
      reply: HandOverPage,
    },
    async ({ actor, params, query }) => {
      const crew = await findVisible(Crew, handOverCrewPolicy, params.id, actor);
      return listHandOvers(actor, crew.id, query);
    },
  );

  endpoint.post(
    "/crews/:id/hand-overs",
    {
      summary: "Hand a crew's open matters to the next in charge",
      may: may.planPeople,
      params: IdParams,
      body: HandOverInput,
      reply: HandOverView,
    },
    async ({ actor, params, body }) => {
      const crew = await findVisible(Crew, chargePolicy, params.id, actor);
      return handOverView(actor, await giveHandOver(actor, crew, body));
    },
  );

  endpoint.post(
    "/hand-overs/:id/receipt",
    {
      summary: "Say that one has read what one was handed",
      may: may.planPeople,
      params: IdParams,
      reply: HandOverView,
    },
    async ({ actor, params }) => {
      await receiveHandOver(actor, params.id);
      return handOverView(actor, params.id);
    },
  );
}
