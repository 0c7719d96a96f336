import { describe, expect, test } from "vitest";
import { CheckInput, TypedCheckInput } from "../../../shared/schemas/microphone-check";
import type { CalibrationTone } from "../../../shared/schemas/recording";
import {
  type CheckDraft,
  CheckFields,
  calibrationOf,
  checkOf,
  emptyDraft,
  filesThatCount,
  missingPlaces,
  noFiles,
  partsOf,
  placesOf,
  typedOf,
} from "./check-draft";

const MODEL = "5b1f0c7e-3f0d-4b9a-9a36-5f9f3f2f1c11";
const file = (name: string) => new File(["x"], name);
const draft = (more: Partial<CheckDraft> = {}): CheckDraft => ({
  ...emptyDraft(MODEL, "left"),
  ...more,
});
const bands = (db: number): [number, number, number, number, number, number, number, number] => [
  db,
  db,
  db,
  db,
  db,
  db,
  db,
  db,
];

const heard = { pascalPerFullScale: 2, frequencyHz: 1000, spreadDb: 0.1, durationS: 3 };
const tone = (id: string, channels: CalibrationTone["channels"]): CalibrationTone => ({
  id,
  fileName: "tone.wav",
  toneDb: 94,
  frequencyHz: 1000,
  channels,
});
const [A, B] = ["0f6a7a52-5c0e-4f37-8a0a-0b3a6f6d8e01", "0f6a7a52-5c0e-4f37-8a0a-0b3a6f6d8e02"];

describe("which channel of which file is outside", () => {
  test("a stereo file has both, whichever is named", () => {
    const files = { ...noFiles, offOutside: file("off.wav"), onOutside: file("on.wav") };
    const { parts, files: sent } = partsOf(draft({ outsideChannel: "2" }), files);
    expect(sent.map(({ name }) => name)).toEqual(["off.wav", "on.wav"]);
    expect(parts).toEqual([
      { active: "off", outside: { file: 0, channel: 2 }, inside: { file: 0, channel: 1 } },
      { active: "on", outside: { file: 1, channel: 2 }, inside: { file: 1, channel: 1 } },
    ]);
  });

  test("two files have one each, and the second pair begins at the third", () => {
    const files = {
      offOutside: file("a"),
      offInside: file("b"),
      onOutside: file("c"),
      onInside: file("d"),
    };
    const { parts, files: sent } = partsOf(draft({ layout: "two-files" }), files);
    expect(sent).toHaveLength(4);
    expect(parts[1]).toEqual({
      active: "on",
      outside: { file: 2, channel: 1 },
      inside: { file: 3, channel: 1 },
    });
  });

  test("the active part may be missing, half of it not", () => {
    const both = { ...noFiles, offOutside: file("a"), offInside: file("b") };
    expect(missingPlaces("stereo", noFiles)).toEqual(["offOutside"]);
    expect(missingPlaces("two-files", noFiles)).toEqual(["offOutside", "offInside"]);
    expect(missingPlaces("two-files", both)).toEqual([]);
    expect(placesOf("stereo", false)).toEqual(["offOutside"]);
    expect(filesThatCount({ ...both, onInside: file("d") }, false)).toEqual(both);
    expect(missingPlaces("two-files", { ...both, onInside: file("d") })).toEqual(["onOutside"]);
  });
});

describe("calibration", () => {
  test("each tone by the channel of its microphone, or the only one that heard it", () => {
    const tones = { outside: tone(A!, [heard, null]), inside: tone(B!, [heard]) };
    expect(calibrationOf(draft(), tones)).toEqual({
      kind: "tone",
      outside: { toneId: A, channel: 1 },
      inside: { toneId: B, channel: 1 },
    });
    const none = { ...tones, inside: tone(B!, [null, null]) };
    expect(calibrationOf(draft(), none)).toBeNull();
    expect(calibrationOf(draft(), { ...tones, inside: null })).toBeNull();
  });

  test("both sensitivities or none; without calibration nothing is needed", () => {
    const noTones = { outside: null, inside: null };
    const half = draft({ calibration: "sensitivity", outsidePa: 2 });
    expect(calibrationOf(half, noTones)).toBeNull();
    expect(calibrationOf({ ...half, insidePa: 4 }, noTones)).toEqual({
      kind: "sensitivity",
      outsidePa: 2,
      insidePa: 4,
    });
    expect(calibrationOf(draft({ calibration: "none" }), noTones)).toEqual({ kind: "none" });
  });
});

describe("what is sent is what the server takes", () => {
  test("recordings", () => {
    const { parts } = partsOf(draft(), { ...noFiles, offOutside: file("off.wav") });
    const own = draft({ correction: "own", ownDb: bands(1.5), source: "our own dummy head" });
    const check = checkOf(own, MODEL, parts, { kind: "alike" });
    expect(CheckInput.parse(check)).toEqual(check);
  });

  test("typed bands, with the active part and without", () => {
    const off = { outsideOffDb: bands(100), insideOffDb: bands(75) };
    const without = typedOf(draft({ how: "typed", off }), MODEL, off);
    expect(TypedCheckInput.parse(without)).toEqual(without);
    const on = { outsideOnDb: bands(100), insideOnDb: bands(60) };
    const withOn = typedOf(draft({ how: "typed", off, on }), MODEL, off);
    expect(TypedCheckInput.parse(withOn).bands.insideOnDb).toEqual(bands(60));
  });

  test("what is missing is named where it is missing", () => {
    const missing = (more: Partial<CheckDraft>) =>
      CheckFields.safeParse(draft(more)).error?.issues.map(({ path }) => path.join(".")) ?? [];
    expect(missing({})).toEqual([]);
    expect(missing({ modelId: null })).toEqual(["modelId"]);
    expect(missing({ how: "typed" })).toEqual(["off"]);
    expect(missing({ calibration: "sensitivity", outsidePa: 2 })).toEqual(["insidePa"]);
    expect(missing({ correction: "own" })).toEqual(["ownDb", "source"]);
  });
});
