import {
  type ExchangeLaw,
  levelFactor,
  mostWeight,
  servesExactly,
  weightOf,
} from "../exchange-law";
import {
  type AttenuationMethod,
  OCTAVE_BANDS_HZ,
  type OctaveBandValues,
  type Protection,
  type ProtectorData,
  type ProtectorKind,
  type ProtectorWord,
  type RuleSetVersion,
  type TaskLevel,
} from "../types";
import { appendixBWord, en458Word } from "./adequacy";
import { activeGainDb, DERATINGS, labelLess7Db, lcMinusLaDb, ownFitReplaces } from "./attenuation";
import { combinationAttenuationDb } from "./bone-conduction";
import { doubleAttenuationDb } from "./double";
import { A_WEIGHTING_DB, assumedAttenuationDb, hmlOfBandsDb, snrOfBandsDb } from "./octave-band";
import { deratedAttenuationDb, derateType, hmlReductionDb } from "./single-number";

type Rule = RuleSetVersion["protection"];
export type WornGear = "helmet" | "glasses" | "respirator";
type WorksWith = Readonly<Record<WornGear, boolean | null>>;

/** It sits in the ear, and a muff fits over it; a band would not. */
export const isWornInside = (kind: ProtectorKind): boolean =>
  kind === "foam-plug" ||
  kind === "premoulded-plug" ||
  kind === "custom-plug" ||
  kind === "active-plug";

/** It has cups that go over a plug. */
export const isWornOver = (kind: ProtectorKind): boolean =>
  kind === "earmuff" ||
  kind === "helmet-earmuff" ||
  kind === "active-earmuff" ||
  kind === "communication-headset";

/** A model, or two together, as the register offers it at a site. */
export interface Offer extends Pick<Protection, "inner" | "outer" | "combinationBands"> {
  readonly name: string;
  /** False: not to be worn together with it. Of two worn together, what either says. */
  readonly worksWith: WorksWith;
  readonly isArchived: boolean;
  /** Null: not counted at this site. */
  readonly stock: number | null;
}

export interface OwnFit {
  /** With the confidence that the test states. */
  readonly parDb: number;
  /** The same for the share that the rule's method protects, and for that of lower confidence; absent: `parDb`. */
  readonly atRuleShareDb?: number;
  readonly atLowerShareDb?: number;
  readonly hasPassed: boolean | null;
  /** What the noise asked for when it was tested, dB. Null: not known. */
  readonly needDb: number | null;
  /** ISO date. */
  readonly testedOn: string;
}

/** Who is to wear it, and in what. */
export interface Wearer {
  readonly noises: readonly {
    readonly name: string;
    readonly level: TaskLevel;
    readonly durationMin: number;
    /** Nothing is worn in it, and it still adds to the shift that Appendix B judges. Absent: worn. */
    readonly isBare?: boolean;
  }[];
  /** A stricter target of this worker's own, dB. */
  readonly personalTargetDb: number | null;
  readonly wornGear: readonly WornGear[];
  /** For how long a battery has to last, minutes. */
  readonly wornMin: number;
  /** The fit that counts, by model. */
  readonly fits: ReadonlyMap<string, OwnFit>;
  /**
   * Models whose active part counts on this wearer: the site credits it, and the check of it has passed. Absent: none.
   */
  readonly creditedModelIds?: ReadonlySet<string>;
  /** Models that this wearer can't wear. Absent: none. */
  readonly barredModelIds?: ReadonlySet<string>;
}

/** A comparison of two candidates, in the order in which they are made. */
export type DecidedBy =
  | "first"
  | "compatibility"
  | "adequacy"
  | "underprotection"
  | "overprotection"
  | "margin"
  /** The same where all take too much off: the least comes first. */
  | "least-margin"
  | "fit"
  | "battery"
  | "stock"
  | "name";

