import { z } from "zod";
import { LevelDb } from "../../../shared/schemas/common";
import { OctaveBands } from "../../../shared/schemas/evaluation";
import type { SampleInput } from "../../../shared/schemas/outing";
import { atLocalTime, localDate } from "../../../shared/time/zone";

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
    /** ISO instant at which the timer was started; null: as long ago as it lasted. */
    startedAt: z.string().nullable(),
    /** Day and time of day at the site, of a sample that is typed in later. */
    takenOn: z.string().nullable(),
    takenFrom: z.string().nullable(),
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
    if (context.value.takenOn !== null && context.value.takenFrom === null)
      context.issues.push({
        code: "custom",
        input: context.value,
        path: ["takenFrom"],
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
  takenOn: null,
  takenFrom: null,
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
    isDoubtful,
  }: {
    startedAt: string;
    surveyId: string | null;
    timeZone: string;
    fileIds: readonly string[];
    /** Something speaks against it: a reason that outlived its doubt is not sent. */
    isDoubtful: boolean;
  },
): SampleInput {
  const { isClipped, isUnderRange, peakDb, takenOn: _, takenFrom: __, ...rest } = values;
  return {
    ...rest,
    surveyId,
    taskId: values.taskId as string,
    instrumentId: values.instrumentId as string,
    durationMin: values.durationMin as number,
    levelDb: values.levelDb as number,
    place: orNull(values.place),
    keptReason: isDoubtful ? orNull(values.keptReason) : null,
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

/**
 * When a sample began: as typed, by its timer, or as long ago as it lasted. Null where nothing says; a clock that was set
 * while it ran is named.
 */
export function startOf(
  { takenOn, takenFrom, startedAt, durationMin }: SampleStart,
  now: Date,
  timeZone: string,
): { kind: "at"; instant: string } | { kind: "twice" | "skipped" } | null {
  if (typeof takenFrom === "string") {
    const date = typeof takenOn === "string" ? takenOn : localDate(now, timeZone);
    const found = atLocalTime(date, takenFrom, timeZone);
    return found.kind === "one"
      ? { kind: "at", instant: found.instant.toISOString() }
      : { kind: found.kind };
  }
  if (startedAt !== null) return { kind: "at", instant: startedAt };
  if (typeof durationMin !== "number") return null;
  return {
    kind: "at",
    instant: new Date(now.getTime() - durationMin * 60_000).toISOString(),
  };
}
type SampleStart = Pick<SampleValues, "startedAt"> &
  Record<"takenOn" | "takenFrom" | "durationMin", unknown>;

/** Something was measured that is not saved yet. */
export const hasFigures = ({
  levelDb,
  durationMin,
  startedAt,
}: Pick<SampleValues, "levelDb" | "durationMin" | "startedAt">): boolean =>
  [levelDb, durationMin, startedAt].some((value) => value !== null);
