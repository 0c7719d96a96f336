import { countedSamples, type Part, sampleCountOf, wholePart } from "./counting";
import {
  type DoseRoute,
  doseRoutes,
  doseScale,
  firstCounting,
  History,
  isEnergyDose,
  leastEnergy,
  leastInterval,
  rateOf,
  weightAt,
} from "./evaluate";
import {
  type Bound,
  type ChannelKind,
  type DoseSettings,
  type HistoryChannel,
  MISSING,
  type Stretch,
} from "./types";

export interface RunningDose {
  readonly settings: DoseSettings;
  readonly bound: Bound;
  readonly from: ChannelKind;
  /** Dose from the beginning up to each of `endsS`, percent; never falls. */
  readonly dosesPct: Float64Array;
}

export interface RunningDoses {
  /** Time since the beginning of the recording at each point, seconds. */
  readonly endsS: Float64Array;
  /** One for each of the settings, in their order; null where no channel can say it. */
  readonly doses: readonly (RunningDose | null)[];
}

/**
 * The dose as it grew, at so many points evenly over the recording, or after these numbers of samples; at the end of the
 * recording it is `evaluateHistory`'s counted dose. Time left out or missing adds nothing.
 *
 * @throws RangeError when channels, interval or stretches don't make a history, for less than one point, or for numbers
 *   of samples that do not rise up to the recording's own.
 * @source osha-1910.95 App. A I(1)(ii)
 */
export function runningDose(
  channels: readonly HistoryChannel[],
  intervalS: number,
  stretches: readonly Stretch[],
  settings: readonly DoseSettings[],
  points: number | readonly number[],
): RunningDoses {
  const sampleCount = sampleCountOf(channels, intervalS, stretches);
  const ends = typeof points === "number" ? evenEnds(points, sampleCount) : Int32Array.from(points);
  const pointCount = ends.length;
  const isRising = ends.every((end, point) => end > (ends[point - 1] ?? 0));
  if (!isRising || ends[pointCount - 1] !== sampleCount)
    throw new RangeError("The points of a running dose rise up to the recording's end");
  const history = new History(channels, intervalS, settings);
  const part = wholePart(countedSamples(sampleCount, stretches));
  const doses = settings.map((one): RunningDose | null => {
    let best: RunningDose | null = null;
    for (const route of doseRoutes((kind) => history.has(kind), intervalS, one)) {
      if (!hasValue(history.levels(route.from), part)) continue;
      const dosesPct = growth(history, part, one, route, ends);
      const last = dosesPct[pointCount - 1]!;
      if (best === null || last < best.dosesPct[pointCount - 1]!)
        best = { ...route, settings: one, dosesPct };
    }
    return best;
  });
  return { endsS: Float64Array.from(ends, (end) => end * intervalS), doses };
}

function evenEnds(points: number, sampleCount: number): Int32Array {
  if (!(points >= 1)) throw new RangeError("A running dose has at least one point");
  const pointCount = Math.min(Math.floor(points), sampleCount);
  return Int32Array.from({ length: pointCount }, (_, point) =>
    Math.ceil(((point + 1) * sampleCount) / pointCount),
  );
}

function hasValue(levels: Int16Array, { mask }: Part): boolean {
  return levels.some((level, index) => mask[index] === 1 && level !== MISSING);
}

function growth(
  history: History,
  part: Part,
  one: DoseSettings,
  route: DoseRoute,
  ends: Int32Array,
): Float64Array {
  if (route.bound === "upper" && route.from === "laeq")
    return boundGrowth(history, part, one, ends);
  const levels = history.levels(route.from);
  const { intervalS } = history;
  if (route.bound === "lower") {
    if (isEnergyDose(one)) return leastEnergyGrowth(levels, intervalS, part, one, ends);
    return sumGrowth(part, ends, doseScale(one), (index) =>
      leastInterval(levels, index, intervalS, one),
    );
  }
  const rateDb = rateOf(one);
  const weights = history.weights(rateDb);
  const first = Math.max(firstCounting(one), MISSING + 1);
  return sumGrowth(part, ends, intervalS * doseScale(one), (index) => {
    const level = levels[index]!;
    return level < first ? 0 : weightAt(weights, level, rateDb);
  });
}

function sumGrowth(
  { mask }: Part,
  ends: Int32Array,
  scale: number,
  weight: (index: number) => number,
): Float64Array {
  const growing = new Float64Array(ends.length);
  let sum = 0;
  let index = 0;
  for (let point = 0; point < ends.length; point++) {
    for (const end = ends[point]!; index < end; index++)
      if (mask[index] === 1) sum += weight(index);
    growing[point] = sum * scale;
  }
  return growing;
}

/**
 * The bound of each beginning of the recording. What holds for a longer one holds for the shorter, so that a bound
 * never needs to exceed a later one.
 */
function boundGrowth(
  history: History,
  part: Part,
  one: DoseSettings,
  ends: Int32Array,
): Float64Array {
  const growing = new Float64Array(ends.length);
  let point = 0;
  history.boundByMeans(part, [one], (bound, index) => {
    if (index + 1 === ends[point]) growing[point++] = bound.dosesPct()[0]!;
  });
  for (let at = ends.length - 2; at >= 0; at--)
    growing[at] = Math.min(growing[at]!, growing[at + 1]!);
  return growing;
}

/** The proof of each beginning. */
function leastEnergyGrowth(
  levels: Int16Array,
  intervalS: number,
  { mask }: Part,
  one: DoseSettings,
  ends: Int32Array,
): Float64Array {
  let energy = 0;
  let index = 0;
  const scale = doseScale(one);
  return Float64Array.from(ends, (end) => {
    energy += leastEnergy(levels, intervalS, { mask, fromIndex: index, toIndex: end });
    index = end;
    return energy * scale;
  });
}
