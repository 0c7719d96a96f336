import { z } from "zod";
import { IsoDate, PageQuery, pageOf } from "./common";
import { Size } from "./fit";

export const StockPart = z.enum(["device", "cushions", "tips"]);
/** What an officer enters by hand; what is issued and comes back writes itself. */
export const StockMoveInput = z
  .object({
    siteId: z.uuid(),
    modelId: z.uuid(),
    size: Size.nullable().default(null),
    part: StockPart.default("device"),
    /** `counted`: the quantity is what is there, and the difference is entered. */
    kind: z.enum(["received", "lost", "damaged", "counted", "changed"]),
    quantity: z.number().int().min(0).max(100_000),
    movedOn: IsoDate,
    note: z.string().trim().max(2000).default(""),
  })
  .refine(({ kind, quantity }) => kind === "counted" || quantity > 0, {
    path: ["quantity"],
    params: { code: "too_small" },
  });
export type StockMoveInput = z.infer<typeof StockMoveInput>;

export const StockRow = z.object({
  siteId: z.uuid(),
  siteName: z.string(),
  modelId: z.uuid(),
  modelName: z.string(),
  size: z.string().nullable(),
  part: StockPart,
  quantity: z.number(),
  lastMovedOn: IsoDate,
  /** Devices out with workers. */
  issuedCount: z.number(),
});
export type StockRow = z.infer<typeof StockRow>;
export const StockList = z.object({ rows: z.array(StockRow) });

export const StockMoveView = z.object({
  id: z.uuid(),
  siteName: z.string(),
  modelName: z.string(),
  size: z.string().nullable(),
  part: StockPart,
  kind: z.enum(["received", "issued", "returned", "lost", "damaged", "counted", "changed"]),
  quantity: z.number(),
  movedOn: IsoDate,
  note: z.string(),
  workerName: z.string().nullable(),
  authorName: z.string().nullable(),
});
export const StockMovePage = pageOf(StockMoveView);
export const StockFilter = PageQuery.extend({ siteId: z.uuid().optional() });

/** Cushions and tips that want changing, by issued device. */
export const ReplacementDue = z.object({
  issueId: z.uuid(),
  workerId: z.uuid(),
  workerName: z.string(),
  employeeNumber: z.string(),
  modelId: z.uuid(),
  modelName: z.string(),
  part: StockPart,
  lastChangedOn: IsoDate,
  dueOn: IsoDate,
});
export const ReplacementPage = pageOf(ReplacementDue);
/** Cushions or tips changed on an issued device. */
export const ReplacementInput = z.object({ part: StockPart, changedOn: IsoDate });
