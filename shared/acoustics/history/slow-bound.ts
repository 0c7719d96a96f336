import type { DoseSettings } from "./types";

/** Time constant of the slow response, seconds. @source iec-61672-1 5.8.1 */
export const SLOW_S = 1;

/** Exponent of the exchange law on energy: 2^(L/q) = (10^(L/10))^p with p = (10/q)·lg 2. */
export const energyExponent = (exchangeRateDb: number): number =>
  (10 * Math.log10(2)) / exchangeRateDb;

/**
 * What LAeq an interval says about the slow detector between its values. The detector is y′ = (x − y)/τ, at rest where
 * a recording begins or resumes after missing values. An interval of length T with energy mean E can take its energy at
 * its start or at its end, so that
 *   at its end   b₀·e^(−T/τ) + (E·T/τ)·e^(−T/τ) ≤ y ≤ B₀·e^(−T/τ) + E·T/τ   (b₀, B₀: the same, an interval before)
 *   inside it    y ≤ B₀ + E·T/τ.
 */
export interface DetectorBounds {
  /** Greatest possible y² just before each interval. */
  readonly mostBefore: Float64Array;
  /** Least possible at its end. */
  readonly leastAfter: Float64Array;
  /** Greatest possible anywhere in it. */
  readonly mostInside: Float64Array;
}

/** @param energies Energy mean of each interval, 10^(L/10); NaN where missing. */
export function boundDetector(energies: Float64Array, intervalS: number): DetectorBounds {
  const count = energies.length;
  const mostBefore = new Float64Array(count);
  const leastAfter = new Float64Array(count);
  const mostInside = new Float64Array(count);
  const decay = Math.exp(-intervalS / SLOW_S);
  const gain = intervalS / SLOW_S;
  let most = 0;
  let least = 0;
  for (let index = 0; index < count; index++) {
    const energy = energies[index]!;
    if (Number.isNaN(energy)) {
      most = 0;
      least = 0;
      continue;
    }
    const added = energy * gain;
    mostBefore[index] = most;
    mostInside[index] = most + added;
    most = most * decay + added;
    least = (least + added) * decay;
    leastAfter[index] = least;
  }
  return { mostBefore, leastAfter, mostInside };
}

/** Reference time of a dose, seconds. */
export const REFERENCE_S = 28_800;

/** More than the doublings of any history. */
const DEPTH = 32;

/** Keeps a level at the threshold from falling below it by the last bit. */
const NEARLY_ONE = 1 - 1e-12;

/**
 * The greatest dose that the slow level of a recording can have given, from LAeq an interval.
 *
 * For any group of neighbouring intervals the detector's equation integrates to ∫y = ∫x + τ·(y at start − y at end), so
 * the mean of y over it is at most M = (ΣE·T + τ·(B − b))/length. The law's weight y^p is concave for p ≤ 1 (an exchange
 * rate of 3.01 dB or more); with a threshold θ it lies below its concave hull, y·θ^(p−1) up to θ and y^p beyond. By
 * Jensen the group's dose is at most length · hull(M). For p > 1 (a rate of 3 dB as 2^(L/3)) the hull over what y can
 * reach is its chord, y·max^(p−1). A group in which y cannot reach the threshold gives none.
 *
 * Applying the law to each LAeq alone would be no bound, the detector smearing a burst into the next second. Each
 * division of the time into groups gives a bound; taken is the least over all divisions along a binary tree, from single
 * intervals to the whole, so that steady noise gives the exact dose and a step costs a few seconds.
 */
export class SlowDoseBound {
  private readonly exponents: number[];
  private readonly exponentOf: Int32Array;
  private readonly thresholds: Float64Array;
  private readonly slopes: Float64Array;
  private readonly scales: Float64Array;
  private readonly powers: Float64Array;

  // The tree's left-over subtrees, largest first; each holds twice the intervals of the next, or more.
  private depth = 0;
  private readonly sizes = new Float64Array(DEPTH);
  private readonly energies = new Float64Array(DEPTH);
  private readonly starts = new Float64Array(DEPTH);
  private readonly ends = new Float64Array(DEPTH);
  private readonly maxima = new Float64Array(DEPTH);
  private readonly bounds: Float64Array;

  // What earlier stretches of counted time add up to.
  private closedCount = 0;
  private closedIntegral = 0;
  private closedMaximum = 0;
  private closedStretches = 0;
  private readonly closed: Float64Array;

  constructor(
    private readonly intervalS: number,
    settings: readonly DoseSettings[],
  ) {
    this.exponents = [...new Set(settings.map((one) => energyExponent(one.exchangeRateDb)))];
    const exponentOf = settings.map((one) =>
      this.exponents.indexOf(energyExponent(one.exchangeRateDb)),
    );
    this.exponentOf = Int32Array.from(exponentOf);
    this.thresholds = Float64Array.from(settings, ({ thresholdDb }) =>
      thresholdDb === null ? 0 : 10 ** (thresholdDb / 10) * NEARLY_ONE,
    );
    this.slopes = Float64Array.from(this.thresholds, (threshold, place) =>
      threshold === 0 ? 0 : threshold ** (this.exponents[exponentOf[place]!]! - 1),
    );
    this.scales = Float64Array.from(
      settings,
      (one) => 2 ** (-one.criterionLevelDb / one.exchangeRateDb),
    );
    this.powers = new Float64Array(this.exponents.length);
    this.bounds = new Float64Array(DEPTH * settings.length);
    this.closed = new Float64Array(settings.length);
  }

