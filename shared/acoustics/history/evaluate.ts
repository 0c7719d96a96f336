import {
  countedSamples,
  countLevels,
  type LevelCounts,
  OFFSET,
  type Part,
  sampleCountOf,
  wholePart,
} from "./counting";
import {
  boundDetector,
  type DetectorBounds,
  energyExponent,
  REFERENCE_S,
  SLOW_S,
  SlowDoseBound,
} from "./slow-bound";
import {
  type Bound,
  type ChannelKind,
  type DoseFigure,
  type DoseSettings,
  type HistoryChannel,
  type HistoryEvaluation,
  type LevelFigure,
  MISSING,
  type PartEvaluation,
  type PeakFigure,
  type Stretch,
  type StretchEvaluation,
} from "./types";

/** Slow levels at this interval or finer stand for the slow level at all times. */
const FINE_S = 1;

/**
 * Evaluates a time history: for what counts, for all of it, and for each stretch, the levels and the dose under each of
 * the settings. A figure is exact from the channel that defines it, else a bound that holds whatever happened between
 * the values; null where no channel bounds it.
 *
 * | figure | exact | at most | at least |
 * | --- | --- | --- | --- |
 * | LAeq, and a dose by energy | LAeq | | LAS (`leastEnergy`) |
 * | any other dose | LAS every second or finer | LAeq (`SlowDoseBound`), LASmax | coarser LAS (`leastDose`) |
 * | greatest slow level | LASmax; LAS every second or finer | LAeq (`boundDetector`), LAFmax | coarser LAS |
 *
 * From LASmax: a dose's weight grows with the level, so that the greatest level for the whole interval gives at least
 * the dose. From LAFmax: slow is fast smoothed by a kernel that is nowhere negative and sums to one ((1 + sτf)/(1 + sτs)
 * with τf < τs), so that it never exceeds the greatest fast level.
 *
 * Durations in seconds, doses in percent of 8 h at the criterion level. A level equal to the threshold counts. The bounds
 * are those of the values as recorded; that these are whole hundredths is left aside.
 *
 * @throws RangeError when channels, interval or stretches don't make a history.
 * @source osha-1910.95 App. A I(1)(ii)
 * @source iso-9612-2009 3.2
 */
export function evaluateHistory(
  channels: readonly HistoryChannel[],
  intervalS: number,
  stretches: readonly Stretch[],
  settings: readonly DoseSettings[],
): HistoryEvaluation {
  const sampleCount = sampleCountOf(channels, intervalS, stretches);
  const history = new History(channels, intervalS, settings);
  const counted = countedSamples(sampleCount, stretches);
  const all = new Uint8Array(sampleCount).fill(1);
  let leftOutCount = 0;
  for (let index = 0; index < sampleCount; index++) if (counted[index] === 0) leftOutCount++;

  const countedPart = history.evaluate(wholePart(counted));
  const evaluateStretch = ({ id, kind, fromIndex, toIndex }: Stretch): StretchEvaluation => {
    const mask = kind === "task" ? counted : all;
    const part = history.evaluate({ mask, fromIndex, toIndex });
    return { ...part, id, kind, energySharePct: kind === "task" ? share(part, countedPart) : null };
  };
  return {
    counted: countedPart,
    everything: leftOutCount === 0 ? countedPart : history.evaluate(wholePart(all)),
    leftOutS: leftOutCount * intervalS,
    stretches: stretches.map(evaluateStretch),
  };
}

function share(part: PartEvaluation, whole: PartEvaluation): number | null {
  if (part.laeq?.bound !== "exact" || whole.laeq?.bound !== "exact") return null;
  const energy = (one: LevelFigure) => one.durationS * 10 ** (one.levelDb / 10);
  return (100 * energy(part.laeq)) / energy(whole.laeq);
}

/** What a channel can say about a dose. */
export interface DoseRoute {
  readonly from: ChannelKind;
  readonly bound: Bound;
}

/** A dose by energy: what LAeq gives. Three decibels with a threshold are an exchange rate. */
export const isEnergyDose = ({ exchangeRateDb, thresholdDb }: DoseSettings): boolean =>
  exchangeRateDb === 3 && thresholdDb === null;

/** Twice the energy is 10 lg 2 dB, and 2^(L/q) then is 10^(L/10). */
const ENERGY_RATE_DB = 10 * Math.log10(2);

/**
 * The q of 2^(L/q). A rule that publishes a dose with a rate of 3 dB means 3; where the energy itself is meant, as in
 * LEX,8h, the dose is 100 % exactly at the limit and its level is LEX,8h.
 *
 * @source iso-9612-2009 3.2
 * @source niosh-98-126 1.1.2
 */
