import type { FitMethod } from "../../../shared/schemas/fit";

/**
 * What a method's own standard uncertainty is taken for unless its maker's figure is typed, dB. Common practice, no
 * source: hearing thresholds repeat to about 3 dB; microphones miss what reaches the ear by bone, and their place in the
 * canal, by about 4.
 */
export const METHOD_SD_DB: Readonly<Record<FitMethod, number>> = {
  psychophysical: 3,
  "real-ear-microphones": 4,
  "two-microphones": 4,
};
