import type { Criterion, LevelMetric, MeterSettings } from "./types";

/** How a rule adds noise up over time: by energy, by an exchange rate, or by a table of allowed times. */
export interface ExchangeLaw {
  readonly isEnergy: boolean;
  readonly exchangeRateDb: number;
  /** Level from which noise counts, dB; null: all of it. */
  readonly thresholdDb: number | null;
  readonly criterionLevelDb: number;
  readonly referenceMin: number;
  readonly table: Criterion["table"];
}

/** Settings under which an instrument's average is LAeq. */
const LAEQ: MeterSettings = {
  criterionLevelDb: 0,
  exchangeRateDb: 3,
  thresholdDb: null,
  weighting: "A",
  response: "none",
};

export const ENERGY_LAW: ExchangeLaw = {
  isEnergy: true,
  exchangeRateDb: 3,
  thresholdDb: null,
  criterionLevelDb: 0,
  referenceMin: 480,
  table: null,
};

/** Criteria are data that never change, so that a law is derived once. */
const laws = new WeakMap<Criterion, ExchangeLaw>();

/** The law of a criterion on a level or a dose. */
export function lawOf(criterion: Criterion): ExchangeLaw {
  let law = laws.get(criterion);
  if (!law) {
    law = deriveLaw(criterion);
    laws.set(criterion, law);
  }
  return law;
}

function deriveLaw(criterion: Criterion): ExchangeLaw {
  if (criterion.quantity === "lex-8h" || criterion.quantity === "lex-weekly") return ENERGY_LAW;
  const { exchangeRateDb, criterionLevelDb, table } = criterion;
  if (exchangeRateDb === null || criterionLevelDb === null) {
    throw new RangeError(`Criterion ${criterion.id} has no exchange rate or no criterion level`);
  }
  return {
    isEnergy: false,
    exchangeRateDb,
    // Where a table is the rule, what lies below its first row has no allowed time and counts nothing.
    thresholdDb: criterion.thresholdDb ?? table?.[0]?.[0] ?? null,
    criterionLevelDb,
    referenceMin: criterion.referenceMin,
    table,
  };
}

export function isSameLaw(a: ExchangeLaw, b: ExchangeLaw): boolean {
  return (
    a.isEnergy === b.isEnergy &&
    a.exchangeRateDb === b.exchangeRateDb &&
    a.thresholdDb === b.thresholdDb &&
    a.table === b.table &&
    a.referenceMin === b.referenceMin &&
    (a.table === null || a.criterionLevelDb === b.criterionLevelDb)
  );
}

/** k of L = k·lg(weight): 10 for energy, q/lg 2 for an exchange rate q. */
export function levelFactor(law: ExchangeLaw): number {
  return law.isEnergy ? 10 : law.exchangeRateDb / Math.LOG10E / Math.LN2;
}

/** What a minute at a level weighs under the law's exchange rate, threshold left aside. */
export function weightOf(levelDb: number, law: ExchangeLaw): number {
  return law.isEnergy ? 10 ** (levelDb / 10) : 2 ** (levelDb / law.exchangeRateDb);
}

/** The level of a mean weight; −Infinity for none at all. */
export function levelOfWeight(weight: number, law: ExchangeLaw): number {
  return law.isEnergy ? 10 * Math.log10(weight) : law.exchangeRateDb * Math.log2(weight);
}

/**
 * Allowed time at a level by a rule's own table, minutes. In between, the next higher row; below the first row the
 * time is not limited (Infinity); above the last row the table gives none, and the last row's stands for it: a
 * ceiling speaks for such levels.
 *
 * @source nr-15 Annex 1, 1 and 4
 */
export function tableAllowedMin(levelDb: number, table: NonNullable<Criterion["table"]>): number {
  const first = table[0];
  const last = table[table.length - 1];
  if (!first || !last) throw new RangeError("The table of allowed times is empty");
  if (levelDb < first[0]) return Number.POSITIVE_INFINITY;
  for (const [rowDb, allowedMin] of table) if (levelDb <= rowDb) return allowedMin;
  return last[1];
}

/** Weight of a minute of a level that hardly moves; a level equal to the threshold counts. */
function steadyWeight(levelDb: number, law: ExchangeLaw): number {
  if (law.table) return law.referenceMin / tableAllowedMin(levelDb, law.table);
  if (law.thresholdDb !== null && levelDb < law.thresholdDb) return 0;
  return weightOf(levelDb, law);
}

/** The most by which the table asks more than its exchange rate does, as a factor. */
export function tableExcess(law: ExchangeLaw): number {
  const table = law.table ?? [];
  let most = 0;
  for (let row = 0; row < table.length; row++) {
    const [, allowedMin] = table[row]!;
    // A level just above the row before is worst: it already gets this row's time.
    const fromDb = table[Math.max(0, row - 1)]![0];
    most = Math.max(most, law.referenceMin / allowedMin / continuousWeight(fromDb, law));
  }
  return most;
}

