import type { I18n } from "@lingui/core";
import { OCTAVE_BANDS_HZ } from "../../../shared/acoustics/types";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";
import { recordingText } from "../../../shared/recordings/recording-text";
import type {
  CheckAnalysis,
  CheckCode,
  MicrophoneCheckView,
} from "../../../shared/schemas/microphone-check";

type Params = NonNullable<MicrophoneCheckView["failure"]>["params"];

export function checkStateWord(i18n: I18n, state: MicrophoneCheckView["state"]): string {
  switch (state) {
    case "analysing":
      return i18n.t("Being analysed");
    case "analysed":
      return i18n.t("Analysed, not kept");
    case "kept":
      return i18n.t("Kept as a fit test");
    case "failed":
      return i18n.t("Can’t be used");
    case "cancelled":
      return i18n.t("Cancelled");
  }
}

export const earWord = (i18n: I18n, ear: MicrophoneCheckView["ear"]): string =>
  ear === "left" ? i18n.t("Left ear") : i18n.t("Right ear");

function channelWord(i18n: I18n, channel: unknown): string {
  switch (channel) {
    case "outside":
      return i18n.t("outside");
    case "inside":
      return i18n.t("inside");
    default:
      return i18n.t("outside and inside");
  }
}

/** Why recordings could not be used, and what to do. */
export function failureText(i18n: I18n, code: string, params: Params, locale: Locale): string {
  const seconds = (name: string) => formatNumber(Number(params[name]), 1, locale);
  const hertz = (name: string) => formatNumber(Number(params[name]), 0, locale);
  switch (code) {
    case "rates-differ":
      return i18n.t(
        "The two recordings have different sampling rates: {outside} Hz outside, {inside} Hz inside. Record both with one setting.",
        { outside: hertz("outsideHz"), inside: hertz("insideHz") },
      );
    case "too-short":
      return i18n.t(
        "Only {found} s are there in both channels; at least {needed} s are needed, a minute is better.",
        { found: seconds("foundS"), needed: seconds("neededS") },
      );
    case "channel-dead":
      return i18n.t(
        "There is nothing in this channel: {channel}. Was the microphone connected and switched on?",
        { channel: channelWord(i18n, params.channel) },
      );
    case "channel-clipped":
      return i18n.t(
        "The recording was overloaded ({channel}, {share} % of it). Record again with less gain.",
        {
          channel: channelWord(i18n, params.channel),
          share: formatNumber(Number(params.sharePct), 1, locale),
        },
      );
    case "one-channel-only":
      return i18n.t(
        "A file has one channel only, where two were named. Choose “a file for each microphone” and send both.",
      );
    case "check-given-up":
      return i18n.t("Analysing it ended too often before it was done. Send it again.");
    default:
      return recordingText(i18n, code, params) ?? i18n.t("The recordings could not be analysed.");
  }
}

/** What an analysis cautions of. */
export function warningText(i18n: I18n, code: CheckCode, isRelative: boolean): string {
  switch (code) {
    case "channels-swapped":
      return isRelative
        ? i18n.t(
            "It is louder inside than outside in every band. Without a calibration the microphone inside may only be the more sensitive one; were the channels the other way round, the check would fail for that alone.",
          )
        : i18n.t(
            "It is louder inside than outside in every band: the channels are probably the other way round.",
          );
    case "no-common-noise":
      return i18n.t(
        "What is inside has nothing in common with what is outside, in no band. Was there noise, and do both recordings belong together?",
      );
    case "lengths-differ":
      return i18n.t("The two recordings are not equally long; what both have was compared.");
    case "no-active-part":
      return i18n.t(
        "The register states no active attenuation for this model: what was found is shown and held against nothing.",
      );
    case "channel-clipped":
      return i18n.t("Single samples are overloaded. The result stands, but look at the gain.");
    case "not-calibrated":
      return i18n.t(
        "Without a calibration this is a relative analysis. A difference between the two microphones is a noise reduction only if both are equally sensitive, and nobody has said so: no rating is given. The active attenuation needs no calibration, for each microphone is compared with itself.",
      );
    case "bands-left-out":
      return i18n.t("Some bands say nothing and are left out; the table says why.");
    case "active-bands-unheard":
      return i18n.t(
        "A band in which the model promises active attenuation could not be heard: the check has neither passed nor failed. Repeat it in louder low-frequency noise.",
      );
    case "above-bone-conduction":
      return i18n.t(
        "More than the skull lets anybody have. A microphone does not hear what goes through bone: this is no fit.",
      );
    case "channel-dead":
    case "rates-differ":
    case "too-short":
    case "one-channel-only":
      return i18n.t("The recordings could not be analysed.");
  }
}

export function reasonWord(
  i18n: I18n,
  reason: CheckAnalysis["parts"][number]["bands"][number]["reason"],
): string {
  switch (reason) {
    case "too-little-noise":
      return i18n.t("too little noise");
    case "low-coherence":
      return i18n.t("too little in common");
    case "not-typed":
      return i18n.t("not stated");
    case null:
      return "";
  }
}

/** Whether the active part did its work, in words; null: there was nothing to check. */
export function activeText(
  i18n: I18n,
  { active }: CheckAnalysis,
  locale: Locale,
): { word: string; sentence: string } | null {
  if (!active) return null;
  const toleranceDb = formatLevel(active.toleranceDb, locale);
  if (active.hasPassed === null)
    return {
      word: i18n.t("Can’t tell yet"),
      sentence: i18n.t("A band that matters could not be heard."),
    };
  if (active.hasPassed)
    return {
      word: i18n.t("Active check passed"),
      sentence: i18n.t(
        "In every band that was heard the active part is no more than {tolerance} dB behind what the model states.",
        { tolerance: toleranceDb },
      ),
    };
  const bands = active.shortfallDb.flatMap((db, band) =>
    db !== null && db > active.toleranceDb
      ? [
          i18n.t("{hz} Hz: {db} dB less", {
            hz: OCTAVE_BANDS_HZ[band],
            db: formatLevel(db, locale),
          }),
        ]
      : [],
  );
  return {
    word: i18n.t("Active check failed"),
    sentence: i18n.t("More than {tolerance} dB behind what the model states. {bands}.", {
      tolerance: toleranceDb,
      bands: bands.join("; "),
    }),
  };
}

export function calibrationWord(i18n: I18n, { kind }: MicrophoneCheckView["calibration"]): string {
  switch (kind) {
    case "tone":
      return i18n.t("Both microphones by a calibrator’s tone");
    case "sensitivity":
      return i18n.t("Known sensitivities");
    case "alike":
      return i18n.t("Not calibrated; side by side they showed the same level.");
    case "none":
      return i18n.t("None: relative only");
    case "typed":
      return i18n.t("Octave bands off a meter");
  }
}

export function correctionWord(
  i18n: I18n,
  { kind, source }: MicrophoneCheckView["correction"],
): string {
  switch (kind) {
    case "none":
      return i18n.t(
        "None: the noise reduction is taken for the attenuation. The open ear’s own response lies between the two.",
      );
    case "open-ear":
      return i18n.t("Open ear in a diffuse field, ISO 11904-1, from memory");
    case "own":
      return source;
  }
}