export const rateOf = (one: DoseSettings): number =>
  isEnergyDose(one) ? ENERGY_RATE_DB : one.exchangeRateDb;

/** Ways to a dose that the channels allow, one kind of bound only: exact before upper before lower. */
export function doseRoutes(
  has: (kind: ChannelKind) => boolean,
  intervalS: number,
  settings: DoseSettings,
): DoseRoute[] {
  if (isEnergyDose(settings)) {
    if (has("laeq")) return [{ from: "laeq", bound: "exact" }];
    return has("las") ? [{ from: "las", bound: "lower" }] : [];
  }
  if (has("las") && intervalS <= FINE_S) return [{ from: "las", bound: "exact" }];
  const upper = (["laeq", "las-max"] as const).filter(has);
  if (upper.length > 0) return upper.map((from) => ({ from, bound: "upper" }));
  return has("las") ? [{ from: "las", bound: "lower" }] : [];
}

/** First level in hundredths that counts. */
export const firstCounting = ({ thresholdDb }: DoseSettings): number =>
  // A threshold such as 80.1 dB is not a whole number of hundredths in binary.
  thresholdDb === null ? MISSING : Math.ceil(thresholdDb * 100 - 1e-6);

/** Percent a second at a level, 2^((L − Lc)/q), as a factor of 2^(L/q). */
export const doseScale = (one: DoseSettings): number =>
  (100 * 2 ** (-one.criterionLevelDb / rateOf(one))) / REFERENCE_S;

/** A history with what its parts share: tables by level, and the bounds of the detector. */
export class History {
  private readonly byKind: ReadonlyMap<ChannelKind, Int16Array>;
  private readonly tables = new Map<number, Float64Array>();
  private readonly routes: readonly DoseRoute[][];
  private energyMeans: Float64Array | null = null;
  private detector: DetectorBounds | null = null;

  constructor(
    channels: readonly HistoryChannel[],
    readonly intervalS: number,
    private readonly settings: readonly DoseSettings[],
  ) {
    this.byKind = new Map(channels.map(({ kind, levels }) => [kind, levels]));
    this.routes = settings.map((one) => doseRoutes((kind) => this.has(kind), intervalS, one));
  }

  has(kind: ChannelKind): boolean {
    return this.byKind.has(kind);
  }

  levels(kind: ChannelKind): Int16Array {
    return this.byKind.get(kind)!;
  }

  evaluate(part: Part): PartEvaluation {
    const counts = new Map<ChannelKind, LevelCounts>();
    const countsOf = (kind: ChannelKind): LevelCounts => {
      let known = counts.get(kind);
      if (!known) {
        known = countLevels(this.levels(kind), part);
        counts.set(kind, known);
      }
      return known;
    };
    const [sampleCount, missingCount] = this.countSamples(part);
    return {
      sampleCount,
      durationS: (sampleCount - missingCount) * this.intervalS,
      missingS: missingCount * this.intervalS,
      laeq: this.has("laeq")
        ? this.energyMean("laeq", countsOf("laeq"))
        : this.has("las")
          ? this.leastEnergyMean(part, countsOf("las"))
          : null,
      lceq: this.has("lceq") ? this.energyMean("lceq", countsOf("lceq")) : null,
      maxSlow: this.maxSlow(part, countsOf),
      peaks: this.peaks(countsOf),
      doses: this.doses(part, countsOf),
    };
  }

  private countSamples({ mask, fromIndex, toIndex }: Part): [number, number] {
    const columns = [...this.byKind.values()];
    let count = 0;
    let missing = 0;
    for (let index = fromIndex; index < toIndex; index++) {
      if (mask[index] === 0) continue;
      count++;
      if (columns[0]![index] !== MISSING) continue;
      if (columns.every((levels) => levels[index] === MISSING)) missing++;
    }
    return [count, missing];
  }

  private energyMean(from: ChannelKind, counts: LevelCounts): LevelFigure | null {
    if (counts.total === 0) return null;
    const levelDb = 10 * Math.log10(this.energyOf(counts) / counts.total);
    return { levelDb, bound: "exact", from, durationS: counts.total * this.intervalS };
  }

  private energyOf({ counts, lowest, highest }: LevelCounts): number {
    let energy = 0;
    for (let level = lowest; level <= highest; level++) {
      const count = counts[level + OFFSET]!;
      if (count > 0) energy += count * 10 ** (level / 1000);
    }
    return energy;
  }

