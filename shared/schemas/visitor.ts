import { z } from "zod";
import { IsoDate, Language, Name } from "./common";

/** Somebody from outside who reads one year of one site, until a day is over. */
export const VisitorInput = z.object({
  name: Name(200),
  email: z.email().max(320),
  siteId: z.uuid(),
  /** A choice of a form is a text. */
  year: z.coerce.number().int().min(1950).max(2200),
  /** The last day, as the site's clock has it; today where nothing is said. */
  lastDay: IsoDate.nullable().default(null),
  language: Language.default("en"),
});
export type VisitorInput = z.infer<typeof VisitorInput>;

export const VisitorView = z.object({
  /** Of the grant: the same person may come twice. */
  id: z.uuid(),
  userId: z.uuid(),
  name: z.string(),
  email: z.string().nullable(),
  siteId: z.uuid(),
  siteName: z.string(),
  timeZone: z.string(),
  year: z.number(),
  grantedAt: z.string(),
  grantedBy: z.string().nullable(),
  endsAt: z.string(),
  state: z.enum(["expected", "here", "over"]),
});
export type VisitorView = z.infer<typeof VisitorView>;
export const VisitorList = z.object({ rows: z.array(VisitorView) });
