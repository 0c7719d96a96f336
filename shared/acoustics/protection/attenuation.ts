import type {
  AttenuationMethod,
  MethodResult,
  OctaveBandValues,
  Protection,
  ProtectorData,
  Reason,
  RuleSetVersion,
  TaskLevel,
} from "../types";
import { activeAttenuationDb } from "./active";
import { combinationAttenuationDb } from "./bone-conduction";
import { doubleAttenuationDb } from "./double";
import {
  assumedAttenuationDb,
  bandReductionDb,
  hmlOfBandsDb,
  lcMinusLaOfSpectrumDb,
  mapBands,
  snrOfBandsDb,
} from "./octave-band";
import {
  clampAttenuation,
  type Derating,
  deratedAttenuationDb,
  deratedRatingDb,
  derateType,
  hmlReductionDb,
  NIOSH_BY_TYPE,
  NO_DERATING,
  OSHA_HALF,
  ratingReductionDb,
} from "./single-number";

type ProtectionRule = RuleSetVersion["protection"];

/** What a method takes off the A-weighted level, dB, before it is clamped; null with the reason why it can't say. */
export interface Reduction {
  readonly method: AttenuationMethod;
  readonly reductionDb: number | null;
  readonly reason: Reason | null;
}

export const DERATINGS: Readonly<Record<ProtectionRule["derating"], Derating>> = {
  none: NO_DERATING,
  half: OSHA_HALF,
  "by-type": NIOSH_BY_TYPE,
};

/** LC − LA of a task's noise, dB: as stated, else of its spectrum. */
export function lcMinusLaDb(level: TaskLevel): number | null {
  if (level.lcMinusLaDb !== null) return level.lcMinusLaDb;
  return level.octaveBandsDb === null ? null : lcMinusLaOfSpectrumDb(level.octaveBandsDb);
}

/** LC − LA up to which M is what a protector takes off, dB; pink noise has 1.5. @source iso-4869-2 7 */
const MOST_LC_MINUS_LA_OF_OWN_FIT_DB = 2;

/**
 * Whether an own fit stands in for the label in a noise. It is one number, rated in pink noise: in a deeper one less comes
 * off, by how much it does not say, so that there it may only lower what the label gives. Common practice, no source.
 */
export const ownFitReplaces = (rule: ProtectionRule, lcLaDb: number | null): boolean =>
  rule.ownFit === "replaces" && (lcLaDb === null || lcLaDb <= MOST_LC_MINUS_LA_OF_OWN_FIT_DB);

/** The same, the other way about: it would, and the noise is too deep for it. */
export const isTooDeepForOwnFit = (rule: ProtectionRule, lcLaDb: number | null): boolean =>
  rule.ownFit === "replaces" && !ownFitReplaces(rule, lcLaDb);

/** The outside level that a method takes its figure off: A-weighted, C-weighted, or band by band. */
export type StartsFrom = "la" | "lc" | "bands";

/**
 * What the US single number comes off: the C-weighted level where that is stated and nothing is derated, else the A-weighted
 * one.
 *
 * @source osha-1910.95 App. B (i), (ii)
 */
export const usStartsFrom = (level: TaskLevel, { derating }: ProtectionRule): "la" | "lc" =>
  level.lcMinusLaDb !== null && derating === "none" ? "lc" : "la";

/**
 * Every method for which the protector has data, in a fixed order, the rule's allowance taken off.
 *
 * @param usFrom for a comparison: the level that the US number is to come off, in place of the rule's own.
 */
