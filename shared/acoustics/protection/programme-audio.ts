import { type ExchangeLaw, levelOfWeight, weightOf } from "../exchange-law";
import type { TaskLevel } from "../types";

/**
 * Level at the ear of what a protector leaves of the noise and of a programme under the cup, dB(A): by energy. Null
 * audio: there is none.
 *
 * @source programme-audio sum of two sounds that know nothing of each other
 */
export function withAudioDb(noiseDb: number, audioDb: number | null): number {
  if (audioDb === null) return noiseDb;
  return 10 * Math.log10(10 ** (noiseDb / 10) + 10 ** (audioDb / 10));
}

/** A programme as a law of addition sees it. */
export interface AudioLaw {
  readonly audioDb: number;
  readonly law: ExchangeLaw;
  /** The level beside it is a mean by energy, or hardly moves, so that the sum of both is exact or an upper bound. */
  readonly isUpperByEnergy: boolean;
}

export function audioLaw(
  audioDb: number,
  { metric }: TaskLevel,
  law: ExchangeLaw,
  isByReading: boolean,
): AudioLaw {
  const isByEnergy = metric.kind !== "lavg" || metric.settings.exchangeRateDb === 3;
  return {
    audioDb,
    law,
    isUpperByEnergy: isByReading || isByEnergy || law.isEnergy || law.exchangeRateDb === 3,
  };
}

/**
 * What a minute weighs in which noise of a mean weight and a steady programme sound together: the levels by energy, and
 * the weight of their sum.
 *
 * Under an exchange rate over 3 dB the weight of the sum is a convex function of the noise's: at the mean it is no more
 * than the true mean. Where the noise's mean is one by energy it is no less either; where it is one by the exchange
 * rate, the two weights added are what it can't exceed (Minkowski).
 *
 * @source programme-audio sum of two sounds under an exchange rate
 */
export function withAudioWeight(
  noiseWeight: number,
  { audioDb, law, isUpperByEnergy }: AudioLaw,
  end: "least" | "most",
): number {
  const audioWeight = weightOf(audioDb, law);
  if (law.isEnergy || (end === "most" && !isUpperByEnergy)) return noiseWeight + audioWeight;
  if (noiseWeight === 0 || noiseWeight === Number.POSITIVE_INFINITY)
    return noiseWeight + audioWeight;
  return weightOf(withAudioDb(levelOfWeight(noiseWeight, law), audioDb), law);
}

/**
 * Level while worn of what a protector leaves of the noise and of a programme, dB: the least or the most that it can be
 * under a law of addition.
 */
export function withAudioAtEndDb(noiseDb: number, audio: AudioLaw, end: "least" | "most"): number {
  const weight = withAudioWeight(weightOf(noiseDb, audio.law), audio, end);
  return levelOfWeight(weight, audio.law);
}