  /** Adds the next interval of a stretch of counted time. */
  add(energy: number, mostBefore: number, leastAfter: number, mostInside: number): void {
    const { sizes, energies, starts, ends, maxima, bounds } = this;
    const width = this.closed.length;
    const place = this.depth++;
    sizes[place] = 1;
    energies[place] = energy * this.intervalS;
    starts[place] = mostBefore;
    ends[place] = leastAfter;
    maxima[place] = mostInside;
    for (let one = 0; one < width; one++) bounds[place * width + one] = Number.POSITIVE_INFINITY;
    this.tighten(bounds, place * width, 1, this.integral(place), mostInside);
    while (this.depth > 1 && sizes[this.depth - 2] === sizes[this.depth - 1]) this.joinLastTwo();
  }

  /** Ends a stretch of counted time: what follows is no neighbour of what came before. */
  closeStretch(): void {
    if (this.depth === 0) return;
    while (this.depth > 1) this.joinLastTwo();
    for (let one = 0; one < this.closed.length; one++) this.closed[one]! += this.bounds[one]!;
    this.closedCount += this.sizes[0]!;
    this.closedIntegral += this.integral(0);
    this.closedMaximum = Math.max(this.closedMaximum, this.maxima[0]!);
    this.closedStretches++;
    this.depth = 0;
  }

  /** Upper bounds of the doses so far, percent, after `closeStretch` or at any point before it. */
  dosesPct(): Float64Array {
    const width = this.closed.length;
    const totals = Float64Array.from(this.closed);
    if (this.depth > 0) {
      const open = this.openBounds();
      for (let one = 0; one < width; one++) totals[one]! += open[one]!;
    }
    const stretches = this.closedStretches + (this.depth > 0 ? 1 : 0);
    if (stretches > 1) {
      let count = this.closedCount;
      let maximum = this.closedMaximum;
      let integral = this.closedIntegral;
      if (this.depth > 0) {
        integral += this.integralOf(this.openEnergy(), this.starts[0]!, this.ends[this.depth - 1]!);
        for (let place = 0; place < this.depth; place++) {
          count += this.sizes[place]!;
          maximum = Math.max(maximum, this.maxima[place]!);
        }
      }
      this.tighten(totals, 0, count, integral, maximum);
    }
    for (let one = 0; one < width; one++) totals[one]! *= (100 * this.scales[one]!) / REFERENCE_S;
    return totals;
  }

  /** Joins the subtrees of the open stretch into one, leaving them as they are. */
  private openBounds(): Float64Array {
    const width = this.closed.length;
    let place = this.depth - 1;
    const joined = this.bounds.slice(place * width, (place + 1) * width);
    let size = this.sizes[place]!;
    let energy = this.energies[place]!;
    let maximum = this.maxima[place]!;
    const end = this.ends[place]!;
    for (place--; place >= 0; place--) {
      size += this.sizes[place]!;
      energy += this.energies[place]!;
      maximum = Math.max(maximum, this.maxima[place]!);
      for (let one = 0; one < width; one++) joined[one]! += this.bounds[place * width + one]!;
      this.tighten(joined, 0, size, this.integralOf(energy, this.starts[place]!, end), maximum);
    }
    return joined;
  }

  private openEnergy(): number {
    let energy = 0;
    for (let place = 0; place < this.depth; place++) energy += this.energies[place]!;
    return energy;
  }

  private joinLastTwo(): void {
    const { sizes, energies, ends, maxima, bounds } = this;
    const width = this.closed.length;
    const right = --this.depth;
    const left = right - 1;
    sizes[left]! += sizes[right]!;
    energies[left]! += energies[right]!;
    ends[left] = ends[right]!;
    maxima[left] = Math.max(maxima[left]!, maxima[right]!);
    let hasDose = false;
    for (let one = 0; one < width; one++) {
      bounds[left * width + one]! += bounds[right * width + one]!;
      if (bounds[left * width + one]! > 0) hasDose = true;
    }
    if (hasDose)
      this.tighten(bounds, left * width, sizes[left]!, this.integral(left), maxima[left]!);
  }

  private integral(place: number): number {
    return this.integralOf(this.energies[place]!, this.starts[place]!, this.ends[place]!);
  }

  private integralOf(energy: number, start: number, end: number): number {
    return energy + SLOW_S * (start - end);
  }

  /** Lowers bounds to the group's own where that is less. */
  private tighten(
    bounds: Float64Array,
    offset: number,
    count: number,
    integral: number,
    maximum: number,
  ): void {
    const { exponents, exponentOf, thresholds, slopes, powers } = this;
    const lengthS = count * this.intervalS;
    const mean = Math.min(Math.max(0, integral) / lengthS, maximum);
    for (let place = 0; place < exponents.length; place++) {
      const exponent = exponents[place]!;
      powers[place] =
        lengthS * (exponent <= 1 ? mean ** exponent : mean * maximum ** (exponent - 1));
    }
    for (let one = 0; one < thresholds.length; one++) {
      const threshold = thresholds[one]!;
      let own: number;
      if (maximum < threshold) own = 0;
      else if (mean < threshold && exponents[exponentOf[one]!]! <= 1)
        own = lengthS * mean * slopes[one]!;
      else own = powers[exponentOf[one]!]!;
      if (own < bounds[offset + one]!) bounds[offset + one] = own;
    }
  }
}
