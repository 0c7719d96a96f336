import { activeChart, delayGainCurve } from "../../../shared/acoustics/protection/active-chart";
import type { ActivePart, BandAttenuation, TaskLevel } from "../../../shared/acoustics/types";

/** A delay and a gain that somebody tries; nothing of it is stored. */
export interface Tried {
  readonly delayUs: number;
  readonly gain: number;
}

export const DELAY_TO_US = 1000;
export const GAIN_TO = 2;
/** What the number fields take; the sliders end before. */
export const MOST_DELAY_US = 100_000;

/** Where a device states neither: a small delay and a gain a little short. */
const START: Tried = { delayUs: 50, gain: 0.95 };

export const startOf = ({ delayS, gain }: ActivePart): Tried =>
  delayS === null || gain === null ? START : { delayUs: delayS * 1e6, gain };

/** The device with the tried delay and gain in place of its report. It isn't asked whether it saturates. */
export function triedPart(active: ActivePart, { delayUs, gain }: Tried): ActivePart {
  return { ...active, attenuationDb: null, delayS: delayUs / 1e6, gain, saturatesAboveDb: null };
}

/** What an octave band or a whole noise is left with. */
export interface Outcome {
  /** Further off the A-weighted level than cup or plug alone, dB; negative where it adds; null: no spectrum. */
  readonly furtherDb: number | null;
  /** By octave band, dB. */
  readonly bands: readonly {
    readonly frequencyHz: number;
    readonly creditedDb: number;
    /** A-weighted, under cup or plug, and with the active part, dB; null: not known. */
    readonly passiveADb: number | null;
    readonly activeADb: number | null;
  }[];
  readonly breakEvenHz: number | null;
  readonly curve: readonly { readonly frequencyHz: number; readonly attenuationDb: number }[];
}

/** What the tried delay and gain would do, in this noise where its spectrum is known. */
export function outcomeOf(
  level: TaskLevel,
  bands: BandAttenuation | null,
  active: ActivePart,
  alpha: number,
  tried: Tried,
): Outcome {
  const part = triedPart(active, tried);
  const curve = delayGainCurve(tried.delayUs / 1e6, tried.gain, part);
  const chart = bands && activeChart(level, bands, part, alpha);
  const seen = new Map(chart?.bands.map((band) => [band.frequencyHz, band]));
  return {
    furtherDb: chart ? chart.passiveDb - chart.activeDb : null,
    bands: curve.bands.map(({ frequencyHz, attenuationDb }) => ({
      frequencyHz,
      creditedDb: attenuationDb,
      passiveADb: seen.get(frequencyHz)?.passiveADb ?? null,
      activeADb: seen.get(frequencyHz)?.activeADb ?? null,
    })),
    breakEvenHz: curve.breakEvenHz,
    curve: curve.points,
  };
}

const STEPS = 80;

/** How the rating falls as the delay grows, at one gain: dB further off the A-weighted level. Empty without a spectrum. */
export function collapse(
  level: TaskLevel,
  bands: BandAttenuation | null,
  active: ActivePart,
  alpha: number,
  gain: number,
): { readonly delayUs: number; readonly furtherDb: number }[] {
  if (bands === null) return [];
  return Array.from({ length: STEPS + 1 }, (_, step) => (DELAY_TO_US * step) / STEPS).flatMap(
    (delayUs) => {
      const chart = activeChart(level, bands, triedPart(active, { delayUs, gain }), alpha);
      return chart ? [{ delayUs, furtherDb: chart.passiveDb - chart.activeDb }] : [];
    },
  );
}
