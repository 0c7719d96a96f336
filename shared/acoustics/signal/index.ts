export {
  analyseSound,
  type BandLevel,
  octaveBandValues,
  SAMPLE_RATES_HZ,
  type SoundAnalysis,
  type SoundLevels,
  type SoundOptions,
} from "./analyse-sound";
export { CalibrationTone, type ToneOptions, type ToneReading } from "./calibration-tone";
export { type Band, OCTAVE_BANDS, THIRD_OCTAVE_BANDS } from "./third-octave";
export { aWeightingDb, cWeightingDb } from "./weighting";