export function reductions(
  level: TaskLevel,
  protection: Protection,
  rule: ProtectionRule,
  usFrom: "la" | "lc" = usStartsFrom(level, rule),
): Reduction[] {
  const found = protection.outer
    ? reductionsOfTwo(level, protection, protection.outer, rule, usFrom)
    : reductionsOfOne(level, protection.inner, rule, usFrom);
  const allowed = found.map((reduction) =>
    reduction.reductionDb === null
      ? reduction
      : { ...reduction, reductionDb: reduction.reductionDb - rule.allowanceDb },
  );
  // A fit measured with one protector says nothing about two; no allowance is put on a measured fit.
  if (protection.ownFitDb !== null) {
    allowed.push(
      protection.outer
        ? missing("own-fit", "combination-not-tested")
        : { method: "own-fit", reductionDb: protection.ownFitDb, reason: null },
    );
  }
  return allowed;
}

function reductionsOfOne(
  level: TaskLevel,
  data: ProtectorData,
  rule: ProtectionRule,
  usFrom: "la" | "lc",
): Reduction[] {
  const found: Reduction[] = [];
  const lcLaDb = lcMinusLaDb(level);
  if (data.bands !== null) found.push(byBands(level, assumedAttenuationDb(data.bands, rule.alpha)));
  if (data.hDb !== null && data.mDb !== null && data.lDb !== null) {
    found.push(byHml(data.hDb, data.mDb, data.lDb, lcLaDb));
  }
  if (data.snrDb !== null) found.push(byRating("snr", data.snrDb, lcLaDb));
  if (data.usRatingDb !== null) {
    found.push({
      method: "us-single-number",
      reductionDb: usReductionDb(data.usRatingDb, data, level, rule, usFrom),
      reason: null,
    });
  }
  if (data.percentile) {
    found.push({ method: "percentile", reductionDb: data.percentile.mostDb, reason: null });
  }
  if (data.slc80Db !== null) found.push(byRating("slc80", data.slc80Db, lcLaDb));
  return found;
}

function reductionsOfTwo(
  level: TaskLevel,
  protection: Protection,
  outer: ProtectorData,
  rule: ProtectionRule,
  usFrom: "la" | "lc",
): Reduction[] {
  const { inner, combinationBands } = protection;
  const found: Reduction[] = [];
  const lcLaDb = lcMinusLaDb(level);
  if (combinationBands !== null) {
    const assumedDb = combinationAttenuationDb(combinationBands, rule.alpha);
    const { hDb, mDb, lDb } = hmlOfBandsDb(assumedDb);
    found.push(byBands(level, assumedDb));
    found.push(byHml(hDb, mDb, lDb, lcLaDb));
    found.push(byRating("snr", snrOfBandsDb(assumedDb), lcLaDb));
  } else {
    found.push(missing("octave-band", "combination-not-tested"));
  }
  if (inner.usRatingDb !== null && outer.usRatingDb !== null) {
    found.push(
      rule.double === "better-plus-5"
        ? {
            method: "us-single-number",
            reductionDb: usReductionOfTwoDb(protection, outer, level, rule, usFrom),
            reason: null,
          }
        : missing("us-single-number", "combination-not-tested"),
    );
  }
  return found;
}

function usReductionOfTwoDb(
  protection: Protection,
  outer: ProtectorData,
  level: TaskLevel,
  rule: ProtectionRule,
  usFrom: "la" | "lc",
): number {
  const { inner } = protection;
  return doubleAttenuationDb(
    usReductionDb(inner.usRatingDb!, inner, level, rule, usFrom),
    usReductionDb(outer.usRatingDb!, outer, level, rule, usFrom),
  );
}

/**
 * Reduction of the A-weighted level by the US single number, dB: off the C-weighted level, else 7 dB less off the
 * A-weighted one.
 *
 * @source osha-1910.95 App. B (i), (ii)
 */
function usReductionDb(
  ratingDb: number,
  data: ProtectorData,
  { lcMinusLaDb: lcLaDb }: TaskLevel,
  rule: ProtectionRule,
  usFrom: "la" | "lc",
): number {
  const [type, derating] = [derateType(data.kind), DERATINGS[rule.derating]];
  return usFrom === "lc" && lcLaDb !== null
    ? ratingReductionDb(deratedRatingDb(ratingDb, type, derating), lcLaDb)
    : deratedAttenuationDb(ratingDb, type, derating);
}