export interface RankedProtector {
  readonly modelId: string;
  readonly outerModelId: string | null;
  readonly name: string;
  readonly kind: string;
  readonly excludedBy: {
    readonly code: "gear" | "cannot-wear" | "no-data" | "archived";
    readonly gear: WornGear | null;
  } | null;
  readonly word: ProtectorWord | null;
  /** While worn in the noise that decides the word; by Appendix B in the loudest. Active part off, dB(A). */
  readonly wornDb: number | null;
  /** The same with the active part on; null: it has none, or nothing is known of it in that noise. */
  readonly wornActiveDb: number | null;
  /** Word and margin are of the active part on. By Appendix B never: its word is of the part off. */
  readonly isActiveCredited: boolean;
  readonly wornIn: string | null;
  /** By Appendix B: the TWA of all noises with it on, which the word is about. Null under other rules. */
  readonly twaDb: number | null;
  /** Of an average that left something out these are the most that they can be: while worn, and the TWA. */
  readonly isWornMost: boolean;
  readonly isTwaMost: boolean;
  /** EN 458's word beside it where the rule has no scale for too much; null: not asked for, or nothing known. */
  readonly scaleWord: ProtectorWord | null;
  /** The noise that EN 458's word is about. */
  readonly scaleIn: string | null;
  /** By how far the level at the ear stays under the target at the confidence compared, dB. */
  readonly marginDb: number | null;
  /** Users protected by that much, percent; null: the share that the rule's own method protects. */
  readonly marginSharePct: number | null;
  readonly lastFit: Pick<OwnFit, "parDb" | "hasPassed" | "needDb" | "testedOn"> | null;
  readonly batteryMin: number | null;
  readonly batteryLasts: boolean | null;
  readonly stock: number | null;
  /** Where Appendix B governs, the label's US number less 7, dB. Null of two worn together, and under other rules. */
  readonly labelLess7Db: number | null;
  readonly decidedBy: DecidedBy;
}

/** Share of users that the lower-confidence level protects, as α and in percent. @source iso-4869-2 4 */
const LOWER_CONFIDENCE_ALPHA = 1.64;
export const LOWER_CONFIDENCE_PCT = 95;

/** An offer with all that does not depend on who wears it. */
interface Prepared {
  readonly offer: Offer;
  /** 10^(−attenuation/10) by band at the rule's α and at the lower confidence; NaN where not known. */
  readonly lossFactors: Float64Array | null;
  readonly lowFactors: Float64Array | null;
  readonly hml: { readonly hDb: number; readonly mDb: number; readonly lDb: number } | null;
  readonly snrDb: number | null;
  /** Off the A-weighted level; null where the C-weighted one is taken, see `usRatingDb`. */
  readonly usReductionDb: number | null;
  /** Off the C-weighted level where that is known and nothing is derated. */
  readonly usRatingDb: number | null;
  readonly labelLess7Db: number | null;
  readonly percentileDb: number | null;
  readonly slc80Db: number | null;
}

/** A noise with what all offers need of it. */
interface Noise {
  readonly name: string;
  readonly level: TaskLevel;
  readonly levelDb: number;
  readonly durationMin: number;
  /** By how much it may weigh more under the rule's law than its level does: an average under other settings is a bound. */
  readonly mostShare: number;
  readonly isBare: boolean;
  /** A-weighted powers by band, NaN where not known; null without a spectrum, and where no method of the rule reads it. */
  readonly powers: Float64Array | null;
  readonly lcLaDb: number | null;
  readonly statedLcLaDb: number | null;
}

/**
 * Orders the protectors of a register for many workers. The offers are prepared once; each worker is then a matter of
 * some sums.
 *
 * The order is lexicographic: what gear, missing data or the archive exclude comes last; then the word while worn
 * (active part off, which a battery can't take away, unless it is credited on this wearer, as in a day's verdict); where
 * the rule's word is of the whole shift, what is too little in a task by EN 458 after what is not, and so what is too
 * much; then the lower-confidence margin under the target, not rounded (where all are too much: the least of it); own
 * fit; whether the battery lasts; stock; name. Each says which comparison put it behind the one before.
 *
 * Like is compared with like: the lower-confidence level is that of mean − 1.64 deviations, and an own fit is restated
 * for the same share. A single number has its share protected in it and says nothing of another; where one of those in
 * question has no more, all are compared at the share of the rule's own method.
 *
 * @source en-458 Annex A
 * @source iso-4869-2 4, 6
 */
