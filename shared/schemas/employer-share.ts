import { z } from "zod";
import { IsoDate, Language, Name, PageQuery } from "./common";
import { OutsideKind } from "./employer";

/** An employer as a choice of a form names it: its kind and its name, `agency:Name`. */
export const EmployerKey = z
  .string()
  .max(220)
  .regex(/^(agency|contractor):\S/);

/** Somebody of an outside employer reads its people's results at a site until a day is over. */
export const EmployerShareInput = z.object({
  employer: EmployerKey,
  name: Name(200),
  email: z.email().max(320),
  /** The last day, as the site's clock has it. */
  lastDay: IsoDate,
  language: Language.default("en"),
});
export type EmployerShareInput = z.infer<typeof EmployerShareInput>;

export const EmployerShareView = z.object({
  /** Of the grant. */
  id: z.uuid(),
  userId: z.uuid(),
  name: z.string(),
  email: z.string().nullable(),
  employerKind: OutsideKind,
  employerName: z.string(),
  siteId: z.uuid(),
  siteName: z.string(),
  timeZone: z.string(),
  grantedBy: z.string().nullable(),
  endsAt: z.string(),
  state: z.enum(["expected", "here", "over"]),
});
export type EmployerShareView = z.infer<typeof EmployerShareView>;

export const EmployerShareList = z.object({
  rows: z.array(EmployerShareView),
  /** Employers whose people are or were at the site. */
  employers: z.array(z.object({ kind: OutsideKind, name: z.string() })),
});

const Verdict = z.enum(["under", "over", "cant-tell-yet", "not-assessed"]);
const Bound = z.enum(["exact", "upper", "lower"]);

/** A day's result as the worker's employer reads it. */
export const SharedResult = z.object({
  resultId: z.uuid(),
  date: IsoDate,
  workerName: z.string(),
  employeeNumber: z.string(),
  siteName: z.string(),
  /** Without protection, dB: LEX,8h or TWA by the rule set. */
  outsideDb: z.number().nullable(),
  outsideBound: Bound,
  /** Expanded, of LEX,8h, dB. */
  uncertaintyDb: z.number().nullable(),
  verdictOutside: Verdict,
  atEarDb: z.number().nullable(),
  atEarBound: Bound,
  verdictAtEar: Verdict,
  ruleSetKey: z.string(),
});
export type SharedResult = z.infer<typeof SharedResult>;

export const SharedResultFilter = PageQuery.extend({
  from: IsoDate.optional(),
  to: IsoDate.optional(),
});

export const SharedResultPage = z.object({
  rows: z.array(SharedResult),
  next: z.string().nullable(),
  /** What the reader was let in to, and until when. */
  shares: z.array(
    z.object({
      id: z.uuid(),
      employerName: z.string(),
      siteName: z.string(),
      timeZone: z.string(),
      endsAt: z.string(),
    }),
  ),
});
export type SharedResultPage = z.infer<typeof SharedResultPage>;
