import { Decimator, KEPT_SHARE } from "./decimator";
import { flushDecayed, type Section } from "./sections";
import { type Band, bandFits, designThirdOctave, THIRD_OCTAVE_BANDS } from "./third-octave";

const COEFFICIENTS = 9;
const STATES = 6;

interface Stage {
  readonly decimator: Decimator | null;
  readonly signal: Float64Array;
  readonly coefficients: Float64Array;
  readonly states: Float64Array;
  /** Places of its bands among all bands. */
  readonly places: readonly number[];
  /** Samples of this stage's rate per sample of the recording. */
  readonly share: number;
}

/**
 * Third-octave filters over one channel. Low bands run at a rate that is halved again and again. What is fed is a
 * whole block every time; `energies` is Σ x² by band in samples of the recording's own rate.
 */
export class FilterBank {
  readonly bands: readonly Band[];
  readonly energies: Float64Array;
  private readonly stages: readonly Stage[];

  /** @param blockLength a multiple of 1024 */
  constructor(
    rateHz: number,
    private readonly blockLength: number,
  ) {
    this.bands = THIRD_OCTAVE_BANDS.filter((band) => bandFits(band, rateHz));
    this.energies = new Float64Array(this.bands.length);
    const halvings = this.bands.map((band) => {
      // A band is filtered at the lowest rate that a decimator keeps whole up to its upper edge.
      let count = 0;
      while (band.upperHz < KEPT_SHARE * (rateHz / 2 ** count)) count++;
      return count;
    });
    this.stages = Array.from({ length: Math.max(...halvings) + 1 }, (_, count): Stage => {
      const places = this.bands.flatMap((_, place) => (halvings[place] === count ? [place] : []));
      const stageRateHz = rateHz / 2 ** count;
      return {
        decimator: count === 0 ? null : new Decimator(),
        signal: new Float64Array(blockLength / 2 ** count),
        coefficients: Float64Array.from(
          places.flatMap((place) => packed(designThirdOctave(this.bands[place]!, stageRateHz))),
        ),
        states: new Float64Array(places.length * STATES),
        places,
        share: 2 ** count,
      };
    });
  }

  process(block: Float64Array): void {
    let above = block;
    for (const stage of this.stages) {
      const length = this.blockLength / stage.share;
      let signal = above;
      if (stage.decimator) {
        stage.decimator.process(above, 2 * length, stage.signal);
        signal = stage.signal;
      }
      for (let index = 0; index < stage.places.length; index++)
        this.energies[stage.places[index]!]! +=
          stage.share * filterBand(signal, length, stage.coefficients, stage.states, index);
      flushDecayed(stage.states);
      above = signal;
    }
  }
}

function packed([first, second, third]: readonly [Section, Section, Section]): number[] {
  return [
    first.b0,
    first.b1,
    first.b2,
    first.a1,
    first.a2,
    second.a1,
    second.a2,
    third.a1,
    third.a2,
  ];
}

/** Runs one band's three sections over a block and returns Σ y². The zeros of the last two are at 0 Hz. */
function filterBand(
  signal: Float64Array,
  length: number,
  coefficients: Float64Array,
  states: Float64Array,
  index: number,
): number {
  const c = index * COEFFICIENTS;
  const s = index * STATES;
  const b0 = coefficients[c]!;
  const b1 = coefficients[c + 1]!;
  const b2 = coefficients[c + 2]!;
  const a11 = coefficients[c + 3]!;
  const a12 = coefficients[c + 4]!;
  const a21 = coefficients[c + 5]!;
  const a22 = coefficients[c + 6]!;
  const a31 = coefficients[c + 7]!;
  const a32 = coefficients[c + 8]!;
  let u1 = states[s]!;
  let u2 = states[s + 1]!;
  let v1 = states[s + 2]!;
  let v2 = states[s + 3]!;
  let y1 = states[s + 4]!;
  let y2 = states[s + 5]!;
  let sum = 0;
  // What depends on the sample just before comes last in each line: the loop is as fast as that chain is short.
  for (let at = 0; at < length; at++) {
    const u = signal[at]! - a12 * u2 - a11 * u1;
    const v = b2 * u2 + b1 * u1 + b0 * u - a22 * v2 - a21 * v1;
    const y = v2 - v1 - v1 + v - a32 * y2 - a31 * y1;
    u2 = u1;
    u1 = u;
    v2 = v1;
    v1 = v;
    const out = y - y1;
    y2 = y1;
    y1 = y;
    sum += out * out;
  }
  states[s] = u1;
  states[s + 1] = u2;
  states[s + 2] = v1;
  states[s + 3] = v2;
  states[s + 4] = y1;
  states[s + 5] = y2;
  return sum;
}