export class ProtectorChoice {
  /** By name, which is the last comparison. */
  private readonly prepared: readonly Prepared[];
  private readonly readsBands: boolean;

  constructor(
    offers: readonly Offer[],
    private readonly rule: Rule,
    /** The rule's law without a threshold: by it Appendix B's TWA adds up. */
    private readonly law: ExchangeLaw,
    /** From where EN 458's words hang beside a rule that has no scale of its own, dB; null: they aren't asked for. */
    private readonly besideScaleDb: number | null = null,
  ) {
    this.readsBands = rule.methods.includes("octave-band");
    this.prepared = offers
      .map((offer) => prepare(offer, rule))
      .sort((a, b) => (a.offer.name < b.offer.name ? -1 : a.offer.name > b.offer.name ? 1 : 0));
  }

  for(wearer: Wearer): RankedProtector[] {
    const { prepared } = this;
    const noises = wearer.noises.map((noise) => toNoise(noise, this.readsBands, this.law));
    const targetDb = targetOf(this.rule, wearer.personalTargetDb);
    const scaleDb =
      this.besideScaleDb &&
      Math.min(this.besideScaleDb, wearer.personalTargetDb ?? Number.POSITIVE_INFINITY);
    const count = prepared.length;
    const found: Judged[] = [];
    let hasLower = true;
    for (let index = 0; index < count; index += 1) {
      const one = prepared[index]!;
      const fit = fitOf(one, wearer);
      const isCredited = wearer.creditedModelIds?.has(one.offer.inner.modelId) ?? false;
      const atEar = this.atEar(one, noises, fit, isCredited, targetDb, scaleDb);
      const judged = {
        atEar,
        fit,
        excludedBy: exclusionOf(
          one,
          wearer,
          // A fit that failed is known to be too little; what the device's data say of others is not known by it.
          fit?.hasPassed === false
            ? this.atEar(one, noises, null, isCredited, targetDb, scaleDb)
            : atEar,
        ),
        batteryLasts: batteryLasts(one.offer, wearer.wornMin),
      };
      if (judged.excludedBy === null && judged.atEar?.lowMarginDb === null) hasLower = false;
      found.push(judged);
    }
    const places = new Float64Array(count);
    for (let index = 0; index < count; index += 1) {
      const judged = found[index]!;
      const marginDb = marginOf(judged, hasLower);
      places[index] = placeOf(prepared[index]!, judged, marginDb) * count + index;
    }
    places.sort();
    const ranked: RankedProtector[] = [];
    let before: number | null = null;
    for (const key of places) {
      // By division: the rest of so large a number takes far longer, and none of these is near 2^53.
      const place = Math.floor(key / count);
      const index = key - place * count;
      const decidedBy = before === null ? "first" : decidingComparison(before, place);
      before = place;
      ranked.push(shownAs(prepared[index]!, found[index]!, decidedBy, hasLower, this.rule.alpha));
    }
    return ranked;
  }

