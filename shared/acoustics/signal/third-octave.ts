import { leastSquares } from "./least-squares";
import { halfAngleSquare, minimumPhase, powerOf, type Section } from "./sections";

/** The octave ratio of base ten. @source iec-61260-1 5.2 */
const OCTAVE_RATIO = 10 ** 0.3;

/** A band by its nominal mid frequency; the filter sits at the exact one. */
export interface Band {
  readonly nominalHz: number;
  readonly midHz: number;
  readonly lowerHz: number;
  readonly upperHz: number;
}

const NOMINAL_THIRDS_HZ = [
  25, 31.5, 40, 50, 63, 80, 100, 125, 160, 200, 250, 315, 400, 500, 630, 800, 1000, 1250, 1600,
  2000, 2500, 3150, 4000, 5000, 6300, 8000, 10_000, 12_500, 16_000, 20_000,
] as const;
const NOMINAL_OCTAVES_HZ = [31.5, 63, 125, 250, 500, 1000, 2000, 4000, 8000, 16_000] as const;

function bandAt(nominalHz: number, midHz: number, bandsPerOctave: number): Band {
  const half = OCTAVE_RATIO ** (1 / (2 * bandsPerOctave));
  return { nominalHz, midHz, lowerHz: midHz / half, upperHz: midHz * half };
}

/** Third-octave bands from 25 Hz to 20 kHz, exact mid frequencies of base ten. @source iec-61260-1 5.4 */
export const THIRD_OCTAVE_BANDS: readonly Band[] = NOMINAL_THIRDS_HZ.map((nominalHz, index) =>
  bandAt(nominalHz, 1000 * OCTAVE_RATIO ** ((index - 16) / 3), 3),
);

/** Octave bands from 31.5 Hz to 16 kHz, exact mid frequencies of base ten. @source iec-61260-1 5.4 */
export const OCTAVE_BANDS: readonly Band[] = NOMINAL_OCTAVES_HZ.map((nominalHz, index) =>
  bandAt(nominalHz, 1000 * OCTAVE_RATIO ** (index - 5), 1),
);

/** A band can be had where its upper edge lies below half the sampling rate. */
export const bandFits = (band: Band, rateHz: number) => band.upperHz < rateHz / 2;

/**
 * A Butterworth band-pass of order 3 passes 0.2 dB more of a noise than its edges say, by (π/6)/sin(π/6). It is made
 * narrower by three quarters of that, which leaves 0.05 dB: by all of it, two neighbours would meet so low that the
 * octave they belong to left class 1 there.
 */
const NARROWER = (Math.sin(Math.PI / 6) / (Math.PI / 6)) ** 0.75;

/**
 * What is left, and what the fit adds, 0.1 dB of a noise together at every rate, is taken off as a whole: then the bands
 * of a noise add up to its level, and a tone in the middle of an octave reads 0.05 dB high instead of 0.15.
 */
const GAIN = 10 ** (-0.1 / 20);

/**
 * The three sections of a third-octave filter, of which the second ends in (1 − z⁻¹)² and the third in (1 − z⁻¹). The
 * poles are those of the analogue Butterworth band-pass; the zeros are fitted so that the power response follows it up
 * to half the sampling rate, where the bilinear transform would not: it leaves class 1 above a quarter of the rate.
 *
 * @source iec-61260-1 5.10, class 1
 */
export function designThirdOctave(
  band: Band,
  rateHz: number,
): readonly [Section, Section, Section] {
  const widthHz = (band.upperHz - band.lowerHz) * NARROWER;
  const poles = [
    ...butterworthPoles(band.midHz, widthHz, Math.PI),
    ...butterworthPoles(band.midHz, widthHz, (2 * Math.PI) / 3),
  ].map(({ re, im }) => {
    const radius = Math.exp((2 * Math.PI * re) / rateHz);
    return { a1: -2 * radius * Math.cos((2 * Math.PI * im) / rateHz), a2: radius * radius };
  });
  const [first, second, third] = [poles[1]!, poles[2]!, poles[0]!];

  const frequenciesHz = fittedFrequencies(band, rateHz);
  const target = (frequencyHz: number) =>
    1 / (1 + (((frequencyHz / band.midHz - band.midHz / frequencyHz) * band.midHz) / widthHz) ** 6);
  const columns = [0, 1, 2].map((power) =>
    frequenciesHz.map((frequencyHz) => {
      const q = halfAngleSquare(frequencyHz, rateHz);
      let response = (4 * q) ** 3 * q ** power;
      for (const { a1, a2 } of poles) response /= powerOf(1, a1, a2, frequencyHz, rateHz);
      return response / target(frequencyHz);
    }),
  );
  const found = leastSquares(columns, new Float64Array(frequenciesHz.length).fill(1));
  const [b0, b1, b2] = minimumPhase(found[0]!, found[1]!, found[2]!);
  return [
    { b0: GAIN * b0, b1: GAIN * b1, b2: GAIN * b2, ...first },
    { b0: 1, b1: -2, b2: 1, ...second },
    { b0: 1, b1: -1, b2: 0, ...third },
  ];
}

/** Poles of the band-pass in the upper half plane, in Hz, that one pole of the low-pass prototype turns into. */
function butterworthPoles(midHz: number, widthHz: number, angle: number) {
  const re = (Math.cos(angle) * widthHz) / 2;
  const im = (Math.sin(angle) * widthHz) / 2;
  // √((re + j·im)² − mid²): the root with a negative real part under the square lies near ±j·mid.
  const squareRe = re * re - im * im - midHz * midHz;
  const squareIm = 2 * re * im;
  const size = Math.hypot(squareRe, squareIm);
  const rootIm = Math.sqrt((size - squareRe) / 2);
  const rootRe = squareIm / (2 * rootIm);
  if (Math.abs(im) < 1e-9 * midHz) return [{ re, im: rootIm }];
  return [
    { re: re + rootRe, im: im + rootIm },
    { re: re - rootRe, im: rootIm - im },
  ];
}

/** Evenly in the band, and evenly by ratio from twelve times below it to just short of half the rate. */
function fittedFrequencies(band: Band, rateHz: number): Float64Array {
  const topHz = 0.4995 * rateHz;
  const bottomHz = band.midHz / 12;
  const inBandTopHz = Math.min(band.upperHz, topHz);
  return Float64Array.from({ length: 800 }, (_, at) =>
    at < 600
      ? bottomHz * (topHz / bottomHz) ** (at / 599)
      : band.lowerHz + ((inBandTopHz - band.lowerHz) * (at - 600)) / 199,
  );
}
