export { evaluateDay, METHOD_VERSION } from "./day";
export { allowedMin, dosePct, tableDosePct, twaDb } from "./dose";
export {
  energyMeanDb,
  energySumDb,
  laeqDb,
  lex8hDb,
  lex8hOfExposureDb,
  lexWeeklyDb,
  soundExposurePa2h,
} from "./exposure";
export { METHODS, type Method } from "./methods";
export { outsideCriterion } from "./outside-criterion";
export {
  activeAttenuationDb,
  bandCancellationDb,
  breakEvenHz,
  breakEvenPhaseRad,
  cancellationDb,
} from "./protection/active";
export {
  type ActiveChart,
  type ActiveChartBand,
  activeChart,
  type DelayGainCurve,
  delayGainCurve,
} from "./protection/active-chart";
export { appendixBWord, en458Word } from "./protection/adequacy";
export { countsAsWorn, isInNoise } from "./protection/at-ear";
export { attenuationNeed, type Need } from "./protection/attenuation-need";
export { BONE_CONDUCTION_LIMIT_DB, boneConductionLimitDb } from "./protection/bone-conduction";
export {
  type DecidedBy,
  type Offer,
  type OwnFit,
  ProtectorChoice,
  type RankedProtector,
  type Wearer,
  type WornGear,
} from "./protection/choose-protector";
export { doubleAttenuationDb } from "./protection/double";
export {
  type EveryMethod,
  everyMethod,
  LARGE_SPREAD_DB,
  type MethodAtEar,
} from "./protection/every-method";
export {
  type EarRating,
  type FitOutcome,
  type FitRating,
  type FitRefusal,
  type FitTrials,
  fitRating,
  type GroupFits,
  groupFits,
} from "./protection/fit-rating";
export { type ImpulseType, peakReduction } from "./protection/impulse";
export { mostAudioDb } from "./protection/most-audio";
export { hmlOfBandsDb, levelBehindBandsDb, snrOfBandsDb } from "./protection/octave-band";
export { withAudioDb } from "./protection/programme-audio";
export {
  australianClass,
  compareRatings,
  type EuropeanRatings,
  perSubjectRatings,
  pooledRatings,
  type RatingComparison,
  type RatingName,
  roundedUsRating,
  usRatingOfLabelDb,
} from "./protection/ratings";
export {
  deratedAttenuationDb,
  hmlReductionDb,
  ratingReductionDb,
} from "./protection/single-number";
export {
  AUDIBLE_ABOVE_DB,
  type Heard,
  hearSignal,
  maskedThresholdDb,
  type SignalHeard,
} from "./protection/warning-signal";
export { effectiveAttenuationDb, wornShareLevelDb } from "./protection/wearing-time";
export { SOURCES, type Source, type SourceId } from "./sources";
export * from "./types";
export {
  COVERAGE_FACTOR,
  jobSamplingContributionDb,
  minimumGroupMeasuringH,
  samplingUncertaintyDb,
  uncertaintyBudget,
} from "./uncertainty";
export { isPast, judge } from "./verdict";
export { buildWorking, type Working } from "./working";
