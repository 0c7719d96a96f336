import { z } from "zod";
import type { WearingRoundInput } from "../../../shared/schemas/wearing";
import { ANSWER_LOOKS, ANSWERS, WORN_OF_ANSWER } from "../../lib/wearing-answers";

/** Answers by task, as the form holds them. Without any, the fault is the first task's. */
export const OwnReportFields = z.object({
  answers: z.record(z.uuid(), z.enum(ANSWERS).nullable()).superRefine((answers, context) => {
    const [first] = Object.keys(answers);
    if (first !== undefined && Object.values(answers).every((answer) => answer === null))
      context.addIssue({ code: "custom", path: [first], params: { code: "answer-needed" } });
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
              wornCount: WORN_OF_ANSWER[answer],
              seenCount: ANSWER_LOOKS,
            },
          ],
    ),
  };
}
