import type { ProtectorKind } from "../types";

/** Range of LC − LA for which H, M and L hold, dB. @source iso-4869-2 7.3 */
export const HML_RANGE_DB = [-2, 10] as const;

/** What the US single number loses against an A-weighted level, dB. @source osha-1910.95 App. B */
export const SPECTRAL_CORRECTION_DB = 7;

/**
 * Reduction of the A-weighted level by H, M and L, dB; null outside the range of LC − LA for which they hold.
 *
 * @source iso-4869-2 7.3
 */
export function hmlReductionDb(
  hDb: number,
  mDb: number,
  lDb: number,
  lcMinusLaDb: number,
): number | null {
  if (lcMinusLaDb < HML_RANGE_DB[0] || lcMinusLaDb > HML_RANGE_DB[1]) return null;
  return lcMinusLaDb <= 2
    ? mDb - ((hDb - mDb) / 4) * (lcMinusLaDb - 2)
    : mDb - ((mDb - lDb) / 8) * (lcMinusLaDb - 2);
}

/**
 * Reduction of the A-weighted level by a rating that is taken off the C-weighted one (SNR, SLC80, the US rating), dB:
 * L′ = LC − rating.
 *
 * @source iso-4869-2 8.3
 * @source as-nzs-1270 App. A
 * @source osha-1910.95 App. B (i)
 */
export function ratingReductionDb(ratingDb: number, lcMinusLaDb: number): number {
  return ratingDb - lcMinusLaDb;
}

export type ProtectorType = "earmuff" | "formable-plug" | "other-plug";

/**
 * Type of protector for a derating. What is neither surely a muff nor surely a formable plug counts as the type that
 * is derated most.
 */
export function derateType(kind: ProtectorKind): ProtectorType {
  switch (kind) {
    case "earmuff":
    case "helmet-earmuff":
    case "active-earmuff":
      return "earmuff";
    case "foam-plug":
      return "formable-plug";
    default:
      return "other-plug";
  }
}

/** A derating of the US single number: its order matters as much as its factors. */
export interface Derating {
  /** Whether the factor comes before the spectral correction or after it. */
  readonly order: "correction-first" | "factor-first";
  readonly factors: Readonly<Record<ProtectorType, number>>;
}

/** @source osha-1910.95 App. B (ii) */
export const NO_DERATING: Derating = {
  order: "correction-first",
  factors: { earmuff: 1, "formable-plug": 1, "other-plug": 1 },
};

/** @source osha-otm III:5 */
export const OSHA_HALF: Derating = {
  order: "correction-first",
  factors: { earmuff: 0.5, "formable-plug": 0.5, "other-plug": 0.5 },
};

/** @source niosh-98-126 6 */
export const NIOSH_BY_TYPE: Derating = {
  order: "factor-first",
  factors: { earmuff: 0.75, "formable-plug": 0.5, "other-plug": 0.3 },
};

/** @source fra-49cfr227 App. B */
export const FRA_BY_TYPE: Derating = {
  order: "correction-first",
  factors: { earmuff: 0.8, "formable-plug": 0.6, "other-plug": 0.4 },
};

/**
 * Attenuation of the US single number against an A-weighted level, dB, as computed: may be negative, and is clamped
 * by whoever takes it off a level. A label's printed half decibel is rounded down when it is shown, not here.
 *
 * @source osha-1910.95 App. B (ii)
 * @source osha-otm III:5
 * @source niosh-98-126 6
 * @source fra-49cfr227 App. B
 */
export function deratedAttenuationDb(
  usRatingDb: number,
  type: ProtectorType,
  derating: Derating,
): number {
  const factor = derating.factors[type];
  return derating.order === "correction-first"
    ? (usRatingDb - SPECTRAL_CORRECTION_DB) * factor
    : usRatingDb * factor - SPECTRAL_CORRECTION_DB;
}

/**
 * The US single number derated against a C-weighted level, dB: the factor alone, for no spectral correction is due there.
 *
 * @source niosh-98-126 6
 * @source osha-otm III:5, half of it from memory
 */
export function deratedRatingDb(
  usRatingDb: number,
  type: ProtectorType,
  { factors }: Derating,
): number {
  return usRatingDb * factors[type];
}

/** A derating never makes a protector louder than the bare ear; says where it would have. */
export function clampAttenuation(attenuationDb: number): {
  readonly attenuationDb: number;
  readonly wasClamped: boolean;
} {
  return attenuationDb < 0
    ? { attenuationDb: 0, wasClamped: true }
    : { attenuationDb, wasClamped: false };
}
