import { setupI18n } from "@lingui/core";
import { expect, test } from "vitest";
import type { CheckAnalysis } from "../../../shared/schemas/microphone-check";
import { activeText, failureText } from "./check-words";

const i18n = setupI18n({ locale: "en", messages: { en: {} } });
const noBands = Array<null>(8).fill(null);

const analysis = (active: CheckAnalysis["active"]): CheckAnalysis => ({
  isAbsolute: false,
  parts: [],
  ear: { noiseReductionDb: noBands, attenuationDb: noBands, activeDb: null, isRelative: false },
  parDb: null,
  methodSdDb: 3,
  active,
  warnings: [],
});

test("an active check in words: passed, failed with its bands, or neither", () => {
  const check = (hasPassed: boolean | null, shortfallDb: (number | null)[]) =>
    activeText(i18n, analysis({ hasPassed, shortfallDb, toleranceDb: 3 }), "en");
  expect(activeText(i18n, analysis(null), "en")).toBeNull();
  expect(check(true, noBands)?.word).toBe("Active check passed");
  // Far more than stated passes too.
  expect(check(true, [-9, 3, 0, 0, 0, 0, 0, 0])?.sentence).toBe(
    "In every band that was heard the active part is no more than 3.0 dB behind what the model states.",
  );
  expect(check(null, noBands)?.word).toBe("Can’t tell yet");
  const failed = check(false, [null, 6.24, 3.1, 3, 0, 0, 0, -2]);
  expect(failed?.word).toBe("Active check failed");
  expect(failed?.sentence).toBe(
    "More than 3.0 dB behind what the model states. 125 Hz: 6.2 dB less; 250 Hz: 3.1 dB less.",
  );
});

test("a failure says what to do, with its figures", () => {
  expect(failureText(i18n, "rates-differ", { outsideHz: 48_000, insideHz: 44_100 }, "en")).toMatch(
    /48.000 Hz outside, 44.100 Hz inside/,
  );
  expect(failureText(i18n, "channel-dead", { channel: "inside" }, "en")).toContain("inside");
  expect(failureText(i18n, "too-short", { foundS: 2.04, neededS: 5 }, "en")).toContain("2.0 s");
  // A file's own faults have their own words.
  expect(failureText(i18n, "recording-not-wav", {}, "en")).toContain("WAV");
});
