import { z } from "zod";
import { Reason } from "../../../shared/schemas/common";
import { Settings, Weighting } from "../../../shared/schemas/evaluation";
import { RunCorrection, RunInput, type RunView } from "../../../shared/schemas/run";
import { fieldCheckDriftDb, isWithinTolerance } from "../../../shared/schemas/run-doubts";

const figure = z.number().nullable();

const ReadingFields = z.object({
  settings: Settings,
  dosePct: figure,
  averageDb: figure,
  lceqDb: figure,
  lasMaxDb: figure,
  peakDb: figure,
  peakWeighting: Weighting,
});

/** The form's own shape: a peak is two fields, and what is recorded once stands beside what may be corrected. */
const Fields = z.object({
  instrumentId: z.string(),
  workerId: z.string().nullable(),
  date: z.string().nullable(),
  durationMin: figure,
  checkBeforeDb: figure,
  checkAfterDb: figure,
  covers: z.enum(["shift", "projected", "part"]),
  keptReason: z.string().nullable(),
  unusual: z.string().nullable(),
  readings: z.array(ReadingFields),
  reason: z.string().nullable(),
});
export type RunFormValues = z.infer<typeof Fields>;

const orNull = (text: string | null): string | null =>
  text === null || text.trim() === "" ? null : text;

function factsOf(values: RunFormValues) {
  return {
    durationMin: values.durationMin as number,
    checkBeforeDb: values.checkBeforeDb,
    checkAfterDb: values.checkAfterDb,
    covers: values.covers,
    keptReason: orNull(values.keptReason),
    unusual: orNull(values.unusual),
    readings: values.readings.map(({ peakDb, peakWeighting, ...reading }) => ({
      ...reading,
      peak: peakDb === null ? null : { levelDb: peakDb, weighting: peakWeighting },
    })),
  };
}

export const toRunInput = (values: RunFormValues) => ({
  ...factsOf(values),
  instrumentId: values.instrumentId,
  workerId: values.workerId as string,
  date: values.date as string,
  shiftId: null,
});

export const toRunCorrection = (values: RunFormValues) => ({
  ...factsOf(values),
  reason: values.reason ?? "",
  isVoid: false,
});

/** Where an issue of the server's shape stands in the form. */
const fieldOf = (path: readonly PropertyKey[]): PropertyKey[] => {
  const [first, index, name] = path;
  if (first !== "readings" || name !== "peak") return [...path];
  return [first, index as number, path[3] === "weighting" ? "peakWeighting" : "peakDb"];
};

type Shape = { value: RunFormValues; issues: unknown[] };

/** Holds the form to the schema that the server uses. */
function heldTo(
  schema: typeof RunInput | typeof RunCorrection,
  toBody: (values: RunFormValues) => unknown,
) {
  return ({ value, issues }: Shape) => {
    const parsed = schema.safeParse(toBody(value));
    for (const issue of parsed.error?.issues ?? [])
      issues.push({ ...issue, input: value, path: fieldOf(issue.path) });
  };
}

export const NewRunFields = Fields.check((context) =>
  heldTo(RunInput, toRunInput)(context as unknown as Shape),
);
export const CorrectRunFields = Fields.check((context) =>
  heldTo(RunCorrection, toRunCorrection)(context as unknown as Shape),
);

export const StrikeFields = z.object({ reason: Reason });

export const emptyReading = (
  settings: RunFormValues["readings"][number]["settings"],
): RunFormValues["readings"][number] => ({
  settings,
  dosePct: null,
  averageDb: null,
  lceqDb: null,
  lasMaxDb: null,
  peakDb: null,
  peakWeighting: "C",
});

export const valuesOfRun = (run: RunView): RunFormValues => ({
  instrumentId: run.instrumentId,
  workerId: run.workerId,
  date: run.date,
  durationMin: run.durationMin,
  checkBeforeDb: run.checkBeforeDb,
  checkAfterDb: run.checkAfterDb,
  covers: run.covers,
  keptReason: run.keptReason,
  unusual: run.unusual,
  readings: run.readings.map(({ peak, ...reading }) => ({
    ...reading,
    peakDb: peak?.levelDb ?? null,
    peakWeighting: peak?.weighting ?? "C",
  })),
  reason: null,
});

const asNumber = (value: unknown): number | null => (typeof value === "number" ? value : null);

export const driftDb = (before: unknown, after: unknown): number | null =>
  fieldCheckDriftDb(asNumber(before), asNumber(after));

export const isDriftTooLarge = (drift: number | null): boolean =>
  drift !== null && !isWithinTolerance(drift);
