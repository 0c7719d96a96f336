import { IdParams } from "../../shared/schemas/common";
import { DrawFilter, DrawInput, DrawPage, DrawView, MarkInput } from "../../shared/schemas/draw";
import { drawRecords } from "../commands/draw-records";
import { lockDraw, markDrawn, signDraw } from "../commands/mark-draw";
import { recordDrawRead } from "../commands/record-draw-read";
import { endpoint } from "../lib/endpoint";
import { type Actor, authorize, findVisible } from "../lib/policy";
import { requireRevision } from "../lib/revision";
import { Site } from "../models/site";
import { drawPolicy, may, sitePolicy } from "../policies";
import { drawView, findDraw, listDraws } from "../queries/draws";

/** A draw that nobody else marks meanwhile. */
async function drawToChange(actor: Actor, id: string) {
  await lockDraw(id);
  const draw = await findDraw(actor, id);
  authorize(drawPolicy, actor, "mark", draw);
  return draw;
}

export function defineDrawRoutes(): void {
  endpoint.get(
    "/draws",
    {
      summary: "Draws of records kept of a site's year, the latest first",
      may: may.readDraws,
      query: DrawFilter,
      reply: DrawPage,
    },
    async ({ actor, query }) => {
      await findVisible(Site, sitePolicy, query.siteId, actor);
      return listDraws(actor, query);
    },
  );

  endpoint.get(
    "/draws/:id",
    {
      summary: "A draw with each record's whole line",
      may: may.readDraws,
      params: IdParams,
      reply: DrawView,
      // Several workers' at once, so the handler keeps who read them.
      reads: { kind: "result", worker: () => null },
    },
    async ({ actor, params }) => {
      const view = await drawView(actor, params.id);
      await recordDrawRead(actor, params.id);
      return view;
    },
  );

  endpoint.post(
    "/draws",
    {
      summary: "Draw records of a site's year at random by a seed",
      may: may.drawRecords,
      body: DrawInput,
      reply: DrawView,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(drawPolicy, actor, "mark", { siteId: site.id });
      const id = await drawRecords(actor, body);
      await recordDrawRead(actor, id);
      return drawView(actor, id);
    },
  );

  endpoint.post(
    "/draws/:id/marks",
    {
      summary: "Mark a drawn record as in order, or with a question",
      may: may.drawRecords,
      params: IdParams,
      body: MarkInput,
      reply: DrawView,
    },
    async ({ actor, params, body }) => {
      await markDrawn(actor, await drawToChange(actor, params.id), body);
      return drawView(actor, params.id);
    },
  );

  endpoint.post(
    "/draws/:id/signature",
    {
      summary: "Sign a draw off as it was seen, every record marked",
      may: may.drawRecords,
      params: IdParams,
      reply: DrawView,
      needsRevision: true,
    },
    async ({ actor, params, ifMatch }) => {
      const draw = await drawToChange(actor, params.id);
      await requireRevision(draw, ifMatch, () => drawView(actor, params.id));
      await signDraw(actor, draw);
      return drawView(actor, params.id);
    },
  );
}