  /** The deciding noise of all; null where the rule's methods say nothing of one of them, or there is none. */
  private atEar(
    prepared: Prepared,
    noises: readonly Noise[],
    fit: OwnFit | null,
    isCredited: boolean,
    targetDb: number | null,
    scaleDb: number | null,
  ): AtEar | null {
    if (noises.every(({ isBare }) => isBare)) return null;
    const { rule, law } = this;
    const isByShift = rule.adequacy === "appendix-b";
    let wornSum = 0;
    let likeSum = 0;
    let lowSum = 0;
    // Plain variables, and one object at the end: this runs for every worker, model and noise.
    let decidingWord: ProtectorWord | null = null;
    let decidingDb = Number.NaN;
    let decidingIn: Noise | null = null;
    let decidingActiveDb: number | null = null;
    let offDb = Number.NaN;
    let scaleWord: ProtectorWord | null = null;
    let scaledDb = Number.NaN;
    let scaleIn: string | null = null;
    let likeMarginDb = Number.POSITIVE_INFINITY;
    let lowMarginDb = Number.POSITIVE_INFINITY;
    let hasLower = true;
    for (const noise of noises) {
      if (noise.isBare) {
        const sum = noise.durationMin * noise.mostShare * weightOf(noise.levelDb, law);
        wornSum += sum;
        likeSum += sum;
        lowSum += sum;
        continue;
      }
      const governing = reductionDb(prepared, noise, rule, fit);
      if (governing === null) return null;
      const wornDb = noise.levelDb - Math.max(0, governing.reductionDb);
      const likeDb = noise.levelDb - Math.max(0, governing.likeReductionDb);
      const lowDb = noise.levelDb - Math.max(0, governing.lowReductionDb ?? 0);
      hasLower &&= governing.lowReductionDb !== null;
      if (isByShift) {
        if (decidingIn === null || wornDb > decidingDb) {
          decidingDb = wornDb;
          offDb = wornDb;
          decidingIn = noise;
        }
        if (scaleDb !== null) {
          const word = en458Word(wornDb, scaleDb);
          if (scaleIn === null || decidesBefore(word, wornDb, scaleWord, scaledDb)) {
            scaleWord = word;
            scaledDb = wornDb;
            scaleIn = noise.name;
          }
        }
        // A weight is a power of two: what is the same, or won't be read, is not computed again.
        const most = noise.durationMin * noise.mostShare;
        const sum = most * weightOf(wornDb, law);
        wornSum += sum;
        likeSum += likeDb === wornDb ? sum : most * weightOf(likeDb, law);
        if (hasLower) lowSum += most * weightOf(lowDb, law);
        continue;
      }
      const gainDb = isCredited
        ? activeGainDb(noise.level, prepared.offer, rule.alpha).gainDb
        : null;
      const judgedDb = gainDb === null ? wornDb : wornDb - gainDb;
      const word =
        rule.adequacy === "en-458" && targetDb !== null ? en458Word(judgedDb, targetDb) : null;
      if (targetDb !== null) {
        likeMarginDb = Math.min(likeMarginDb, targetDb - likeDb + (gainDb ?? 0));
        lowMarginDb = Math.min(
          lowMarginDb,
          targetDb - lowDb + (gainDb === null ? 0 : lowGainDb(noise, prepared.offer)),
        );
      }
      if (decidingIn === null || decidesBefore(word, judgedDb, decidingWord, decidingDb)) {
        decidingWord = word;
        decidingDb = judgedDb;
        offDb = wornDb;
        decidingActiveDb = gainDb === null ? null : judgedDb;
        decidingIn = noise;
      }
    }
    // An average under settings that bound nothing says nothing of the shift.
    if (isByShift && !Number.isFinite(wornSum)) return null;
    const twaOf = (sum: number) => levelFactor(law) * Math.log10(sum / law.referenceMin);
    const twaDb = isByShift ? twaOf(wornSum) : null;
    const { mostShare } = decidingIn!;
    return {
      word:
        twaDb === null ? decidingWord : targetDb === null ? null : appendixBWord(twaDb, targetDb),
      wornDb:
        isByShift && mostShare !== 1 ? offDb + levelFactor(law) * Math.log10(mostShare) : offDb,
      isWornMost: isByShift && mostShare !== 1,
      isTwaMost: isByShift && noises.some((noise) => noise.mostShare !== 1),
      wornIn: decidingIn!,
      creditedDb: decidingActiveDb,
      twaDb,
      scaleWord,
      scaleIn,
      likeMarginDb: targetDb === null ? null : isByShift ? targetDb - twaOf(likeSum) : likeMarginDb,
      lowMarginDb:
        targetDb === null || !hasLower ? null : isByShift ? targetDb - twaOf(lowSum) : lowMarginDb,
    };
  }
}

