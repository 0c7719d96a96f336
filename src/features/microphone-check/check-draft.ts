import { z } from "zod";
import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import { OctaveBands } from "../../../shared/schemas/evaluation";
import { Ear } from "../../../shared/schemas/fit";
import type {
  CheckCalibrationInput,
  CheckInput,
  CheckPart,
  Correction,
  TypedCheckInput,
} from "../../../shared/schemas/microphone-check";
import type { CalibrationTone } from "../../../shared/schemas/recording";

const Pascal = z.number().positive().max(1e6).nullable();

/** The form as it is filled in; files and tones stand beside it. */
export const CheckFields = z
  .object({
    modelId: z.string().nullable(),
    ear: Ear,
    how: z.enum(["recordings", "typed"]),
    /** One stereo file by pair, or a file by microphone. */
    layout: z.enum(["stereo", "two-files"]),
    /** Of a stereo file. */
    outsideChannel: z.enum(["1", "2"]),
    calibration: z.enum(["tone", "sensitivity", "alike", "none"]),
    toneDb: z.number().min(70).max(130).nullable(),
    outsidePa: Pascal,
    insidePa: Pascal,
    off: z.object({ outsideOffDb: OctaveBands, insideOffDb: OctaveBands }).nullable(),
    on: z.object({ outsideOnDb: OctaveBands, insideOnDb: OctaveBands }).nullable(),
    correction: z.enum(["none", "open-ear", "own"]),
    ownDb: z.array(z.number().min(-30).max(30)).length(8).nullable(),
    source: z.string().trim().max(400),
    taskId: z.string().nullable(),
  })
  .check(({ value, issues }) => {
    const need = (path: keyof typeof value) =>
      issues.push({ code: "custom", input: value, path: [path], params: { code: "required" } });
    const { how, calibration, correction } = value;
    if (value.modelId === null) need("modelId");
    if (how === "typed" && value.off === null) need("off");
    if (how === "recordings" && calibration === "sensitivity")
      for (const name of ["outsidePa", "insidePa"] as const) if (value[name] === null) need(name);
    if (correction === "own" && value.ownDb === null) need("ownDb");
    if (correction === "own" && value.source === "") need("source");
  });
export type CheckDraft = z.output<typeof CheckFields>;

export const emptyDraft = (
  modelId: string | null,
  ear: Ear,
  taskId: string | null = null,
): CheckDraft => ({
  modelId,
  ear,
  how: "recordings",
  layout: "stereo",
  outsideChannel: "1",
  calibration: "tone",
  toneDb: 94,
  outsidePa: null,
  insidePa: null,
  off: null,
  on: null,
  correction: "none",
  ownDb: null,
  source: "",
  taskId,
});

/** Files as they were chosen: a stereo file stands under `outside`. */
export interface ChosenFiles {
  readonly offOutside: File | null;
  readonly offInside: File | null;
  readonly onOutside: File | null;
  readonly onInside: File | null;
}
export type FilePlace = keyof ChosenFiles;
export const noFiles: ChosenFiles = {
  offOutside: null,
  offInside: null,
  onOutside: null,
  onInside: null,
};

/** The places that a layout has; those of an active part, where there is one, come last and are optional. */
export const placesOf = (
  layout: CheckDraft["layout"],
  hasActivePart: boolean,
): readonly FilePlace[] => {
  const off: readonly FilePlace[] =
    layout === "stereo" ? ["offOutside"] : ["offOutside", "offInside"];
  const on: readonly FilePlace[] = layout === "stereo" ? ["onOutside"] : ["onOutside", "onInside"];
  return hasActivePart ? [...off, ...on] : off;
};

/** Files of the active part count only where the model has one. */
export const filesThatCount = (files: ChosenFiles, hasActivePart: boolean): ChosenFiles =>
  hasActivePart ? files : { ...files, onOutside: null, onInside: null };

