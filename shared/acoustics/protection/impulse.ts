import type { Protection, RuleSetVersion, TaskLevel } from "../types";
import { combinationAttenuationDb } from "./bone-conduction";
import { hmlOfBandsDb } from "./octave-band";
import { clampAttenuation } from "./single-number";

export type ImpulseType = 1 | 2 | 3;

/** What H, M or L gives up against an impulse of a type, dB. @source en-458 Annex B */
const LESS_DB: Readonly<Record<ImpulseType, number>> = { 1: 5, 2: 5, 3: 0 };

/** What a protector takes off a C-weighted peak, and what that is made of, dB. */
export interface PeakReduction {
  readonly type: ImpulseType;
  /** L, M or H, by the type. */
  readonly ratingDb: number;
  readonly lessDb: number;
  readonly allowanceDb: number;
  readonly reductionDb: number;
  readonly wasClamped: boolean;
}

/**
 * What a protector takes off the C-weighted peak of an impulse noise, dB, by the modified SNR approach: L − 5 for type 1
 * (mostly low frequencies), M − 5 for type 2 (middle and high), H for type 3 (high). Of two worn together H, M and L
 * come from their test data. The rule's flat allowance comes off as it does for levels; the active part is never
 * credited. Null where the type or H, M, L are not known.
 *
 * @source en-458 Annex B, from memory
 */
export function peakReduction(
  { impulseType }: TaskLevel,
  protection: Protection,
  rule: Pick<RuleSetVersion["protection"], "alpha" | "allowanceDb">,
): PeakReduction | null {
  if (impulseType == null) return null;
  const hml = hmlOf(protection, rule.alpha);
  if (hml === null) return null;
  const ratingDb = [hml.lDb, hml.mDb, hml.hDb][impulseType - 1]!;
  const lessDb = LESS_DB[impulseType];
  const { attenuationDb, wasClamped } = clampAttenuation(ratingDb - lessDb - rule.allowanceDb);
  return {
    type: impulseType,
    ratingDb,
    lessDb,
    allowanceDb: rule.allowanceDb,
    reductionDb: attenuationDb,
    wasClamped,
  };
}

function hmlOf({ inner, outer, combinationBands }: Protection, alpha: number) {
  if (outer !== null) {
    return combinationBands === null
      ? null
      : hmlOfBandsDb(combinationAttenuationDb(combinationBands, alpha));
  }
  const { hDb, mDb, lDb } = inner;
  return hDb === null || mDb === null || lDb === null ? null : { hDb, mDb, lDb };
}
