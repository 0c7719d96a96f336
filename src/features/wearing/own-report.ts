import { z } from "zod";
import type { WearingRoundInput } from "../../../shared/schemas/wearing";

/** What somebody can say of themselves, as worn of this many looks: no memory is finer than quarters. */
const LOOKS = 4;
const WORN_OF_LOOKS = { always: 4, mostly: 3, half: 2, seldom: 1, never: 0 } as const;

export const ANSWERS = ["always", "mostly", "half", "seldom", "never"] as const;
export type Answer = (typeof ANSWERS)[number];

/** Answers by task, as the form holds them. */
export const OwnReportFields = z.object({
  answers: z
    .record(z.uuid(), z.enum(ANSWERS).nullable())
    .refine((answers) => Object.values(answers).some((answer) => answer !== null), {
      params: { code: "required" },
    }),
  note: z.string().trim().max(2000),
});

/** An own report as it is sent: tasks without an answer are left out. */
export function ownReport(
  { answers, note }: z.output<typeof OwnReportFields>,
  of: { siteId: string; workerId: string; date: string },
): WearingRoundInput {
  return {
    siteId: of.siteId,
    seenOn: of.date,
    source: "own-report",
    note,
    looks: Object.entries(answers).flatMap(([taskId, answer]) =>
      answer === null
        ? []
        : [
            {
              workerId: of.workerId,
              taskId,
              wornCount: WORN_OF_LOOKS[answer],
              seenCount: LOOKS,
            },
          ],
    ),
  };
}