interface AtEar {
  readonly word: ProtectorWord | null;
  /** Active part off, in the deciding noise; see `RankedProtector`. */
  readonly wornDb: number;
  readonly isWornMost: boolean;
  readonly isTwaMost: boolean;
  readonly wornIn: Noise;
  /** Active part on, where the word is of that; null: it is of the part off. */
  readonly creditedDb: number | null;
  /** See `RankedProtector`. */
  readonly scaleWord: ProtectorWord | null;
  readonly scaleIn: string | null;
  readonly twaDb: number | null;
  /** Under the target at the share that the rule's method protects, dB; null: no target. */
  readonly likeMarginDb: number | null;
  /** The same with lower confidence; null: the data have no spread. */
  readonly lowMarginDb: number | null;
}

/** One offer as it stands for one worker. */
interface Judged {
  readonly atEar: AtEar | null;
  readonly fit: OwnFit | null;
  readonly excludedBy: RankedProtector["excludedBy"];
  readonly batteryLasts: boolean | null;
}

const fitOf = ({ offer }: Prepared, { fits }: Wearer): OwnFit | null =>
  offer.outer === null ? (fits.get(offer.inner.modelId) ?? null) : null;

/** Null: nothing speaks against it. */
function exclusionOf(
  { offer }: Prepared,
  { wornGear, noises, barredModelIds }: Wearer,
  atEar: AtEar | null,
): RankedProtector["excludedBy"] {
  if (offer.isArchived) return ARCHIVED;
  for (const gear of wornGear) if (offer.worksWith[gear] === false) return { code: "gear", gear };
  for (const one of [offer.inner, offer.outer])
    if (one && barredModelIds?.has(one.modelId)) return CANNOT_WEAR;
  // Where nothing asks for a protector, nothing is asked of its data.
  return atEar === null && noises.some(({ isBare }) => !isBare) ? NO_DATA : null;
}

const ARCHIVED = { code: "archived", gear: null } as const;
const CANNOT_WEAR = { code: "cannot-wear", gear: null } as const;
const NO_DATA = { code: "no-data", gear: null } as const;

function batteryLasts({ inner }: Offer, wornMin: number): boolean | null {
  const batteryMin = inner.active?.batteryMin ?? null;
  return batteryMin === null ? null : batteryMin >= wornMin;
}

/** Both of the middle words will do; what is unknown comes after what is known to be wrong. */
const ADEQUACY: Readonly<Record<ProtectorWord, number>> = {
  good: 0,
  enough: 0,
  "just-enough": 1,
  "strong-side": 1,
  "too-much": 2,
  "too-little": 3,
};
const ADEQUACY_UNKNOWN = 4;

/** No level is further than this from its target, dB. */
const MIDDLE_DB = 511;
/** Places a decibel: levels that differ by less differ by the rounding of the computer alone. */
const PLACES_PER_DB = 1_000_000;
const MIDDLE = MIDDLE_DB * PLACES_PER_DB;
const MARGIN_PLACES = 2 * (MIDDLE + PLACES_PER_DB);

/** The comparisons before the name, the first one first, with how many places each has. */
const COMPARISONS = [
  ["compatibility", 2],
  ["adequacy", 5],
  ["underprotection", 2],
  ["overprotection", 2],
  ["margin", MARGIN_PLACES],
  ["fit", 3],
  ["battery", 3],
  ["stock", 3],
] as const satisfies readonly (readonly [DecidedBy, number])[];

/** The places in all comparisons as the digits of one number: less is better. */
function placeOf(
  { offer }: Prepared,
  { atEar, fit, excludedBy, batteryLasts }: Judged,
  marginDb: number | null,
): number {
  const word = atEar?.word ?? null;
  const isTooMuchBeside = word === "enough" && atEar?.scaleWord === "too-much";
  const isTooLittleBeside = word === "enough" && atEar?.scaleWord === "too-little";
  let place = excludedBy === null ? 0 : 1;
  place = 5 * place + (word === null ? ADEQUACY_UNKNOWN : ADEQUACY[word]);
  place = 2 * place + (isTooLittleBeside ? 1 : 0);
  place = 2 * place + (isTooMuchBeside ? 1 : 0);
  place = MARGIN_PLACES * place + marginStep(marginDb, isTooMuchBeside ? "too-much" : word);
  place = 3 * place + (fit === null || fit.hasPassed === null ? 1 : fit.hasPassed ? 0 : 2);
  place =
    3 * place +
    (offer.inner.active === null || batteryLasts === true ? 0 : batteryLasts === null ? 1 : 2);
  return 3 * place + (offer.stock === null ? 1 : offer.stock > 0 ? 0 : 2);
}

