import { AtSiteQuery, IdParams } from "../../shared/schemas/common";
import { IssueView } from "../../shared/schemas/fit";
import {
  ReplacementInput,
  ReplacementPage,
  StockFilter,
  StockList,
  StockMoveInput,
  StockMovePage,
  StockMoveView,
} from "../../shared/schemas/stock";
import { changeCushions } from "../commands/change-cushions";
import { enterStock } from "../commands/enter-stock";
import { endpoint } from "../lib/endpoint";
import { AppError } from "../lib/errors";
import { only } from "../lib/only";
import { authorize, findVisible } from "../lib/policy";
import { ProtectorIssue } from "../models/issue";
import { ProtectorModel } from "../models/protector";
import { Site } from "../models/site";
import { fitPolicy, may, protectorPolicy, sitePolicy, stockPolicy } from "../policies";
import { issuesById } from "../queries/issues";
import { listStockMoves, replacementsDue, stockAt, stockMove } from "../queries/stock";

export function defineStockRoutes(): void {
  endpoint.get(
    "/stock",
    {
      summary: "What the sites have of each model, size and part",
      may: may.export,
      query: AtSiteQuery,
      reply: StockList,
    },
    async ({ actor, query }) => ({ rows: await stockAt(actor, query.siteId ?? null) }),
  );

  endpoint.get(
    "/stock/moves",
    {
      summary: "What came into the stock and left it, the latest first",
      may: may.export,
      query: StockFilter,
      reply: StockMovePage,
    },
    ({ actor, query }) => listStockMoves(actor, query),
  );

  endpoint.post(
    "/stock/moves",
    {
      summary: "Enter what came in, was lost, damaged or counted",
      may: may.officer,
      body: StockMoveInput,
      reply: StockMoveView,
    },
    async ({ actor, body }) => {
      const site = await findVisible(Site, sitePolicy, body.siteId, actor);
      authorize(stockPolicy, actor, "change", { siteId: site.id });
      await findVisible(ProtectorModel, protectorPolicy, body.modelId, actor, { lock: true });
      return stockMove(await enterStock(actor, site, body));
    },
  );

  endpoint.get(
    "/stock/replacements",
    {
      summary: "Cushions and tips that are due within a month, the longest overdue first",
      may: may.export,
      query: StockFilter,
      reply: ReplacementPage,
    },
    ({ actor, query }) => replacementsDue(actor, query),
  );

  endpoint.post(
    "/issues/:id/replacements",
    {
      summary: "Cushions or tips changed on a device that a worker has",
      may: may.officer,
      params: IdParams,
      body: ReplacementInput,
      reply: IssueView,
    },
    async ({ actor, params, body }) => {
      const found = await findVisible(ProtectorIssue, fitPolicy, params.id, actor, { lock: true });
      authorize(fitPolicy, actor, "change", found);
      if (found.endedOn !== null) throw new AppError("wrong-state", 409);
      const site = await findVisible(Site, sitePolicy, found.siteId, actor);
      await changeCushions(actor, found, site, body);
      return only(await issuesById(actor, found.id));
    },
  );
}
