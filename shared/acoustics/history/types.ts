import type { MeterSettings } from "../types";

/** A value that was not recorded, or was recorded as not usable. Never 0 dB. */
export const MISSING = -32_768;

/** Recording intervals that are understood, seconds. */
export const SHORTEST_INTERVAL_S = 0.125;
export const LONGEST_INTERVAL_S = 60;

/**
 * What a column of a time history holds, one value an interval: the energy mean over the interval (LAeq, LCeq), the slow
 * level at its end (LAS), or the greatest value in it (LASmax, LAFmax, and the peaks).
 */
export type ChannelKind = "laeq" | "las" | "las-max" | "laf-max" | "lceq" | "lcpeak" | "zpeak";

export interface HistoryChannel {
  readonly kind: ChannelKind;
  /** Hundredths of a decibel, or `MISSING`. */
  readonly levels: Int16Array;
}

/** The samples from `fromIndex` up to, not including, `toIndex`: a task's bracket, or a part that does not count. */
export interface Stretch {
  readonly id: string;
  readonly kind: "task" | "left-out";
  readonly fromIndex: number;
  readonly toIndex: number;
}

/** What a dose is counted by. */
export type DoseSettings = Pick<
  MeterSettings,
  "criterionLevelDb" | "exchangeRateDb" | "thresholdDb"
>;

/** Whether a number is the true one, or the true one is at most (`upper`) or at least (`lower`) this. */
export type Bound = "exact" | "upper" | "lower";

export interface LevelFigure {
  readonly levelDb: number;
  readonly bound: Bound;
  readonly from: ChannelKind;
  /** Time for which the channel has values, seconds. */
  readonly durationS: number;
}

export interface DoseFigure {
  readonly settings: DoseSettings;
  /** Percent of the allowance of 8 h at the criterion level. */
  readonly dosePct: number;
  /** Level that would give the dose in the time; null for a dose of 0, which has no level. */
  readonly averageDb: number | null;
  readonly bound: Bound;
  readonly from: ChannelKind;
  readonly durationS: number;
}

export interface PeakFigure {
  readonly levelDb: number;
  readonly weighting: "C" | "Z";
  readonly from: ChannelKind;
}

/** What the samples of one part of a time history say. Null: no channel can say it. */
export interface PartEvaluation {
  readonly sampleCount: number;
  /** Time of the samples for which any channel has a value, seconds. */
  readonly durationS: number;
  /** Time of the samples for which none has, seconds. */
  readonly missingS: number;
  readonly laeq: LevelFigure | null;
  readonly lceq: LevelFigure | null;
  readonly maxSlow: LevelFigure | null;
  readonly peaks: readonly PeakFigure[];
  /** One for each of the settings asked for, in their order. */
  readonly doses: readonly (DoseFigure | null)[];
}

export interface StretchEvaluation extends PartEvaluation {
  readonly id: string;
  readonly kind: Stretch["kind"];
  /** Share in the energy of what counts, percent; null without LAeq, and for what does not count. */
  readonly energySharePct: number | null;
}

export interface HistoryEvaluation {
  /** Without the stretches that are left out. */
  readonly counted: PartEvaluation;
  /** As if nothing were left out. */
  readonly everything: PartEvaluation;
  readonly leftOutS: number;
  /** A task's bracket by its counted samples, a stretch left out by all of its samples. In the order given. */
  readonly stretches: readonly StretchEvaluation[];
}