/**
 * Where Appendix B governs, what the label takes off an A-weighted level with no derating, dB: it is shown beside an own
 * fit. Null under other rules, and where the label has no US number.
 *
 * @source osha-1910.95 App. B (ii)
 */
export function labelLess7Db(
  { usRatingDb, kind }: Pick<ProtectorData, "usRatingDb" | "kind">,
  { adequacy }: Pick<ProtectionRule, "adequacy">,
): number | null {
  return adequacy !== "appendix-b" || usRatingDb === null
    ? null
    : Math.max(0, deratedAttenuationDb(usRatingDb, derateType(kind), DERATINGS.none));
}

function byBands(level: TaskLevel, assumedDb: OctaveBandValues): Reduction {
  if (level.octaveBandsDb === null) return missing("octave-band", "no-spectrum");
  return {
    method: "octave-band",
    reductionDb: bandReductionDb(level.octaveBandsDb, assumedDb),
    reason: null,
  };
}

function byHml(hDb: number, mDb: number, lDb: number, lcLaDb: number | null): Reduction {
  if (lcLaDb === null) return missing("hml", "no-c-weighted-level");
  const reductionDb = hmlReductionDb(hDb, mDb, lDb, lcLaDb);
  return reductionDb === null
    ? missing("hml", "lc-la-out-of-range")
    : { method: "hml", reductionDb, reason: null };
}

function byRating(method: "snr" | "slc80", ratingDb: number, lcLaDb: number | null): Reduction {
  return lcLaDb === null
    ? missing(method, "no-c-weighted-level")
    : { method, reductionDb: ratingReductionDb(ratingDb, lcLaDb), reason: null };
}

function missing(method: AttenuationMethod, reason: Reason): Reduction {
  return { method, reductionDb: null, reason };
}

/** The level at the ear of one method; never above the bare ear, and says so where it would have been. */
export function methodResult(levelDb: number, reduction: Reduction): MethodResult {
  const { method, reductionDb, reason } = reduction;
  if (reductionDb === null) return { method, atEarDb: null, wasClamped: false, reason };
  const { attenuationDb, wasClamped } = clampAttenuation(reductionDb);
  return { method, atEarDb: levelDb - attenuationDb, wasClamped, reason };
}

/**
 * What the active part does to the A-weighted level at the ear on top of the passive one, dB (positive lowers it).
 * Null without an active part, or where it can't be told: no bands, no spectrum, two protectors together. Zero where
 * it saturates.
 *
 * @source elliott-2001 two-wave cancellation
 * @source iso-4869-2 6
 */
export function activeGainDb(
  level: TaskLevel,
  protection: Pick<Protection, "inner" | "outer">,
  alpha: number,
): { readonly gainDb: number | null; readonly reason: Reason | null } {
  const { active, bands } = protection.inner;
  if (active === null) return NO_ACTIVE_PART;
  if (protection.outer !== null) return { gainDb: null, reason: "combination-not-tested" };
  const activeDb = activeAttenuationDb(active);
  if (bands === null || activeDb === null) return { gainDb: null, reason: "no-attenuation-data" };
  if (level.octaveBandsDb === null) return { gainDb: null, reason: "no-spectrum" };
  if (active.saturatesAboveDb !== null && level.levelDb > active.saturatesAboveDb) {
    return { gainDb: 0, reason: "saturated" };
  }
  const passiveDb = assumedAttenuationDb(bands, alpha);
  const bothDb = mapBands((band) => {
    const bandDb = passiveDb[band] ?? null;
    return bandDb === null ? null : bandDb + (activeDb[band] ?? 0);
  });
  return {
    gainDb:
      bandReductionDb(level.octaveBandsDb, bothDb) -
      bandReductionDb(level.octaveBandsDb, passiveDb),
    reason: null,
  };
}

const NO_ACTIVE_PART = { gainDb: null, reason: null } as const;
