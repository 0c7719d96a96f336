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
export { appendixBWord, en458Word } from "./protection/adequacy";
export { countsAsWorn, isInNoise } from "./protection/at-ear";
export { doubleAttenuationDb } from "./protection/double";
export { hmlOfBandsDb, levelBehindBandsDb, snrOfBandsDb } from "./protection/octave-band";
export {
  deratedAttenuationDb,
  hmlReductionDb,
  ratingReductionDb,
} from "./protection/single-number";
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
