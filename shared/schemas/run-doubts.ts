/** Field checks before and after a run may drift by this much (ISO 9612:2009, 12.2) before it is discarded or kept with a reason. */
export const FIELD_CHECK_TOLERANCE_DB = 0.5;

/** Beyond this no microphone has drifted: one of the two levels was read or typed wrongly. Common practice, no source. */
export const FIELD_CHECK_MISTYPED_DB = 5;

/** What acoustic calibrators emit (IEC 60942 prefers 94 dB; 104, 114 and 124 are usual beside it). */
export const CALIBRATOR_LEVELS_DB = [94, 104, 114, 124] as const;

/** The least that a sample of a task may last unless the task itself is shorter: ISO 9612:2009, 9.3, from memory. */
export const LEAST_SAMPLE_MIN = 5;

/** Binary fractions of tenths: 94.5 − 94.0 is not exactly 0.5. */
const EPSILON = 1e-9;

/** Why a run is refused for results unless an officer keeps it with a reason. */
export const RUN_DOUBTS = [
  "field-check-drift",
  "field-check-mistyped",
  "calibration-out-of-date",
  "calibration-failed",
  "run-too-short",
  "clipped",
  "under-range",
] as const;
export type RunDoubtCode = (typeof RUN_DOUBTS)[number];

export interface RunDoubt {
  readonly code: RunDoubtCode;
  readonly params: Readonly<Record<string, string | number>>;
}

/** What an instrument's laboratory said last before a date. */
export interface CalibrationState {
  /** ISO date until which the certificate holds; null: nobody has stated one. */
  readonly dueOn: string | null;
  /** ISO date of a calibration that it failed and that none has followed. */
  readonly failedOn: string | null;
}

export interface DoubtfulFacts {
  readonly checkBeforeDb: number | null;
  readonly checkAfterDb: number | null;
  /** ISO date of the run. */
  readonly date: string;
  readonly calibration: CalibrationState;
  /** Elapsed minutes; null while it is out. */
  readonly durationMin: number | null;
  /** What was planned, or the least that the standard asks for; null where nothing is asked of the run's length. */
  readonly leastMin: number | null;
  /** What the instrument itself showed. */
  readonly shown: readonly ("clipped" | "under-range")[];
}

export const fieldCheckDriftDb = (
  beforeDb: number | null,
  afterDb: number | null,
): number | null => (beforeDb === null || afterDb === null ? null : Math.abs(afterDb - beforeDb));

export const isWithinTolerance = (driftDb: number): boolean =>
  driftDb <= FIELD_CHECK_TOLERANCE_DB + EPSILON;

function checkDoubt(beforeDb: number | null, afterDb: number | null): RunDoubt | null {
  const driftDb = fieldCheckDriftDb(beforeDb, afterDb);
  if (driftDb !== null && driftDb > FIELD_CHECK_MISTYPED_DB + EPSILON)
    return {
      code: "field-check-mistyped",
      params: { beforeDb: beforeDb as number, afterDb: afterDb as number },
    };
  const strange = [beforeDb, afterDb].find(
    (levelDb) =>
      levelDb !== null &&
      CALIBRATOR_LEVELS_DB.every(
        (nominalDb) => Math.abs(levelDb - nominalDb) > FIELD_CHECK_MISTYPED_DB + EPSILON,
      ),
  );
  if (strange !== undefined && strange !== null)
    return { code: "field-check-mistyped", params: { levelDb: strange } };
  if (driftDb !== null && !isWithinTolerance(driftDb))
    return { code: "field-check-drift", params: { driftDb } };
  return null;
}

/** All that speaks against a run. None: it counts, under the standard's name. */
export function findRunDoubts(facts: DoubtfulFacts): RunDoubt[] {
  const { checkBeforeDb, checkAfterDb, date, calibration, durationMin, leastMin, shown } = facts;
  const found: RunDoubt[] = [];
  const check = checkDoubt(checkBeforeDb, checkAfterDb);
  if (check) found.push(check);
  if (calibration.failedOn !== null)
    found.push({ code: "calibration-failed", params: { failedOn: calibration.failedOn } });
  else if (calibration.dueOn !== null && calibration.dueOn < date)
    found.push({ code: "calibration-out-of-date", params: { dueOn: calibration.dueOn } });
  if (durationMin !== null && leastMin !== null && durationMin < leastMin - EPSILON)
    found.push({ code: "run-too-short", params: { durationMin, leastMin } });
  for (const code of shown) found.push({ code, params: {} });
  return found;
}
