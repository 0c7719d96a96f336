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
