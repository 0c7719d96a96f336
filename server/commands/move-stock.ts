import { randomUUID } from "node:crypto";
import type { z } from "zod";
import type { StockMoveView, StockPart } from "../../shared/schemas/stock";
import { execute, row } from "../lib/db";
import type { Actor } from "../lib/policy";

interface StockMove
  extends Pick<z.infer<typeof StockMoveView>, "size" | "kind" | "quantity" | "movedOn"> {
  siteId: string;
  modelId: string;
  part?: z.infer<typeof StockPart>;
  /** The device that a worker has, where it is about one. */
  issueId?: string | null;
  note?: string;
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

/** What leaves the stock or comes into it, a device unless it says otherwise. The event is its caller's. Returns its id. */
export async function moveStock(
  actor: Actor,
  {
    siteId,
    modelId,
    size,
    part = "device",
    kind,
    quantity,
    issueId = null,
    movedOn,
    note = "",
  }: StockMove,
): Promise<string> {
  const id = randomUUID();
  await execute(
    `INSERT INTO stock_moves (id, organization_id, site_id, model_id, size, part, kind, quantity, issue_id, moved_on, note, author_id)
     VALUES ($1, $2, $3, $4, $5, $6, $7, $8, $9, $10, $11, $12)`,
    [
      id,
      actor.organizationId,
      siteId,
      modelId,
      size,
      part,
      kind,
      quantity,
      issueId,
      movedOn,
      note,
      actor.userId,
    ],
  );
  return id;
}