  private leastEnergyMean(part: Part, counts: LevelCounts): LevelFigure | null {
    const energy = leastEnergy(this.levels("las"), this.intervalS, part);
    if (counts.total === 0 || energy === 0) return null;
    const durationS = counts.total * this.intervalS;
    return { levelDb: 10 * Math.log10(energy / durationS), bound: "lower", from: "las", durationS };
  }

  private maxSlow(part: Part, countsOf: (kind: ChannelKind) => LevelCounts): LevelFigure | null {
    const highest = (from: ChannelKind, bound: Bound): LevelFigure | null => {
      const counts = countsOf(from);
      if (counts.total === 0) return null;
      const durationS = counts.total * this.intervalS;
      return { levelDb: counts.highest / 100, bound, from, durationS };
    };
    if (this.has("las-max")) return highest("las-max", "exact");
    if (this.has("las") && this.intervalS <= FINE_S) return highest("las", "exact");
    const fast = this.has("laf-max") ? highest("laf-max", "upper") : null;
    const mean = this.has("laeq") ? this.mostSlow(part, countsOf("laeq")) : null;
    if (fast !== null && mean !== null) return fast.levelDb <= mean.levelDb ? fast : mean;
    return fast ?? mean ?? (this.has("las") ? highest("las", "lower") : null);
  }

  private mostSlow(part: Part, { total }: LevelCounts): LevelFigure | null {
    if (total === 0) return null;
    const { mostInside } = this.detectorBounds();
    let most = 0;
    for (let index = part.fromIndex; index < part.toIndex; index++)
      if (part.mask[index] === 1 && mostInside[index]! > most) most = mostInside[index]!;
    const levelDb = 10 * Math.log10(most);
    return { levelDb, bound: "upper", from: "laeq", durationS: total * this.intervalS };
  }

  private peaks(countsOf: (kind: ChannelKind) => LevelCounts): PeakFigure[] {
    const columns = [
      ["lcpeak", "C"],
      ["zpeak", "Z"],
    ] as const;
    return columns
      .filter(([from]) => this.has(from) && countsOf(from).total > 0)
      .map(([from, weighting]) => ({ levelDb: countsOf(from).highest / 100, weighting, from }));
  }

  private doses(part: Part, countsOf: (kind: ChannelKind) => LevelCounts): (DoseFigure | null)[] {
    const bounded = this.settings.filter((_, place) => this.isBoundByMeans(place));
    const mostByMeans = new Map<DoseSettings, number>();
    if (bounded.length > 0) {
      const most = this.boundByMeans(part, bounded);
      for (const [place, one] of bounded.entries()) mostByMeans.set(one, most[place]!);
    }
    return this.settings.map((one, place) => {
      let best: DoseFigure | null = null;
      for (const route of this.routes[place]!) {
        const counts = countsOf(route.from);
        if (counts.total === 0) continue;
        const dosePct =
          route.bound === "lower"
            ? this.leastDose(part, one)
            : route.bound === "upper" && route.from === "laeq"
              ? mostByMeans.get(one)!
              : this.doseOf(counts, one);
        const durationS = counts.total * this.intervalS;
        if (best === null || dosePct < best.dosePct)
          best = {
            ...route,
            settings: one,
            dosePct,
            averageDb: averageDb(dosePct, durationS, one),
            durationS,
          };
      }
      return best;
    });
  }

  private isBoundByMeans(place: number): boolean {
    return this.routes[place]!.some(({ from, bound }) => from === "laeq" && bound === "upper");
  }

  private doseOf({ counts, lowest, highest }: LevelCounts, one: DoseSettings): number {
    const rateDb = rateOf(one);
    const weights = this.weights(rateDb);
    let sum = 0;
    for (let level = Math.max(lowest, firstCounting(one)); level <= highest; level++) {
      const count = counts[level + OFFSET]!;
      if (count > 0) sum += count * weightAt(weights, level, rateDb);
    }
    return sum * this.intervalS * doseScale(one);
  }

  /** 2^(L/q) by level, filled as levels occur. */
  weights(rateDb: number): Float64Array {
    let table = this.tables.get(rateDb);
    if (!table) {
      table = new Float64Array(2 * OFFSET);
      this.tables.set(rateDb, table);
    }
    return table;
  }

  /** Feeds a part's LAeq to a bound; `after` sees each sample's index. */
  boundByMeans(
    part: Part,
    settings: readonly DoseSettings[],
    after?: (bound: SlowDoseBound, index: number) => void,
  ): Float64Array {
    const bound = new SlowDoseBound(this.intervalS, settings);
    const energies = this.energies();
    const { mostBefore, leastAfter, mostInside } = this.detectorBounds();
    for (let index = part.fromIndex; index < part.toIndex; index++) {
      const energy = energies[index]!;
      if (part.mask[index] === 0 || Number.isNaN(energy)) bound.closeStretch();
      else bound.add(energy, mostBefore[index]!, leastAfter[index]!, mostInside[index]!);
      after?.(bound, index);
    }
    return bound.dosesPct();
  }

