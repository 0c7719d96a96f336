import { z } from "zod";
import { Can, IsoDate, PageQuery, pageOf, Reason } from "./common";
import { NoticeState } from "./notice";

export const FINDING_KINDS = [
  "over-limit-outside",
  "over-limit-at-ear",
  "protects-too-little",
  "protects-too-much",
  "dual-protection",
  "no-protector",
  "not-worn-long-enough",
  "wearing-unknown",
  "peak-or-ceiling",
  "reading-gap",
  "time-not-accounted",
  "reading-missing",
  "instrument",
  "problem-reported",
  "fit-failed",
  "fit-due",
] as const;
export const FindingKind = z.enum(FINDING_KINDS);
export type FindingKind = z.infer<typeof FindingKind>;

export const FindingState = z.enum(["new", "in-hand", "done", "closed", "came-back"]);
export type FindingState = z.infer<typeof FindingState>;

/** The numbers of a day that a list row needs for its strip. */
export const DayFigures = z.object({
  resultId: z.uuid(),
  date: IsoDate,
  origin: z.enum(["computed", "imported"]),
  outsideDb: z.number().nullable(),
  outsideBound: z.enum(["exact", "upper", "lower"]),
  /** As it counts: active part off, unless the site credits it and this worker passed its check. */
  atEarDb: z.number().nullable(),
  /** With the part off, where `atEarDb` has it on. */
  atEarOffDb: z.number().nullable(),
  atEarBound: z.enum(["exact", "upper", "lower"]),
  atEarActiveDb: z.number().nullable(),
  atEarAsWorkedDb: z.number().nullable(),
  uncertaintyDb: z.number().nullable(),
  whileWornDb: z.number().nullable(),
  whileWornBound: z.enum(["exact", "upper", "lower"]),
  verdictOutside: z.enum(["under", "over", "cant-tell-yet", "not-assessed"]),
  verdictAtEar: z.enum(["under", "over", "cant-tell-yet", "not-assessed"]),
  word: z
    .enum(["too-little", "just-enough", "good", "strong-side", "too-much", "enough"])
    .nullable(),
  decidingTaskName: z.string().nullable(),
  hasProtector: z.enum(["yes", "no", "unknown"]),
  reason: z.string().nullable(),
  /** The worker's own target where it is stricter than the rule's, dB; why is on another page. */
  ownTargetDb: z.number().nullable(),
  ruleSetKey: z.string(),
  ruleSetVersion: z.number(),
  /** Every criterion of the governing rule set, from `criteria->'governing'`. */
  governingCriteria: z.array(
    z.object({
      criterionId: z.string(),
      verdict: z.enum(["under", "over", "cant-tell-yet", "not-assessed"]),
      isClear: z.boolean(),
      levelDb: z.number().nullable(),
      dosePct: z.number().nullable(),
      bound: z.enum(["exact", "upper", "lower"]),
      reason: z.string().nullable(),
    }),
  ),
});
export type DayFigures = z.infer<typeof DayFigures>;

/**
 * What a finding about what is worn comes to on the usual day that comes next: in order as things stand now, with the level
 * at the ear; or still at fault, with what would put that day right, as facts have it.
 */
const FindingToday = z.discriminatedUnion("is", [
  z.object({
    is: z.literal("in-order"),
    atEarDb: z.number().nullable(),
    word: DayFigures.shape.word,
  }),
  z.object({
    is: z.literal("asked"),
    proposal: z.object({ remedy: z.unknown(), left: z.unknown() }),
  }),
]);

/** What a supervisor said last as Can't. */
export const Cannot = z.object({ text: z.string(), byName: z.string(), at: z.string() });
export type Cannot = z.infer<typeof Cannot>;

