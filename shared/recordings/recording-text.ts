import type { I18n } from "@lingui/core";
import { formatNumber } from "../format/number";
import { localeOf } from "../i18n/index";

type Params = Readonly<Record<string, unknown>>;

/** What is wrong with a recording or a calibrator's tone, and what to do; null: this code is of something else. */
export function recordingText(i18n: I18n, code: string, params: Params): string | null {
  const figure = (name: string, digits: number) =>
    typeof params[name] === "number" ? formatNumber(params[name], digits, localeOf(i18n)) : null;
  switch (code) {
    case "recording-not-wav":
      return i18n.t("This is not a WAV file. Export the recording as WAV and send it again.");
    case "recording-header-damaged":
      return i18n.t("The file is damaged: its head can’t be read. Export it again.");
    case "recording-not-numbers":
      return i18n.t(
        "The file is damaged: some of its samples are no numbers. Export the recording again.",
      );
    case "recording-compressed":
      return i18n.t(
        "The recording is compressed, and compression changes levels. Export it as plain PCM or floating point.",
      );
    case "recording-format-unsupported":
      return i18n.t("Its samples are of a kind that is not read. Use 16, 24 or 32 bits.");
    case "recording-rate-unsupported":
      return i18n.t("Its sampling rate is not read. Use 44.1, 48, 88.2, 96, 176.4 or 192 kHz.");
    case "recording-channels-unsupported":
      return i18n.t("It has more than two channels. Export one or two of them.");
    case "recording-empty":
      return i18n.t("There is no sound in this file.");
    case "recording-silent":
      return i18n.t("There is nothing but silence in it. Was the microphone connected?");
    case "recording-given-up":
      return i18n.t("Analysing it ended too often before it was done. Send it again.");
    case "recording-length-unstated":
      return i18n.t(
        "The file does not say how long it is, as after a recorder that lost power. All that is there can be used.",
      );
    case "recording-truncated": {
      const [found, stated] = [figure("foundS", 1), figure("statedS", 1)];
      return found && stated
        ? i18n.t("The file ends early: {found} s of the {stated} s that it promises are there.", {
            found,
            stated,
          })
        : i18n.t("The file ends earlier than it promises.");
    }
    case "recording-longer": {
      const [found, stated] = [figure("foundS", 1), figure("statedS", 1)];
      return found && stated
        ? i18n.t(
            "The file goes on after its end: it promises {stated} s, and {found} s are there. All of it can be used.",
            { found, stated },
          )
        : i18n.t("The file goes on after its end. All of it can be used.");
    }
    case "recording-clipped": {
      const share = figure("sharePct", 2);
      return share
        ? i18n.t(
            "The recording was overloaded: {runs, plural, one {one place} other {# places}} in channel {channel}, {share} % of it. Levels and peaks may have been higher.",
            { runs: Number(params.runs), channel: Number(params.channel), share },
          )
        : i18n.t("The recording was overloaded. Levels and peaks may have been higher.");
    }
    case "tone-not-found":
      return i18n.t("There is no calibrator’s tone in this file that lasts two seconds.");
    case "tone-unsteady":
      return i18n.t(
        "The tone is not steady for two seconds. Seat the calibrator well and record it again.",
      );
    case "tone-frequency-off": {
      const hz = figure("frequencyHz", 0);
      return hz
        ? i18n.t("The tone is at {hz} Hz, not at the calibrator’s frequency.", { hz })
        : i18n.t("The tone is not at the calibrator’s frequency.");
    }
    case "tone-unknown":
      return i18n.t("Measure the tone first.");
    case "recording-relative":
      return i18n.t(
        "It has no calibration, and so no level. Only its spectrum can be used, under the level that the task has.",
      );
    case "recording-implausible":
      return i18n.t(
        "These levels can’t be: between 20 and 160 dB was expected. Is the sensitivity right?",
      );
    case "channel-silent":
      return i18n.t("There is nothing in this channel.");
    case "spectrum-incomplete":
      return i18n.t("Some of its octave bands are empty.");
    case "task-has-no-level":
      return i18n.t("The task has no level on that day that the spectrum could be put under.");
    case "level-not-laeq":
      return i18n.t(
        "The task’s level is a mean at another exchange rate, and no spectrum adds up to that.",
      );
    case "keep-reason-and-date":
      return i18n.t("A reason and a date belong together: both, or none.");
    case "date-not-ahead":
      return i18n.t("This date has to lie ahead.");
    default:
      return null;
  }
}
