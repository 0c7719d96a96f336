import type { z } from "zod";
import { activeAttenuationDb } from "../../shared/acoustics/protection/active";
import { boneConductionLimitDb } from "../../shared/acoustics/protection/bone-conduction";
import type {
  MeasuredBand,
  MicrophonePairReading,
} from "../../shared/acoustics/signal/two-microphones";
import {
  checkActivePart,
  earAttenuation,
  looksSwapped,
  methodSdDb,
  personalAttenuationDb,
  reduced,
  reducedActive,
  swapped,
} from "../../shared/acoustics/signal/two-microphones-check";
import {
  type ActivePart,
  OCTAVE_BANDS_HZ,
  type OctaveBandValues,
} from "../../shared/acoustics/types";
import type { TypedMicrophones } from "../../shared/schemas/fit";
import type {
  CheckAnalysis,
  CheckCalibration,
  CheckCode,
  CheckSpectrum,
  Correction,
} from "../../shared/schemas/microphone-check";

/** One pair of channels as it was measured or typed. */
export interface MeasuredPart {
  active: "off" | "on";
  durationS: number | null;
  sampleRateHz: number | null;
  delayS: number | null;
  delaySamples: number | null;
  bands: readonly MeasuredBand[];
}

export interface CheckBasis {
  calibration: CheckCalibration;
  correction: Correction;
  spectrum: CheckSpectrum | null;
  /** Of the model; null: it has none. */
  active: ActivePart | null;
}

export const measuredPart = (
  active: "off" | "on",
  { durationS, rateHz, delayS, delaySamples, bands }: MicrophonePairReading,
): MeasuredPart => ({ active, durationS, sampleRateHz: rateHz, delayS, delaySamples, bands });

export function typedParts(typed: z.output<typeof TypedMicrophones>): MeasuredPart[] {
  const part = (
    active: "off" | "on",
    outside: OctaveBandValues,
    inside: OctaveBandValues,
  ): MeasuredPart => ({
    active,
    durationS: null,
    sampleRateHz: null,
    delayS: null,
    delaySamples: null,
    bands: OCTAVE_BANDS_HZ.map((frequencyHz, band) => {
      const [outsideDb, insideDb] = [outside[band] ?? null, inside[band] ?? null];
      const reason = outsideDb === null || insideDb === null ? "not-typed" : null;
      return { frequencyHz, outsideDb, insideDb, coherence: null, reason };
    }),
  });
  const { outsideOffDb, insideOffDb, outsideOnDb, insideOnDb } = typed;
  return [
    part("off", outsideOffDb, insideOffDb),
    ...(outsideOnDb && insideOnDb ? [part("on", outsideOnDb, insideOnDb)] : []),
  ];
}

/** The same parts with outside and inside the other way round. */
export const swappedParts = (parts: readonly MeasuredPart[]): MeasuredPart[] =>
  parts.map((part) => ({
    ...part,
    delayS: part.delayS === null ? null : -part.delayS,
    delaySamples: part.delaySamples === null ? null : -part.delaySamples,
    bands: part.bands.map(swapped),
  }));

/**
 * What a pair with the active part off, and one with it on where there is one, say of an ear. What can't be known is
 * null, and `warnings` says why.
 */
export function judgeCheck(
  parts: readonly MeasuredPart[],
  { calibration, correction, spectrum, active }: CheckBasis,
  warnings: readonly CheckCode[] = [],
): CheckAnalysis {
  const off = parts.find((part) => part.active === "off");
  if (!off) throw new Error("a check has a part with the active part off");
  const on = parts.find((part) => part.active === "on") ?? null;
  const offBands = off.bands.map(reduced);
  const onBands = on?.bands.map((band, index) => reducedActive(band, off.bands[index]!)) ?? null;
  const ear = earAttenuation(offBands, onBands, correction.bandsDb);
  const found = new Set<CheckCode>(warnings);
  const isRelative = calibration.kind === "none";
  if (looksSwapped(off.bands)) found.add("channels-swapped");
  if (isRelative) found.add("not-calibrated");
  const heard = offBands.filter(({ noiseReductionDb }) => noiseReductionDb !== null).length;
  if (heard === 0) found.add("no-common-noise");
  else if (heard < offBands.length) found.add("bands-left-out");
  const isRated = !found.has("channels-swapped") && !isRelative;
  const bandsDb = spectrum?.bandsDb ?? null;
  const parDb = isRated ? personalAttenuationDb(ear.attenuationDb, bandsDb) : null;
  if (parDb !== null && parDb > boneConductionLimitDb(bandsDb ?? undefined))
    found.add("above-bone-conduction");
  const statedDb = active && activeAttenuationDb(active);
  // Inside louder than outside may there be the microphones; turned round, an active part only seems to add noise.
  const canBeHeld = isRelative || !found.has("channels-swapped");
  const check = ear.activeDb && canBeHeld ? checkActivePart(statedDb, ear.activeDb) : null;
  if (on && statedDb === null) found.add("no-active-part");
  if (check && check.hasPassed === null) found.add("active-bands-unheard");
  return {
    isAbsolute: ["sensitivity", "tone", "typed"].includes(calibration.kind),
    parts: [{ ...off, bands: offBands }, ...(on && onBands ? [{ ...on, bands: onBands }] : [])],
    ear: {
      noiseReductionDb: [...ear.noiseReductionDb],
      attenuationDb: [...ear.attenuationDb],
      activeDb: ear.activeDb && [...ear.activeDb],
      isRelative,
    },
    parDb,
    methodSdDb: methodSdDb(isRelative ? "alike" : calibration.kind, correction.kind),
    active: check && { ...check, shortfallDb: [...check.shortfallDb] },
    warnings: [...found],
  };
}
