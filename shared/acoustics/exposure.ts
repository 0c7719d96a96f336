import type { TimedLevel } from "./dose";

const REFERENCE_MIN = 480;
const REFERENCE_PRESSURE_SQUARED_PA2 = 4e-10;
/** Nominal working days of a week in a weekly level, whatever the days worked. */
const WEEK_DIVISOR = 5;

/**
 * Sum of levels by energy, dB: 10 lg Σ 10^(L/10).
 *
 * @throws RangeError when there is nothing to add up.
 * @source iso-9612-2009 3
 */
export function energySumDb(levelsDb: readonly number[]): number {
  if (levelsDb.length === 0) throw new RangeError("energySumDb needs at least one level");
  let sum = 0;
  for (const levelDb of levelsDb) sum += 10 ** (levelDb / 10);
  return 10 * Math.log10(sum);
}

/** Mean of levels by energy, dB. */
export function energyMeanDb(levelsDb: readonly number[]): number {
  return energySumDb(levelsDb) - 10 * Math.log10(levelsDb.length);
}

/**
 * Equivalent level over the time of its parts, dB.
 *
 * @throws RangeError when no time passed.
 * @source iso-9612-2009 3.2
 */
export function laeqDb(parts: readonly TimedLevel[]): number {
  const [energyMin, totalMin] = energyAndMinutes(parts);
  return 10 * Math.log10(energyMin / totalMin);
}

/**
 * Daily noise exposure level, dB: the parts' energy over a reference of 8 h, whatever the length of the day.
 *
 * @throws RangeError when no time passed.
 * @source iso-9612-2009 9.4 (9)
 * @source eu-2003-10-ec art. 2(b)
 */
export function lex8hDb(parts: readonly TimedLevel[]): number {
  return 10 * Math.log10(energyAndMinutes(parts)[0] / REFERENCE_MIN);
}

/**
 * Weekly noise exposure level, dB: the days' energies over five nominal days, whatever the days worked.
 *
 * @throws RangeError when there is no day.
 * @source eu-2003-10-ec art. 2(c)
 */
export function lexWeeklyDb(dailyDb: readonly number[]): number {
  return energySumDb(dailyDb) - 10 * Math.log10(WEEK_DIVISOR);
}

/**
 * Sound exposure of timed levels, Pa²·h.
 *
 * @source iec-61252 3
 */
export function soundExposurePa2h(parts: readonly TimedLevel[]): number {
  return (REFERENCE_PRESSURE_SQUARED_PA2 * energyAndMinutes(parts)[0]) / 60;
}

/**
 * Daily noise exposure level of a sound exposure, dB; null for none at all.
 *
 * @source iec-61252 Annex A
 */
export function lex8hOfExposureDb(exposurePa2h: number): number | null {
  if (exposurePa2h < 0) throw new RangeError("A sound exposure is not negative");
  if (exposurePa2h === 0) return null;
  return 10 * Math.log10(exposurePa2h / (8 * REFERENCE_PRESSURE_SQUARED_PA2));
}

function energyAndMinutes(parts: readonly TimedLevel[]): readonly [number, number] {
  let energyMin = 0;
  let totalMin = 0;
  for (const { levelDb, durationMin } of parts) {
    energyMin += durationMin * 10 ** (levelDb / 10);
    totalMin += durationMin;
  }
  if (!(totalMin > 0)) throw new RangeError("A level needs some time that passed");
  return [energyMin, totalMin];
}
