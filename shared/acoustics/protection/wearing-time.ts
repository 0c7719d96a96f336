/**
 * Level at the ear over a task in which the protector is worn for a share of the time, dB:
 * L′ = k·lg(f·10^(L′w/k) + (1 − f)·10^(L/k)), k = 10 by energy, q/lg 2 for an exchange rate q.
 *
 * @source wearing-time closed form of the exchange-rate mean
 */
export function wornShareLevelDb(
  outsideDb: number,
  wornDb: number,
  wornPct: number,
  levelFactor: number,
): number {
  const worn = wornPct / 100;
  return (
    outsideDb +
    levelFactor * Math.log10(worn * 10 ** ((wornDb - outsideDb) / levelFactor) + 1 - worn)
  );
}

/**
 * What is left of an attenuation over a time in which it is worn for a share only, dB.
 *
 * @source wearing-time closed form of the exchange-rate mean
 */
export function effectiveAttenuationDb(
  attenuationDb: number,
  wornPct: number,
  levelFactor: number,
): number {
  return -wornShareLevelDb(0, -attenuationDb, wornPct, levelFactor);
}

/** A time in which the protector was off though it counts: minutes, and the levels without it and while worn, dB. */
export interface TimeOff {
  readonly offMin: number;
  readonly outsideDb: number;
  readonly wornDb: number;
}

/**
 * What the time without the protector adds to a day's level at the ear, dB: the level as it was, less that of the same
 * day with it on meanwhile, −k·lg(1 − Σ t/T0·(10^((L − LD)/k) − 10^((Lw − LD)/k))). LD is normalized to T0 min; k = 10 by
 * energy, q/lg 2 for an exchange rate q.
 *
 * @throws RangeError where the times off hold more than the whole day does.
 * @source wearing-time closed form of the exchange-rate mean
 */
export function removalCostDb(
  dayDb: number,
  timesOff: readonly TimeOff[],
  referenceMin: number,
  levelFactor: number,
): number {
  const ofDay = (levelDb: number) => 10 ** ((levelDb - dayDb) / levelFactor);
  const share = timesOff.reduce(
    (sum, { offMin, outsideDb, wornDb }) =>
      sum + (offMin / referenceMin) * (ofDay(outsideDb) - ofDay(wornDb)),
    0,
  );
  if (share >= 1) throw new RangeError("times without the protector exceed the day");
  return -levelFactor * Math.log10(1 - share);
}
