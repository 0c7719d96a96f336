import { z } from "zod";
import { Can, IsoDate, Name, PageQuery, pageOf } from "./common";
import { DayFigures, FindingKind, FindingState } from "./finding";
import { LetterState } from "./letter";
import { NoticeState } from "./notice";

/** Records drawn at most at once: all of them stand on one page. */
export const MOST_DRAWN = 50;

/**
 * A random draw of a site's year. Drawn are the day results in force: each is put in order by the SHA-256 of the seed, a
 * space and the result's id, and the first so many are taken. The same seed over the same results draws the same again.
 */
export const DrawInput = z.object({
  siteId: z.uuid(),
  year: z.number().int().min(1970).max(2200),
  seed: Name(100),
  size: z.number().int().min(1).max(MOST_DRAWN),
});
export type DrawInput = z.infer<typeof DrawInput>;

export const MarkWord = z.enum(["in-order", "question"]);
export type MarkWord = z.infer<typeof MarkWord>;

/** A question says what is asked. */
export const MarkInput = z
  .object({
    position: z.number().int().min(1).max(MOST_DRAWN),
    word: MarkWord,
    note: z.string().trim().max(2000).default(""),
  })
  .check(({ value, issues }) => {
    if (value.word === "question" && value.note.length < 3)
      issues.push({
        code: "too_small",
        origin: "string",
        minimum: 3,
        inclusive: true,
        path: ["note"],
        input: value.note,
      });
  });
export type MarkInput = z.infer<typeof MarkInput>;

export const DrawRow = z.object({
  id: z.uuid(),
  siteId: z.uuid(),
  year: z.number(),
  seed: z.string(),
  records: z.number(),
  marked: z.number(),
  questions: z.number(),
  /** Results in force when it was drawn, and the SHA-256 of their ids in order, one a line. */
  drawnFrom: z.number(),
  drawnFromSha256: z.string(),
  authorName: z.string(),
  drawnAt: z.string(),
  signed: z.object({ by: z.string(), at: z.string() }).nullable(),
  /** One more with every mark and with the signature. */
  revision: z.number(),
  can: Can("mark"),
});
export type DrawRow = z.infer<typeof DrawRow>;
export const DrawPage = pageOf(DrawRow);
export const DrawFilter = PageQuery.extend({
  siteId: z.uuid(),
  year: z.coerce.number().int().min(1970).max(2200),
});

/** One record's whole line, from what it rests on to what came of it. */
export const DrawnRecord = z.object({
  position: z.number(),
  worker: z.object({ id: z.uuid(), name: z.string(), employeeNumber: z.string() }),
  figures: DayFigures,
  grade: z.string(),
  methodVersion: z.number(),
  computedAt: z.string(),
  /** Another result has taken its place since. */
  isCurrent: z.boolean(),
  runs: z.array(
    z.object({
      id: z.uuid(),
      date: IsoDate,
      instrumentName: z.string(),
      durationMin: z.number(),
      checkBeforeDb: z.number().nullable(),
      checkAfterDb: z.number().nullable(),
      keptReason: z.string().nullable(),
    }),
  ),
  levels: z.array(z.object({ taskId: z.uuid(), taskName: z.string(), from: IsoDate })),
  notices: z.array(
    z.object({
      id: z.uuid(),
      name: z.string(),
      state: NoticeState,
      at: z.string().nullable(),
    }),
  ),
  letters: z.array(z.object({ id: z.uuid(), state: LetterState, dueOn: IsoDate })),
  findings: z.array(z.object({ id: z.uuid(), kind: FindingKind, state: FindingState })),
  mark: z
    .object({ word: MarkWord, note: z.string(), authorName: z.string(), at: z.string() })
    .nullable(),
});
export type DrawnRecord = z.infer<typeof DrawnRecord>;

export const DrawView = DrawRow.extend({
  timeZone: z.string(),
  siteName: z.string(),
  rows: z.array(DrawnRecord),
});
export type DrawView = z.infer<typeof DrawView>;
