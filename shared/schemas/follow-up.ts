import { z } from "zod";
import { IsoDate, Name, Reason } from "./common";
import { DayFigures } from "./finding";

/** Kinds of control, in the order in which they are to be tried (hierarchy of controls). */
export const CONTROLS = ["eliminate", "substitute", "engineer", "organise", "protect"] as const;
export const Control = z.enum(CONTROLS);
export type Control = z.infer<typeof Control>;

const MeasureFacts = z.object({
  control: Control,
  what: Reason,
  ownerId: z.uuid().nullable().default(null),
  /** By when it is to be done. */
  plannedOn: IsoDate.nullable().default(null),
  doneOn: IsoDate.nullable().default(null),
});

/** What would mend a finding for good: planned for a day, or done on one. */
export const MeasureInput = MeasureFacts.check((context) => {
  const { plannedOn, doneOn } = context.value;
  if (plannedOn === null && doneOn === null)
    context.issues.push({
      code: "custom",
      input: plannedOn,
      path: ["plannedOn"],
      params: { code: "measure-without-date" },
    });
});
export type MeasureInput = z.infer<typeof MeasureInput>;

export const MeasureStrike = z.object({ reason: Reason });

export const MeasureView = MeasureFacts.extend({
  id: z.uuid(),
  findingId: z.uuid(),
  ownerName: z.string().nullable(),
  struckReason: z.string().nullable(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
  revision: z.number(),
});
export type MeasureView = z.infer<typeof MeasureView>;

export const FindingFileInput = z.object({ fileId: z.uuid(), title: Name(200) });
export type FindingFileInput = z.infer<typeof FindingFileInput>;
export const FindingFileRemoval = z.object({ reason: Reason });
export const FindingFileView = z.object({
  id: z.uuid(),
  fileId: z.uuid(),
  title: z.string(),
  fileName: z.string(),
  sizeBytes: z.number(),
  authorName: z.string().nullable(),
  createdAt: z.string(),
});
export type FindingFileView = z.infer<typeof FindingFileView>;

/** One run that says whether a finding can be trusted. */
export const TrustRun = z.object({
  runId: z.uuid(),
  /** The day's own, whose reading is in the result; else one of its tasks. */
  isOfTheDay: z.boolean(),
  taskName: z.string().nullable(),
  workerName: z.string().nullable(),
  date: IsoDate,
  averageDb: z.number().nullable(),
  exchangeRateDb: z.number().nullable(),
  checkBeforeDb: z.number().nullable(),
  checkAfterDb: z.number().nullable(),
  doubts: z.array(z.string()),
  keptReason: z.string().nullable(),
  unusual: z.string().nullable(),
});
export type TrustRun = z.infer<typeof TrustRun>;

/** Measured days on one side of the day on which the first measure was done. */
const ProofSide = z.object({
  days: z.number(),
  /** Of the days without protection, dB. */
  medianOutsideDb: z.number().nullable(),
  lowestOutsideDb: z.number().nullable(),
  highestOutsideDb: z.number().nullable(),
  /** Of the same days at the ear, dB; null where none says it exactly. */
  lowestAtEarDb: z.number().nullable(),
  highestAtEarDb: z.number().nullable(),
  latest: z.array(DayFigures.extend({ worker: z.object({ id: z.uuid(), name: z.string() }) })),
});

/** What hangs on a finding beside its days. */
export const FollowUpView = z.object({
  /** What the result rests on; null where no result stands behind the finding. */
  grade: z.enum(["measured-worker", "measured-group", "task-level", "estimate"]).nullable(),
  runs: z.array(TrustRun),
  measures: z.array(MeasureView),
  /** Null until a measure is done. */
  proof: z.object({ doneOn: IsoDate, before: ProofSide, after: ProofSide }).nullable(),
  files: z.array(FindingFileView),
  /** Who may be handed the finding or a measure; none for whoever hands out nothing. */
  owners: z.array(z.object({ id: z.uuid(), name: z.string() })),
});
export type FollowUpView = z.infer<typeof FollowUpView>;

/** Whom overdue findings of a site go up to. */
export const EscalationInput = z.object({ userId: z.uuid().nullable() });
export type EscalationInput = z.infer<typeof EscalationInput>;
export const EscalationView = z.object({
  siteId: z.uuid(),
  siteName: z.string(),
  userId: z.uuid().nullable(),
  userName: z.string().nullable(),
  /** Who reads the site's findings and has an address for mail. */
  people: z.array(z.object({ id: z.uuid(), name: z.string() })),
  revision: z.number(),
  canChange: z.boolean(),
});
export type EscalationView = z.infer<typeof EscalationView>;
export const EscalationList = z.object({ rows: z.array(EscalationView) });