/** Places that still need a file: those with the part off, and the second of a pair that has its first. */
export function missingPlaces(layout: CheckDraft["layout"], files: ChosenFiles): FilePlace[] {
  const hasOn = files.onOutside !== null || files.onInside !== null;
  return placesOf(layout, true).filter(
    (place) => files[place] === null && (place.startsWith("off") || (hasOn && layout !== "stereo")),
  );
}

/** The files in the order in which they are sent, and the pairs that point at them. */
export function partsOf(
  { layout, outsideChannel }: Pick<CheckDraft, "layout" | "outsideChannel">,
  files: ChosenFiles,
): { parts: CheckPart[]; files: File[] } {
  const sent: File[] = [];
  const parts: CheckPart[] = [];
  const outsideIs = outsideChannel === "1" ? 1 : 2;
  for (const [active, outside, inside] of [
    ["off", files.offOutside, files.offInside],
    ["on", files.onOutside, files.onInside],
  ] as const) {
    const file = sent.length;
    if (layout === "stereo") {
      if (!outside) continue;
      sent.push(outside);
      parts.push({
        active,
        outside: { file, channel: outsideIs },
        inside: { file, channel: 3 - outsideIs },
      });
    } else {
      if (!outside || !inside) continue;
      sent.push(outside, inside);
      parts.push({
        active,
        outside: { file, channel: 1 },
        inside: { file: file + 1, channel: 1 },
      });
    }
  }
  return { parts, files: sent };
}

export interface Tones {
  readonly outside: CalibrationTone | null;
  readonly inside: CalibrationTone | null;
}

/** The channel that heard the tone: the one its microphone has in the recordings, else the only one that did. */
function toneChannel(tone: CalibrationTone, expected: number): number | null {
  if (tone.channels[expected - 1]) return expected;
  const heard = tone.channels.flatMap((channel, index) => (channel ? [index + 1] : []));
  return heard.length === 1 ? heard[0]! : null;
}

/** Null: what it needs is not there yet. */
export function calibrationOf(draft: CheckDraft, tones: Tones): CheckCalibrationInput | null {
  const { calibration, outsidePa, insidePa, layout, outsideChannel } = draft;
  if (calibration === "alike" || calibration === "none") return { kind: calibration };
  if (calibration === "sensitivity")
    return outsidePa === null || insidePa === null
      ? null
      : { kind: "sensitivity", outsidePa, insidePa };
  if (!tones.outside || !tones.inside) return null;
  const expected = layout === "stereo" ? Number(outsideChannel) : 1;
  const outside = toneChannel(tones.outside, expected);
  const inside = toneChannel(tones.inside, layout === "stereo" ? 3 - expected : 1);
  if (outside === null || inside === null) return null;
  return {
    kind: "tone",
    outside: { toneId: tones.outside.id, channel: outside },
    inside: { toneId: tones.inside.id, channel: inside },
  };
}

function correctionOf({ correction, ownDb, source }: CheckDraft): Correction {
  const zeros = OCTAVE_BANDS_HZ.map(() => 0);
  return correction === "own"
    ? { kind: "own", bandsDb: ownDb ?? zeros, source }
    : { kind: correction, bandsDb: zeros, source: "" };
}

export function checkOf(
  draft: CheckDraft,
  modelId: string,
  parts: CheckPart[],
  calibration: CheckCalibrationInput,
): CheckInput {
  const { ear, taskId } = draft;
  return { modelId, ear, parts, calibration, correction: correctionOf(draft), taskId };
}

export function typedOf(
  draft: CheckDraft,
  modelId: string,
  off: NonNullable<CheckDraft["off"]>,
): TypedCheckInput {
  const { ear, taskId, on } = draft;
  const bands = {
    ...off,
    outsideOnDb: on?.outsideOnDb ?? null,
    insideOnDb: on?.insideOnDb ?? null,
  };
  return { modelId, ear, correction: correctionOf(draft), taskId, bands };
}
