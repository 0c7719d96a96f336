/** Field checks before and after a run may drift by this much (ISO 9612:2009, 12.2) before it is discarded or kept with a reason. */
export const FIELD_CHECK_TOLERANCE_DB = 0.5;

/** Beyond this no microphone has drifted: one of the two levels was read or typed wrongly. Common practice, no source. */
export const FIELD_CHECK_MISTYPED_DB = 5;

/** What acoustic calibrators emit (IEC 60942 prefers 94 dB; 104, 114 and 124 are usual beside it). */
export const CALIBRATOR_LEVELS_DB = [94, 104, 114, 124] as const;

/** The least that a sample of a task may last unless the task itself is shorter: ISO 9612:2009, 9.3, from memory. */
export const LEAST_SAMPLE_MIN = 5;

/**
 * A run that covers the shift lasts at least this share of it: what is missing then takes off 0.5 dB at most (10 lg 0.9),
 * no more than field checks may drift. No source.
 */
export const SHIFT_COVERED_SHARE = 0.9;

/** Binary fractions of tenths: 94.5 − 94.0 is not exactly 0.5. */
const EPSILON = 1e-9;

/** Why a run is refused for results unless an officer keeps it with a reason. */
export const RUN_DOUBTS = [
  "field-check-drift",
  "field-check-mistyped",
  "field-check-missing",
  "calibration-out-of-date",
  "calibration-failed",
  "run-too-short",
  "outside-shift",
  "shorter-than-shift",
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

/** The shift that a run speaks for: as recorded, or the crew's usual one. */
export interface FacedShift {
  /** Local times, "14:00". */
  readonly from: string;
  readonly to: string;
  /** Elapsed minutes. */
  readonly shiftMin: number;
  /** Minutes of the run that lie in it; null where only the run's length is known. */
  readonly insideMin: number | null;
  /** Minutes by which the run begins after the shift does, and ends after it; less than 0: before. */
  readonly startOffMin?: number | null;
  readonly endOffMin?: number | null;
}

export interface DoubtfulFacts {
  /** Field checks belong to the run: a sample, or an instrument that went out. */
  readonly needsChecks: boolean;
  readonly checkBeforeDb: number | null;
  readonly checkAfterDb: number | null;
  /** ISO date of the run. */
  readonly date: string;
  readonly calibration: CalibrationState;
  /** Elapsed minutes; null while it is out. */
  readonly durationMin: number | null;
  /** What was planned, or the least that the standard asks for; null where nothing is asked of the run's length. */
  readonly leastMin: number | null;
  readonly covers: "shift" | "projected" | "part";
  /** Null where no shift is known. */
  readonly shift: FacedShift | null;
  /** What is left out of the run's history, minutes; absent or null: nothing. */
  readonly leftOut?: {
    readonly minutes: number;
    /** Somebody says how it was. */
    readonly isKnown: boolean;
    /** The run's minutes have it in them. */
    readonly isInDuration: boolean;
  } | null;
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

/** Whether a run that governs the day lies in its shift, and covers as much of it as it says. */
export function shiftDoubt({
  covers,
  shift,
  durationMin,
  leftOut = null,
}: Pick<DoubtfulFacts, "covers" | "shift" | "durationMin" | "leftOut">): RunDoubt | null {
  if (shift === null || durationMin === null || covers === "part") return null;
  const { from, to, shiftMin, insideMin } = shift;
  if (insideMin === 0) return { code: "outside-shift", params: { from, to } };
  const wholeMin = durationMin + (leftOut === null || leftOut.isInDuration ? 0 : leftOut.minutes);
  // Time left out of which nothing is known covers nothing.
  const unknownMin = leftOut === null || leftOut.isKnown ? 0 : leftOut.minutes;
  const coveredMin = Math.max(0, Math.min(wholeMin, insideMin ?? wholeMin) - unknownMin);
  return covers === "shift" && coveredMin < SHIFT_COVERED_SHARE * shiftMin - EPSILON
    ? { code: "shorter-than-shift", params: { coveredMin, shiftMin } }
    : null;
}

/** A run that is off its shift by no more than this at an end was put on or taken off in the ordinary way. No source. */
export const ORDINARILY_OFF_MIN = 10;

/** At one end a part of the shift is missing, at the other the run goes on beyond it. */
const isOffset = ({ startOffMin = null, endOffMin = null }: FacedShift): boolean =>
  startOffMin !== null &&
  endOffMin !== null &&
  Math.min(Math.abs(startOffMin), Math.abs(endOffMin)) > ORDINARILY_OFF_MIN &&
  Math.sign(startOffMin) === Math.sign(endOffMin);

/** What a run most likely covers; null where no shift is known to judge by, or where its clock may be wrong. */
export function likelyCovers(
  shift: FacedShift | null,
  durationMin: number,
): DoubtfulFacts["covers"] | null {
  if (shift === null) return null;
  if (shift.insideMin !== 0 && isOffset(shift)) return null;
  return shiftDoubt({ covers: "shift", shift, durationMin }) === null ? "shift" : "part";
}

/** All that speaks against a run. None: it counts, under the standard's name. */
export function findRunDoubts(facts: DoubtfulFacts): RunDoubt[] {
  const { checkBeforeDb, checkAfterDb, date, calibration, durationMin, leastMin, shown } = facts;
  const found: RunDoubt[] = [];
  const check = checkDoubt(checkBeforeDb, checkAfterDb);
  if (check) found.push(check);
  // Before the end of a run its second check can't be missed.
  else if (
    facts.needsChecks &&
    durationMin !== null &&
    [checkBeforeDb, checkAfterDb].includes(null)
  )
    found.push({ code: "field-check-missing", params: {} });
  if (calibration.failedOn !== null)
    found.push({ code: "calibration-failed", params: { failedOn: calibration.failedOn } });
  else if (calibration.dueOn !== null && calibration.dueOn < date)
    found.push({ code: "calibration-out-of-date", params: { dueOn: calibration.dueOn } });
  if (durationMin !== null && leastMin !== null && durationMin < leastMin - EPSILON)
    found.push({ code: "run-too-short", params: { durationMin, leastMin } });
  const ofShift = shiftDoubt(facts);
  if (ofShift) found.push(ofShift);
  for (const code of shown) found.push({ code, params: {} });
  return found;
}
