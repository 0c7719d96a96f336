import { z } from "zod";
import { Can, IsoDate, Name, TimeOfDay } from "./common";
import { DayFigures, FindingRow } from "./finding";

export const CrewInput = z.object({
  siteId: z.uuid(),
  name: Name(120),
  usualStart: TimeOfDay,
  usualLengthMin: z.number().int().min(1).max(1440),
  isArchived: z.boolean().default(false),
});
export type CrewInput = z.infer<typeof CrewInput>;

const Dated = { fromDate: IsoDate, toDate: IsoDate.nullable() };
export const MembershipInput = z.object({
  workerId: z.uuid(),
  fromDate: IsoDate,
  toDate: IsoDate.nullable().default(null),
  isLoan: z.boolean().default(false),
});
export const SupervisorInput = z.object({
  userId: z.uuid(),
  fromDate: IsoDate,
  toDate: IsoDate.nullable().default(null),
});
export const DatedEnd = z.object({ toDate: IsoDate });

export const CrewView = CrewInput.extend({
  id: z.uuid(),
  siteName: z.string(),
  membersToday: z.number(),
  supervisorNames: z.array(z.string()),
  revision: z.number(),
  can: Can("change", "enterDay"),
});
export type CrewView = z.infer<typeof CrewView>;
export const CrewList = z.object({ rows: z.array(CrewView) });
export const CrewDetail = CrewView.extend({
  memberships: z.array(
    z.object({
      id: z.uuid(),
      workerId: z.uuid(),
      workerName: z.string(),
      employeeNumber: z.string(),
      isLoan: z.boolean(),
      ...Dated,
    }),
  ),
  supervisors: z.array(
    z.object({ id: z.uuid(), userId: z.uuid(), userName: z.string(), ...Dated }),
  ),
});
export type CrewDetail = z.infer<typeof CrewDetail>;

/** Who may be given a crew of a site: people with the role there, by name only. */
export const SupervisorNameList = z.object({
  rows: z.array(z.object({ id: z.uuid(), name: z.string() })),
});
export const SupervisorNameQuery = z.object({ siteId: z.uuid() });

/** One worker on the Crew sheet. */
export const CrewSheetRow = z.object({
  worker: z.object({
    id: z.uuid(),
    name: z.string(),
    employeeNumber: z.string(),
    employer: z.enum(["own", "agency", "contractor"]),
    employerName: z.string().nullable(),
  }),
  isAbsent: z.boolean(),
  isLoan: z.boolean(),
  /** On loan to this crew: by which one, and until when. */
  lentBy: z.object({ crewName: z.string().nullable(), untilDate: IsoDate.nullable() }).nullable(),
  /** With another crew that day: expected there and not here. */
  lentTo: z.object({ crewName: z.string(), untilDate: IsoDate.nullable() }).nullable(),
  figures: DayFigures.nullable(),
  /** The one order for this worker today, and the finding it comes from. */
  order: z
    .object({
      findingId: z.uuid(),
      kind: FindingRow.shape.kind,
      state: FindingRow.shape.state,
      facts: z.record(z.string(), z.unknown()),
      /** The latest day that its finding rests on; null: the facts are of the day expected. */
      ofDate: IsoDate.nullable(),
      /** It rests on rules that no longer govern the site: the day from which others do. */
      rulesUntil: FindingRow.shape.rulesUntil,
      cannot: FindingRow.shape.cannot,
      revision: z.number(),
      canMarkDone: z.boolean(),
    })
    .nullable(),
  /** What the expected day asks for though no finding is open on it: nobody marks it done, it goes once the day is right. */
  ahead: z
    .object({ kind: FindingRow.shape.kind, facts: z.record(z.string(), z.unknown()) })
    .nullable(),
});
export type CrewSheetRow = z.infer<typeof CrewSheetRow>;

export const CrewSheetView = z.object({
  crew: z.object({
    id: z.uuid(),
    name: z.string(),
    siteId: z.uuid(),
    usualStart: z.string(),
    usualLengthMin: z.number(),
    timeZone: z.string(),
  }),
  crews: z.array(z.object({ id: z.uuid(), name: z.string() })),
  governingRuleSet: z.string(),
  ruleSetVersion: z.number(),
  expected: z.object({ date: IsoDate, rows: z.array(CrewSheetRow) }),
  last: z.object({ date: IsoDate.nullable(), rows: z.array(CrewSheetRow) }),
  /** Given to whoever reads this, and not acknowledged yet. */
  handOver: z.object({ id: z.uuid(), byName: z.string(), givenAt: z.string() }).nullable(),
});
export type CrewSheetView = z.infer<typeof CrewSheetView>;
