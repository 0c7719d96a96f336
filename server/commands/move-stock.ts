import type { z } from "zod";
import type { StockMoveView } from "../../shared/schemas/stock";
import { execute, row } from "../lib/db";
import type { Actor } from "../lib/policy";

interface StockMove
  extends Pick<z.infer<typeof StockMoveView>, "size" | "kind" | "quantity" | "movedOn"> {
  siteId: string;
  modelId: string;
  issueId: string;
}

/** How many devices of a size are in a site's stock; null where the site keeps none of this model. */
export async function stockOf(
  siteId: string,
  modelId: string,
  size: string | null,
): Promise<number | null> {
  const found = await row<{ isKept: boolean; quantity: number }>(
    `SELECT count(*) > 0 AS "isKept", coalesce(sum(quantity) FILTER (WHERE size IS NOT DISTINCT FROM CAST(:size AS text)), 0)::int AS quantity
     FROM stock_moves WHERE site_id = :siteId AND model_id = :modelId AND part = 'device'`,
    { siteId, modelId, size },
  );
  return found?.isKept ? found.quantity : null;
}

/** A device that leaves the stock with a worker, or comes back into it. The event is that of the issue. */
export async function moveStock(actor: Actor, move: StockMove): Promise<void> {
  const { siteId, modelId, size, kind, quantity, issueId, movedOn } = move;
  await execute(
    `INSERT INTO stock_moves (organization_id, site_id, model_id, size, part, kind, quantity, issue_id, moved_on, author_id)
     VALUES ($1, $2, $3, $4, 'device', $5, $6, $7, $8, $9)`,
    [actor.organizationId, siteId, modelId, size, kind, quantity, issueId, movedOn, actor.userId],
  );
}
