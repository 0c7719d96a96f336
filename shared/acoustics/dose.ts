import { type ExchangeLaw, tableAllowedMin } from "./exchange-law";
import type { Criterion } from "./types";

export interface TimedLevel {
  readonly levelDb: number;
  readonly durationMin: number;
}

/** What of a rule a dose needs. */
export type DoseRule = Pick<
  ExchangeLaw,
  "criterionLevelDb" | "exchangeRateDb" | "thresholdDb" | "referenceMin"
>;

/**
 * Allowed time at a steady level, minutes: T = T0 / 2^((L − Lc)/q). The threshold is no part of it.
 *
 * @source osha-1910.95 App. A, Table G-16a
 * @source niosh-98-126 1.1.1, Table 1-1
 */
export function allowedMin(levelDb: number, rule: DoseRule): number {
  return rule.referenceMin / 2 ** ((levelDb - rule.criterionLevelDb) / rule.exchangeRateDb);
}

/**
 * Noise dose of steady timed levels against one criterion, percent (100 = the whole allowance). Levels in dB(A),
 * durations in minutes; parts under the threshold count nothing, a level equal to it counts.
 *
 * @throws RangeError when there is nothing to add up: no entry is not the same as a dose of 0.
 * @source osha-1910.95 App. A I(1)(ii)
 * @source niosh-98-126 1.1.2
 */
export function dosePct(parts: readonly TimedLevel[], rule: DoseRule): number {
  if (parts.length === 0) throw new RangeError("dosePct needs at least one timed level");
  let sum = 0;
  for (const { levelDb, durationMin } of parts) {
    if (rule.thresholdDb !== null && levelDb < rule.thresholdDb) continue;
    sum += durationMin / allowedMin(levelDb, rule);
  }
  return 100 * sum;
}

/**
 * Eight-hour level of a dose: TWA = Lc + k·lg(D/100), with the k that the rule prints, else k = q/lg 2. Null for a
 * dose of zero, which has no level.
 *
 * @source osha-1910.95 App. A II
 * @source niosh-98-126 1.1.3
 */
export function twaDb(
  dose: number,
  rule: {
    readonly criterionLevelDb: number;
    readonly exchangeRateDb: number;
    readonly twaFactor: number | null;
  },
): number | null {
  if (dose < 0) throw new RangeError("A dose is not negative");
  if (dose === 0) return null;
  const factor = rule.twaFactor ?? rule.exchangeRateDb / Math.log10(2);
  return rule.criterionLevelDb + factor * Math.log10(dose / 100);
}

/**
 * Dose of steady timed levels by a table that is itself the rule, percent: Σ C/T, in between the next higher row.
 *
 * @throws RangeError when there is nothing to add up.
 * @source nr-15 Annex 1, 6
 */
export function tableDosePct(
  parts: readonly TimedLevel[],
  table: NonNullable<Criterion["table"]>,
): number {
  if (parts.length === 0) throw new RangeError("tableDosePct needs at least one timed level");
  let sum = 0;
  for (const { levelDb, durationMin } of parts)
    sum += durationMin / tableAllowedMin(levelDb, table);
  return 100 * sum;
}
