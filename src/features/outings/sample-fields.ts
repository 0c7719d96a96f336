import { z } from "zod";
import { LevelDb } from "../../../shared/schemas/common";
import { OctaveBands } from "../../../shared/schemas/evaluation";
import type { SampleInput } from "../../../shared/schemas/outing";
import { localDate } from "../../../shared/time/zone";

const level = z.number().min(20).max(180).nullable();
const check = z.number().min(70).max(130).nullable();
const needed = <Schema extends z.ZodType>(schema: Schema) => schema.nullable();

/** The form's own shape: what is not typed yet is null, and refused when it is sent. */
export const SampleFields = z
  .object({
    taskId: needed(z.uuid()),
    instrumentId: needed(z.uuid()),
    workerId: z.uuid().nullable(),
    place: z.string().nullable(),
    /** ISO instant; null: as long ago as it lasted. */
    startedAt: z.string().nullable(),
    durationMin: needed(z.number().positive().max(1440)),
    levelDb: needed(LevelDb),
    lceqDb: level,
    lasMaxDb: level,
    peakDb: z.number().min(40).max(200).nullable(),
    octaveBandsDb: OctaveBands.nullable(),
    checkBeforeDb: check,
    checkAfterDb: check,
    isClipped: z.boolean(),
    isUnderRange: z.boolean(),
    keptReason: z.string().nullable(),
    unusual: z.string().nullable(),
  })
  .check((context) => {
    for (const name of ["levelDb", "durationMin", "taskId", "instrumentId"] as const)
      if (context.value[name] === null)
        context.issues.push({
          code: "custom",
          input: context.value,
          path: [name],
          params: { code: "required" },
        });
  });
export type SampleValues = z.infer<typeof SampleFields>;

export const emptySample: SampleValues = {
  taskId: null,
  instrumentId: null,
  workerId: null,
  place: null,
  startedAt: null,
  durationMin: null,
  levelDb: null,
  lceqDb: null,
  lasMaxDb: null,
  peakDb: null,
  octaveBandsDb: null,
  checkBeforeDb: null,
  checkAfterDb: null,
  isClipped: false,
  isUnderRange: false,
  keptReason: null,
  unusual: null,
};

const orNull = (text: string | null): string | null =>
  text === null || text.trim() === "" ? null : text.trim();

/** What is sent of a filled-in form. */
export function toSampleInput(
  values: SampleValues,
  {
    startedAt,
    surveyId,
    timeZone,
    fileIds,
  }: { startedAt: string; surveyId: string | null; timeZone: string; fileIds: readonly string[] },
): SampleInput {
  const { isClipped, isUnderRange, peakDb, ...rest } = values;
  return {
    ...rest,
    surveyId,
    taskId: values.taskId as string,
    instrumentId: values.instrumentId as string,
    durationMin: values.durationMin as number,
    levelDb: values.levelDb as number,
    place: orNull(values.place),
    keptReason: orNull(values.keptReason),
    unusual: orNull(values.unusual),
    startedAt,
    date: localDate(new Date(startedAt), timeZone),
    peak: peakDb === null ? null : { levelDb: peakDb, weighting: "C" },
    doubts: [
      ...(isClipped ? (["clipped"] as const) : []),
      ...(isUnderRange ? (["under-range"] as const) : []),
    ],
    fileIds: [...fileIds],
  };
}

/** A sample of which only the length was typed ended just now. */
export const startOf = (durationMin: number, now: Date): string =>
  new Date(now.getTime() - durationMin * 60_000).toISOString();