/** The first of the digits that differs. */
function decidingComparison(before: number, place: number): DecidedBy {
  let decidedBy: DecidedBy = "name";
  let [a, b] = [before, place];
  for (let at = COMPARISONS.length - 1; at >= 0 && a !== b; at--) {
    const [name, places] = COMPARISONS[at]!;
    const [wholeA, wholeB] = [Math.floor(a / places), Math.floor(b / places)];
    if (a - wholeA * places !== b - wholeB * places) decidedBy = name;
    a = wholeA;
    b = wholeB;
  }
  return decidedBy;
}

const marginOf = ({ atEar }: Judged, hasLower: boolean): number | null =>
  atEar === null ? null : hasLower ? atEar.lowMarginDb : atEar.likeMarginDb;

/**
 * The place of a margin, the most first. Of what is too much somewhere the least first, but what may be too little
 * elsewhere after all that is surely enough.
 */
function marginStep(marginDb: number | null, word: ProtectorWord | null): number {
  const step = Math.max(-MIDDLE, Math.min(MIDDLE, Math.round((marginDb ?? 0) * PLACES_PER_DB)));
  if (word !== "too-much") return MIDDLE - step;
  return step >= 0 ? step : MIDDLE - step;
}

/** It is too much, by the rule or beside it, and surely enough everywhere: of those the least margin is best. */
function isLeastFirst(atEar: AtEar | null, marginDb: number | null): boolean {
  if (atEar === null || marginDb === null || marginDb < 0) return false;
  return atEar.word === "too-much" || (atEar.word === "enough" && atEar.scaleWord === "too-much");
}

/** What an active part adds for the share of lower confidence, where it adds something at all, dB. */
const lowGainDb = ({ level }: Noise, offer: Offer): number =>
  activeGainDb(level, offer, LOWER_CONFIDENCE_ALPHA).gainDb ?? 0;

function wornActiveDb(
  { wornDb, wornIn, creditedDb }: AtEar,
  offer: Offer,
  alpha: number,
): number | null {
  if (creditedDb !== null || offer.inner.active === null) return creditedDb;
  const { gainDb } = activeGainDb(wornIn.level, offer, alpha);
  return gainDb === null ? null : wornDb - gainDb;
}

function shownAs(
  { offer, labelLess7Db }: Prepared,
  judged: Judged,
  decidedBy: DecidedBy,
  hasLower: boolean,
  alpha: number,
): RankedProtector {
  const { atEar, fit, excludedBy, batteryLasts } = judged;
  return {
    modelId: offer.inner.modelId,
    outerModelId: offer.outer?.modelId ?? null,
    name: offer.name,
    kind: offer.inner.kind,
    excludedBy,
    word: atEar?.word ?? null,
    wornDb: atEar?.wornDb ?? null,
    wornActiveDb: atEar && wornActiveDb(atEar, offer, alpha),
    isActiveCredited: atEar !== null && atEar.creditedDb !== null,
    wornIn: atEar?.wornIn.name ?? null,
    twaDb: atEar?.twaDb ?? null,
    isWornMost: atEar?.isWornMost ?? false,
    isTwaMost: atEar?.isTwaMost ?? false,
    scaleWord: atEar?.scaleWord ?? null,
    scaleIn: atEar?.scaleIn ?? null,
    marginDb: marginOf(judged, hasLower),
    marginSharePct: hasLower ? LOWER_CONFIDENCE_PCT : null,
    lastFit: fit && {
      parDb: fit.parDb,
      hasPassed: fit.hasPassed,
      needDb: fit.needDb,
      testedOn: fit.testedOn,
    },
    batteryMin: offer.inner.active?.batteryMin ?? null,
    batteryLasts,
    stock: offer.stock,
    labelLess7Db,
    decidedBy:
      decidedBy === "margin" && isLeastFirst(atEar, marginOf(judged, hasLower))
        ? "least-margin"
        : decidedBy,
  };
}