export const FindingRow = z.object({
  id: z.uuid(),
  kind: FindingKind,
  state: FindingState,
  criterion: z.string(),
  useKey: z.string(),
  /** Codes and numbers from which the sentence is made. */
  facts: z.record(z.string(), z.unknown()),
  /** Null where its own facts are all that is known: it is not about what is worn, or waits for nobody. */
  today: FindingToday.nullable(),
  firstDate: IsoDate,
  lastDate: IsoDate,
  /** Days on which it showed; of a group the days of each worker. */
  daysCount: z.number(),
  /** Whose days they are: 1 unless it is a group's. */
  workersCount: z.number(),
  dueOn: IsoDate.nullable(),
  /** It rests on rules that no longer govern its site: the day from which others do. Null while they still do. */
  rulesUntil: IsoDate.nullable(),
  siteId: z.uuid(),
  worker: z.object({ id: z.uuid(), name: z.string(), employeeNumber: z.string() }).nullable(),
  /** The group, the instrument or the crew it concerns, in words. */
  subjectName: z.string().nullable(),
  crewName: z.string().nullable(),
  figures: DayFigures.nullable(),
  ownerName: z.string().nullable(),
  /** Overdue, to whom it was told; that mail may have come back undeliverable. */
  wentUp: z.object({ name: z.string(), on: IsoDate, hasBounced: z.boolean() }).nullable(),
  /** Null also for whoever can take no step. */
  cannot: Cannot.nullable(),
  revision: z.number(),
  can: Can("handle", "markDone", "comment"),
});
export type FindingRow = z.infer<typeof FindingRow>;
export const FindingPage = pageOf(FindingRow);

export const FindingFilter = PageQuery.extend({
  state: z.enum(["open", "closed", "all", "done"]).default("open"),
  siteId: z.uuid().optional(),
  workerId: z.uuid().optional(),
  kind: FindingKind.optional(),
});

export const FindingStep = z.object({
  id: z.uuid(),
  kind: z.enum([
    "state",
    "comment",
    "marked-done",
    "cannot",
    "evidence-gone",
    "rules-changed",
    "handed-over",
    "escalated",
    "undone",
  ]),
  fromState: FindingState.nullable(),
  toState: FindingState.nullable(),
  text: z.string().nullable(),
  authorName: z.string().nullable(),
  at: z.string(),
});

export const FindingView = FindingRow.extend({
  closingReason: z.string().nullable(),
  closedOn: IsoDate.nullable(),
  previousId: z.uuid().nullable(),
  steps: z.array(FindingStep),
  evidence: z.array(DayFigures.extend({ worker: z.object({ id: z.uuid(), name: z.string() }) })),
  told: z.array(
    z.object({
      noticeId: z.uuid(),
      name: z.string(),
      audience: z.string(),
      state: NoticeState,
      at: z.string().nullable(),
    }),
  ),
  /** Why nobody is told; null where somebody is. */
  untold: z.enum(["not-by-mail", "corrected", "long-ago", "no-address"]).nullable(),
  /** Its site names somebody to whom it goes up once it is overdue. */
  goesUp: z.boolean(),
});
export type FindingView = z.infer<typeof FindingView>;

/** One step in a finding's life. Closing needs a reason; a comment alone changes no state. */
export const FindingStepInput = z.discriminatedUnion("kind", [
  z.object({ kind: z.literal("take-in-hand"), dueOn: IsoDate.nullable().default(null) }),
  /** To an officer or a supervisor of the site. */
  z.object({
    kind: z.literal("hand-over"),
    ownerId: z.uuid(),
    dueOn: IsoDate.nullable().default(null),
  }),
  z.object({ kind: z.literal("mark-done"), text: z.string().trim().max(2000).default("") }),
  z.object({ kind: z.literal("cannot"), text: Reason }),
  z.object({ kind: z.literal("reopen"), text: Reason }),
  z.object({ kind: z.literal("close"), text: Reason }),
  /** Takes back one's own Mark done or Can't, moments after it; it closes and reopens nothing. */
  z.object({ kind: z.literal("undo") }),
  z.object({ kind: z.literal("comment"), text: z.string().trim().min(1).max(10_000) }),
]);
export type FindingStepInput = z.infer<typeof FindingStepInput>;

export const ProblemReportInput = z.object({ text: z.string().trim().min(3).max(2000) });
