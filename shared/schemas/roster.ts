import { z } from "zod";
import { IsoDate } from "./common";
import { ImportForm, ImportIssue } from "./import";

/** People of a file at most. */
export const ROSTER_LINES_LIMIT = 20_000;

const wholeNumber = z
  .string()
  .regex(/^\d{1,6}$/)
  .transform(Number);

/** A form's fields come as texts. */
export const RosterForm = ImportForm.pick({ file: true }).extend({
  /** The file is the whole roster: whoever is missing left on this date. Null: it is a part of it. */
  missingLeftOn: IsoDate.nullable().default(null),
  /** How many leave, as a person has confirmed. */
  confirmedLeavers: wholeNumber.nullable().default(null),
});

export const RosterPerson = z.object({
  employeeNumber: z.string(),
  name: z.string(),
  what: z.enum(["joins", "changes", "leaves"]),
  /** Of a joiner the date hired, of a leaver the last day, of a move the day from which it holds. */
  date: IsoDate.nullable(),
  /** Members of the record that change. */
  changes: z.array(z.enum(["name", "employer", "language", "job", "crew", "site", "hired-on"])),
});
export type RosterPerson = z.infer<typeof RosterPerson>;

export const RosterReport = z.object({
  isDryRun: z.boolean(),
  fileName: z.string(),
  lines: z.number(),
  joiners: z.number(),
  changed: z.number(),
  leavers: z.number(),
  unchanged: z.number(),
  /** Workers of the site who are there before. */
  present: z.number(),
  /** Why it has to be confirmed with the number of leavers; empty: nothing has. */
  asks: z.array(z.enum(["half-leave", "last-administrator-leaves"])),
  /** The first of those who join, change and leave. */
  people: z.array(RosterPerson),
  issues: z.array(ImportIssue),
  issuesCount: z.number(),
});
export type RosterReport = z.infer<typeof RosterReport>;