/** Too little before all (the loudest), then too much (the quietest), then the loudest. */
function decidesBefore(
  word: ProtectorWord | null,
  wornDb: number,
  otherWord: ProtectorWord | null,
  otherDb: number,
): boolean {
  const rank = rankOf(word);
  const otherRank = rankOf(otherWord);
  if (rank !== otherRank) return rank < otherRank;
  return word === "too-much" ? wornDb < otherDb : wornDb > otherDb;
}

const rankOf = (word: ProtectorWord | null): number =>
  word === "too-little" ? 0 : word === "too-much" ? 1 : 2;

function targetOf({ adequacy, targetDb }: Rule, personalTargetDb: number | null): number | null {
  const ofRule = adequacy === "not-stated" ? null : targetDb;
  if (ofRule === null) return personalTargetDb;
  return personalTargetDb === null ? ofRule : Math.min(ofRule, personalTargetDb);
}

function prepare(offer: Offer, rule: Rule): Prepared {
  const { inner, outer, combinationBands } = offer;
  if (outer === null) {
    const { bands, hDb, mDb, lDb } = inner;
    return {
      offer,
      lossFactors: bands && factorsOf(assumedAttenuationDb(bands, rule.alpha)),
      lowFactors: bands && factorsOf(assumedAttenuationDb(bands, LOWER_CONFIDENCE_ALPHA)),
      hml: hDb === null || mDb === null || lDb === null ? null : { hDb, mDb, lDb },
      snrDb: inner.snrDb,
      usReductionDb: usReductionDb(inner, rule),
      usRatingDb: rule.derating === "none" ? inner.usRatingDb : null,
      labelLess7Db: labelLess7Db(inner, rule),
      percentileDb: inner.percentile?.mostDb ?? null,
      slc80Db: inner.slc80Db,
    };
  }
  const assumedDb = combinationBands && combinationAttenuationDb(combinationBands, rule.alpha);
  const [first, second] = [usReductionDb(inner, rule), usReductionDb(outer, rule)];
  const hasRatings = first !== null && second !== null && rule.double === "better-plus-5";
  return {
    offer,
    lossFactors: assumedDb && factorsOf(assumedDb),
    lowFactors:
      combinationBands &&
      factorsOf(combinationAttenuationDb(combinationBands, LOWER_CONFIDENCE_ALPHA)),
    hml: assumedDb && hmlOfBandsDb(assumedDb),
    snrDb: assumedDb && snrOfBandsDb(assumedDb),
    usReductionDb: hasRatings ? doubleAttenuationDb(first, second) : null,
    usRatingDb:
      hasRatings && rule.derating === "none"
        ? doubleAttenuationDb(inner.usRatingDb!, outer.usRatingDb!)
        : null,
    labelLess7Db: null,
    percentileDb: null,
    slc80Db: null,
  };
}

function usReductionDb(data: ProtectorData, rule: Rule): number | null {
  return data.usRatingDb === null
    ? null
    : deratedAttenuationDb(data.usRatingDb, derateType(data.kind), DERATINGS[rule.derating]);
}

function factorsOf(attenuationDb: OctaveBandValues): Float64Array {
  return Float64Array.from(attenuationDb, (bandDb) =>
    bandDb === null ? Number.NaN : 10 ** (-bandDb / 10),
  );
}

function toNoise(
  { name, level, durationMin, isBare = false }: Wearer["noises"][number],
  readsBands: boolean,
  law: ExchangeLaw,
): Noise {
  const { octaveBandsDb, levelDb, metric, lcMinusLaDb: statedLcLaDb } = level;
  const powers = readsBands ? octaveBandsDb && aWeightedPowers(octaveBandsDb) : null;
  return {
    name,
    level,
    levelDb,
    durationMin,
    mostShare: servesExactly(metric, law)
      ? 1
      : mostWeight(metric, levelDb, law) / weightOf(levelDb, law),
    isBare,
    powers,
    lcLaDb: lcMinusLaDb(level),
    statedLcLaDb,
  };
}

