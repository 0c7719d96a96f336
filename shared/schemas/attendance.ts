import { z } from "zod";
import { IsoDate } from "./common";

/** Somebody is not in from a day to a day. Why is nobody's business here. */
export const AbsenceInput = z.object({
  workerId: z.uuid(),
  fromDate: IsoDate,
  /** The last day; null: not known yet. */
  toDate: IsoDate.nullable().default(null),
});
export type AbsenceInput = z.infer<typeof AbsenceInput>;

/** A worker lent to another crew of the site; a loan has a last day. */
export const LoanInput = z.object({
  workerId: z.uuid(),
  crewId: z.uuid(),
  fromDate: IsoDate,
  toDate: IsoDate,
});
export type LoanInput = z.infer<typeof LoanInput>;

const Person = z.object({ id: z.uuid(), name: z.string() });
const Span = {
  id: z.uuid(),
  worker: Person,
  fromDate: IsoDate,
  toDate: IsoDate.nullable(),
  revision: z.number(),
  /** Whether it can be ended or taken back from this crew. */
  canChange: z.boolean(),
};

/** Who of a crew is not in, and who is lent to whom: today and to come. */
export const AttendanceView = z.object({
  crew: z.object({ id: z.uuid(), name: z.string(), timeZone: z.string() }),
  today: IsoDate,
  members: z.array(Person.extend({ isLoan: z.boolean() })),
  absences: z.array(z.object(Span)),
  /** Lent by this crew, and lent to it. */
  loans: z.array(z.object({ ...Span, way: z.enum(["out", "in"]), crewName: z.string() })),
  /** Other crews of the site, by name only. */
  otherCrews: z.array(Person),
});
export type AttendanceView = z.infer<typeof AttendanceView>;
