import type { I18n } from "@lingui/core";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import type { CalibrationTone, RecordingView } from "../../../shared/schemas/recording";

export function recordingStateText(i18n: I18n, state: RecordingView["state"]): string {
  switch (state) {
    case "uploaded":
      return i18n.t("Waits for its analysis");
    case "analysing":
      return i18n.t("Being analysed");
    case "asked":
      return i18n.t("Needs your word");
    case "analysed":
      return i18n.t("Analysed");
    case "failed":
      return i18n.t("Can’t be used");
    case "cancelled":
      return i18n.t("Cancelled");
  }
}

/** "int24": 24 bits. */
export function sampleFormatText(i18n: I18n, format: string): string {
  const bits = format.replace(/\D+/, "");
  return format.startsWith("float")
    ? i18n.t("{bits} bits, floating point", { bits })
    : i18n.t("{bits} bits", { bits });
}

export const megabytes = (bytes: number, locale: Locale): string =>
  formatNumber(bytes / 1024 ** 2, bytes < 10 * 1024 ** 2 ? 1 : 0, locale);

/** Level that a sine at full scale would have: what an unlikely sensitivity shows by. */
export const fullScaleSineDb = (pascalPerFullScale: number): number =>
  20 * Math.log10(pascalPerFullScale / Math.SQRT2 / 20e-6);

/** What a tone gave, channel by channel. */
export function toneText(i18n: I18n, { channels }: CalibrationTone, locale: Locale): string {
  return channels
    .map((channel, index) =>
      channel
        ? i18n.t("Channel {channel}: a sine at full scale is {level} dB ({seconds} s steady).", {
            channel: index + 1,
            level: formatLevel(fullScaleSineDb(channel.pascalPerFullScale), locale),
            seconds: formatNumber(channel.durationS, 1, locale),
          })
        : i18n.t("Channel {channel}: no tone; it will have relative levels only.", {
            channel: index + 1,
          }),
    )
    .join(" ");
}

export function calibrationText(
  i18n: I18n,
  calibration: RecordingView["calibration"],
  locale: Locale,
): string {
  switch (calibration.kind) {
    case "none":
      return i18n.t("None: relative levels only");
    case "sensitivity":
      return i18n.t("{pascal} Pa at full scale", {
        pascal: formatNumber(calibration.pascalPerFullScale, 3, locale),
      });
    case "tone":
      return i18n.t("Tone of {level} dB, {file}", {
        level: formatLevel(calibration.tone.toneDb, locale),
        file: calibration.tone.fileName,
      });
  }
}