function aWeightedPowers(octaveBandsDb: OctaveBandValues): Float64Array {
  const powers = new Float64Array(octaveBandsDb.length);
  for (const [band, bandDb] of octaveBandsDb.entries())
    powers[band] = bandDb === null ? Number.NaN : 10 ** ((bandDb + A_WEIGHTING_DB[band]!) / 10);
  return powers;
}

interface Reductions {
  readonly reductionDb: number;
  /** For the share that the rule's method protects: an own fit may be stated for another. */
  readonly likeReductionDb: number;
  /** With lower confidence; null: the data have no spread. */
  readonly lowReductionDb: number | null;
}

/** What the rule's governing method takes off, dB; null: none of them can say. */
function reductionDb(
  prepared: Prepared,
  noise: Noise,
  rule: Rule,
  fit: OwnFit | null,
): Reductions | null {
  if (rule.methods.length === 0) return null;
  const fitDb = fit?.parDb ?? null;
  const likeFitDb = fit?.atRuleShareDb ?? fitDb;
  const lowFitDb = fit?.atLowerShareDb ?? fitDb;
  if (fitDb !== null && ownFitReplaces(rule, noise.lcLaDb))
    return { reductionDb: fitDb, likeReductionDb: likeFitDb!, lowReductionDb: lowFitDb };
  for (const method of rule.methods) {
    const found = byMethodDb(prepared, noise, method, fit);
    if (found === null) continue;
    const allowanceDb = method === "own-fit" ? 0 : rule.allowanceDb;
    const label = found - allowanceDb;
    const low =
      method === "octave-band"
        ? bandReductionDb(noise.powers!, prepared.lowFactors!) - allowanceDb
        : null;
    return {
      reductionDb: loweredTo(label, fitDb),
      likeReductionDb: loweredTo(label, likeFitDb),
      lowReductionDb: low === null ? null : loweredTo(low, lowFitDb),
    };
  }
  return null;
}

const loweredTo = (labelDb: number, fitDb: number | null): number =>
  fitDb === null ? labelDb : Math.min(Math.max(0, labelDb), fitDb);

function byMethodDb(
  prepared: Prepared,
  { powers, lcLaDb, statedLcLaDb }: Noise,
  method: AttenuationMethod,
  fit: OwnFit | null,
): number | null {
  const offC = (ratingDb: number | null) =>
    ratingDb === null || lcLaDb === null ? null : ratingDb - lcLaDb;
  switch (method) {
    case "octave-band":
      return powers === null || prepared.lossFactors === null
        ? null
        : bandReductionDb(powers, prepared.lossFactors);
    case "hml": {
      const { hml } = prepared;
      return hml === null || lcLaDb === null
        ? null
        : hmlReductionDb(hml.hDb, hml.mDb, hml.lDb, lcLaDb);
    }
    case "snr":
      return offC(prepared.snrDb);
    case "slc80":
      return offC(prepared.slc80Db);
    case "us-single-number":
      return prepared.usRatingDb !== null && statedLcLaDb !== null
        ? prepared.usRatingDb - statedLcLaDb
        : prepared.usReductionDb;
    case "percentile":
      return prepared.percentileDb;
    case "own-fit":
      return fit?.parDb ?? null;
  }
}

/** The sum without the protector over that behind it, over the bands that both have. */
function bandReductionDb(powers: Float64Array, factors: Float64Array): number {
  let outside = 0;
  let behind = 0;
  for (let band = 0; band < OCTAVE_BANDS_HZ.length; band++) {
    const power = powers[band]!;
    const left = power * factors[band]!;
    if (Number.isNaN(left)) continue;
    outside += power;
    behind += left;
  }
  return 10 * Math.log10(outside / behind);
}
