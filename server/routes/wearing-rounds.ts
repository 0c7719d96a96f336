import { z } from "zod";
import { IdParams, IsoDate } from "../../shared/schemas/common";
import {
  OwnReports,
  OwnReportsFilter,
  WearingCrews,
  WearingFilter,
  WearingRoundInput,
  WearingRoundPage,
  WearingRoundStrike,
  WearingRoundView,
  WearingTally,
} from "../../shared/schemas/wearing";
import { recordWearingRound } from "../commands/record-wearing-round";
import { strikeWearingRound } from "../commands/strike-wearing-round";
import { endpoint } from "../lib/endpoint";
import { authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { WearingRound } from "../models/shop-floor";
import { Site } from "../models/site";
import { Crew, Worker } from "../models/worker";
import {
  may,
  ownReportPolicy,
  roundPolicy,
  sitePolicy,
  wearingEntryPolicy,
  wearingPolicy,
} from "../policies";
import {
  listWearingRounds,
  ownReports,
  wearingCrews,
  wearingRoundView,
  wearingTally,
} from "../queries/wearing-rounds";

export function defineWearingRoutes(): void {
  endpoint.get(
    "/wearing-crews",
    {
      summary: "Crews through which a round may be made on a date",
      may: may.observe,
      query: z.object({ date: IsoDate }),
      reply: WearingCrews,
    },
    async ({ actor, query }) => ({ rows: await wearingCrews(actor, query.date) }),
  );

  endpoint.get(
    "/crews/:id/wearing-tally",
    {
      summary: "Whom a round through a crew looks at on a date",
      may: may.observe,
      params: IdParams,
      query: z.object({ date: IsoDate }),
      reply: WearingTally,
    },
    async ({ actor, params, query }) =>
      wearingTally(await findVisible(Crew, roundPolicy(query.date), params.id, actor), query.date),
  );

  endpoint.get(
    "/wearing-rounds",
    {
      summary: "Rounds and own reports of wearing, the latest first",
      may: may.readWearing,
      query: WearingFilter,
      reply: WearingRoundPage,
    },
    ({ actor, query }) => listWearingRounds(actor, query),
  );

  endpoint.get(
    "/workers/:id/own-reports",
    {
      summary: "What a worker said of their own wearing: the latest of each day and task",
      may: may.readOwnReports,
      params: IdParams,
      query: OwnReportsFilter,
      reply: OwnReports,
      reads: { kind: "page", worker: ({ params }) => params.id },
    },
    async ({ actor, params, query }) => {
      const { id, siteId } = await findVisible(Worker, ownReportPolicy, params.id, actor);
      const { timeZone } = await findVisible(Site, sitePolicy, siteId, actor);
      return { rows: await ownReports({ id, timeZone }, query.from) };
    },
  );

  endpoint.post(
    "/wearing-rounds",
    {
      summary: "Enter who was seen wearing it, or what somebody says of themselves",
      may: may.enterWearing,
      body: WearingRoundInput,
      reply: WearingRoundView,
    },
    async ({ actor, body }) => {
      authorize(wearingEntryPolicy, actor, "enter", body);
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      return wearingRoundView(actor, await recordWearingRound(actor, site, body));
    },
  );

  endpoint.post(
    "/wearing-rounds/:id/strike",
    {
      summary: "Strike a round made by mistake, with the reason",
      may: may.officer,
      params: IdParams,
      body: WearingRoundStrike,
      reply: WearingRoundView,
      status: 200,
      needsRevision: true,
    },
    async ({ actor, params, body, ifMatch }) => {
      const round = await findVisible(WearingRound, wearingPolicy, params.id, actor, {
        lock: true,
      });
      authorize(wearingPolicy, actor, "strike", round);
      await requireRevision(round, ifMatch, () => wearingRoundView(actor, round.id));
      await strikeWearingRound(actor, round, body.reason);
      return wearingRoundView(actor, round.id);
    },
  );
}
