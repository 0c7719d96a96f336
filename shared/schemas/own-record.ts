import { z } from "zod";
import { IsoDate } from "./common";

/** How long tasks of the nominal day may last today, where all that it rests on is certain. Left out: other tasks, and those that may last the whole shift. */
export const TaskTimes = z.object({
  rows: z.array(
    z.object({
      taskId: z.uuid(),
      taskName: z.string(),
      /** Whole steps of 5 min, rounded down; 0: not even 5 min. */
      allowedMin: z.number().int().min(0),
      /** It counts a protector, as it fits this worker. */
      isWorn: z.boolean(),
      measuredOn: IsoDate,
    }),
  ),
});
export type TaskTimes = z.infer<typeof TaskTimes>;