/** Weight relative to the criterion level, by the exchange rate a table approximates. */
function continuousWeight(levelDb: number, law: ExchangeLaw): number {
  return 2 ** ((levelDb - law.criterionLevelDb) / law.exchangeRateDb);
}

const below = (thresholdDb: number | null): number => thresholdDb ?? Number.NEGATIVE_INFINITY;

/** True where an average under these settings is the law's own. Response is immaterial to LAeq. */
export function isOwnSetting(settings: MeterSettings, law: ExchangeLaw): boolean {
  return (
    settings.weighting === "A" &&
    settings.exchangeRateDb === law.exchangeRateDb &&
    settings.thresholdDb === law.thresholdDb &&
    (settings.response === "slow" || isLaeq(settings))
  );
}

export function isLaeq(settings: MeterSettings): boolean {
  return settings.exchangeRateDb === 3 && settings.thresholdDb === null;
}

/** The exchange rate of an instrument's settings, as a law without a threshold. */
export const asLaw = (settings: MeterSettings): ExchangeLaw => ({
  ...ENERGY_LAW,
  isEnergy: isLaeq(settings),
  exchangeRateDb: settings.exchangeRateDb,
});

/** An average of this metric is exactly what the law asks for, so that its least and most are one. */
export function servesExactly(metric: LevelMetric, law: ExchangeLaw): boolean {
  if (metric.kind === "steady") return true;
  return metric.kind === "laeq" ? law.isEnergy : isOwnSetting(metric.settings, law);
}

/**
 * The least that a minute of a task with this average can weigh under a law. A mean with a larger exchange rate never
 * exceeds one with a smaller (power means), and what a threshold leaves out is at most the threshold itself; so an
 * average bounds every other. Exact where it equals `mostWeight`.
 */
export function leastWeight(metric: LevelMetric, levelDb: number, law: ExchangeLaw): number {
  if (metric.kind === "steady") return steadyWeight(levelDb, law);
  if (metric.kind === "laeq" && law.isEnergy) return 10 ** (levelDb / 10);
  const settings = metric.kind === "laeq" ? LAEQ : metric.settings;
  if (settings.weighting !== "A") return 0;
  if (isOwnSetting(settings, law)) return ownWeight(levelDb, law);
  if (law.table) return 0;
  if (!isLaeq(settings) && settings.response !== "slow" && !law.isEnergy) return 0;
  if (settings.exchangeRateDb < law.exchangeRateDb) return 0;
  const hidesMore = below(settings.thresholdDb) >= below(law.thresholdDb);
  if (hidesMore) return weightOf(levelDb, law);
  const own = settings.exchangeRateDb === law.exchangeRateDb ? law : asLaw(settings);
  const rest = weightOf(levelDb, own) - weightOf(law.thresholdDb!, own);
  if (rest <= 0) return 0;
  return own === law ? rest : weightOf(levelOfWeight(rest, own), law);
}

/** The most that a minute of a task with this average can weigh under a law; Infinity where nothing bounds it. */
export function mostWeight(metric: LevelMetric, levelDb: number, law: ExchangeLaw): number {
  if (metric.kind === "steady") return steadyWeight(levelDb, law);
  if (metric.kind === "laeq" && law.isEnergy) return 10 ** (levelDb / 10);
  const settings = metric.kind === "laeq" ? LAEQ : metric.settings;
  if (settings.weighting !== "A") return Number.POSITIVE_INFINITY;
  if (isOwnSetting(settings, law)) return ownWeight(levelDb, law);
  if (!isLaeq(settings) && settings.response !== "slow") return Number.POSITIVE_INFINITY;
  if (settings.exchangeRateDb > law.exchangeRateDb) return Number.POSITIVE_INFINITY;
  let atMostDb = levelDb;
  if (below(settings.thresholdDb) > below(law.thresholdDb)) {
    const own = asLaw(settings);
    atMostDb = levelOfWeight(weightOf(levelDb, own) + weightOf(settings.thresholdDb!, own), own);
  }
  return law.table ? tableExcess(law) * continuousWeight(atMostDb, law) : weightOf(atMostDb, law);
}

/** An average under the law's own settings has the threshold in it already. */
function ownWeight(levelDb: number, law: ExchangeLaw): number {
  return law.table
    ? law.referenceMin / tableAllowedMin(levelDb, law.table)
    : weightOf(levelDb, law);
}

/** Dose fraction (1 = the whole allowance) per minute-weight of a law, over its reference time. */
export function doseScale(law: ExchangeLaw): number {
  const level = law.table ? 1 : weightOf(-law.criterionLevelDb, law);
  return level / law.referenceMin;
}