  private energies(): Float64Array {
    this.energyMeans ??= energiesOf(this.levels("laeq"));
    return this.energyMeans;
  }

  private detectorBounds(): DetectorBounds {
    this.detector ??= boundDetector(this.energies(), this.intervalS);
    return this.detector;
  }

  private leastDose(part: Part, one: DoseSettings): number {
    const levels = this.levels("las");
    return isEnergyDose(one)
      ? leastEnergy(levels, this.intervalS, part) * doseScale(one)
      : leastDose(levels, this.intervalS, part, one);
  }
}

export function weightAt(weights: Float64Array, level: number, rateDb: number): number {
  const known = weights[level + OFFSET]!;
  if (known > 0) return known;
  const weight = 2 ** (level / (100 * rateDb));
  weights[level + OFFSET] = weight;
  return weight;
}

function energiesOf(levels: Int16Array): Float64Array {
  const table = new Float64Array(2 * OFFSET);
  return Float64Array.from(levels, (level) => {
    if (level === MISSING) return Number.NaN;
    const known = table[level + OFFSET]!;
    if (known > 0) return known;
    const energy = 10 ** (level / 1000);
    table[level + OFFSET] = energy;
    return energy;
  });
}

/** Level that gives a dose in a time, dB: Lc + q·lb(D·T0/(100·T)); null for a dose of 0. */
function averageDb(dosePct: number, durationS: number, one: DoseSettings): number | null {
  if (dosePct === 0) return null;
  const share = (dosePct * REFERENCE_S) / (100 * durationS);
  return one.criterionLevelDb + rateOf(one) * Math.log2(share);
}

/**
 * Least sound energy of a part, 10^(L/10)·s, that gives its sampled slow levels. Between values y₀ and y the detector
 * takes in y − y₀·e^(−T/τ) = ∫x·e^(−(t−s)/τ)ds/τ ≤ ∫x/τ, all of it if the energy came at the end. So an interval holds
 * τ·(y − y₀·e^(−T/τ)) or more, and never less than nothing. The first value after a beginning or a gap proves nothing:
 * it may have been left from before.
 *
 * Steady noise sampled every second gives 2.0 dB less than its LAeq (bursts just before each value would look the same),
 * at 1/8 s 0.3 dB less.
 */
export function leastEnergy(levels: Int16Array, intervalS: number, part: Part): number {
  const decay = Math.exp(-intervalS / SLOW_S);
  let energy = 0;
  for (let index = Math.max(1, part.fromIndex); index < part.toIndex; index++) {
    if (part.mask[index] === 0 || levels[index] === MISSING || levels[index - 1] === MISSING)
      continue;
    const added = 10 ** (levels[index]! / 1000) - 10 ** (levels[index - 1]! / 1000) * decay;
    if (added > 0) energy += SLOW_S * added;
  }
  return energy;
}

/**
 * Least dose that sampled slow levels allow, percent: after a value the slow level falls by no more than 4.34 dB a
 * second, so that the interval after it holds ∫2^((L − Lc)/q) of that decay until it meets the threshold.
 */
export function leastDose(
  levels: Int16Array,
  intervalS: number,
  part: Part,
  one: DoseSettings,
): number {
  let sum = 0;
  for (let index = Math.max(1, part.fromIndex); index < part.toIndex; index++) {
    if (part.mask[index] === 1) sum += leastInterval(levels, index, intervalS, one);
  }
  return sum * doseScale(one);
}

/** What an interval holds by the value before it, as seconds weighted by 2^(L/q). */
export function leastInterval(
  levels: Int16Array,
  index: number,
  intervalS: number,
  one: DoseSettings,
): number {
  const before = index === 0 ? MISSING : levels[index - 1]!;
  if (before === MISSING || levels[index] === MISSING || before < firstCounting(one)) return 0;
  const rate = energyExponent(one.exchangeRateDb) / SLOW_S;
  const untilThresholdS =
    one.thresholdDb === null
      ? intervalS
      : ((before / 100 - one.thresholdDb) * SLOW_S * Math.LN10) / 10;
  const lengthS = Math.min(intervalS, Math.max(0, untilThresholdS));
  const weight = 2 ** (before / (100 * one.exchangeRateDb));
  return (weight * -Math.expm1(-rate * lengthS)) / rate;
}
