import type { StockMoveInput } from "../../shared/schemas/stock";
import { recordAudit } from "../lib/audit";
import { dateIssues, todayAt } from "../lib/calendar";
import { row } from "../lib/db";
import { issue, unprocessable } from "../lib/errors";
import type { Actor } from "../lib/policy";
import { moveStock } from "./move-stock";

/** What a kind entered by hand does to the stock. */
const SIGN = { received: 1, lost: -1, damaged: -1, changed: -1 } as const;

/**
 * Something that came into a site's stock or left it otherwise than with a worker. A count enters the difference; the
 * model's row is locked, so that two counts don't both enter theirs.
 *
 * @throws AppError invalid.
 */
export async function enterStock(
  actor: Actor,
  site: { id: string; timeZone: string },
  input: StockMoveInput,
): Promise<string> {
  const { modelId, size, part, kind, movedOn, note } = input;
  const today = todayAt(site.timeZone);
  const issues = dateIssues(["movedOn"], movedOn);
  if (movedOn > today) issues.push(issue(["movedOn"], "in-the-future", { today }));
  const stock = await stockNow(site.id, { modelId, size, part });
  // What is not there cannot be lost; tips are changed out of a box that nobody counts as well.
  if ((kind === "lost" || kind === "damaged") && input.quantity > Math.max(0, stock))
    issues.push(issue(["quantity"], "more-than-in-stock", { stock: Math.max(0, stock) }));
  if (issues.length > 0) throw unprocessable(issues);
  const quantity = kind === "counted" ? input.quantity - stock : SIGN[kind] * input.quantity;
  const id = await moveStock(actor, {
    siteId: site.id,
    modelId,
    size,
    part,
    kind,
    quantity,
    movedOn,
    note,
  });
  await recordAudit(actor, {
    action: "enter-stock",
    subjectKind: "site",
    subjectId: site.id,
    values: { ...input, quantity },
  });
  return id;
}

async function stockNow(
  siteId: string,
  { modelId, size, part }: Pick<StockMoveInput, "modelId" | "size" | "part">,
): Promise<number> {
  const found = await row<{ quantity: number }>(
    `SELECT coalesce(sum(quantity), 0)::int AS quantity FROM stock_moves
     WHERE site_id = :siteId AND model_id = :modelId AND part = :part AND size IS NOT DISTINCT FROM CAST(:size AS text)`,
    { siteId, modelId, part, size },
  );
  return found?.quantity ?? 0;
}
