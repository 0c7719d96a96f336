import type { I18n } from "@lingui/core";
import type { RunDoubtCode } from "../schemas/run-doubts";

/** What speaks against a run, in a few words for a list. */
export function doubtWord(i18n: I18n, code: RunDoubtCode): string {
  switch (code) {
    case "field-check-drift":
      return i18n.t("Field checks drifted");
    case "field-check-mistyped":
      return i18n.t("A field check looks mistyped");
    case "calibration-out-of-date":
      return i18n.t("Calibration out of date");
    case "calibration-failed":
      return i18n.t("Calibration failed");
    case "run-too-short":
      return i18n.t("Run time too short");
    case "field-check-missing":
      return i18n.t("A field check is missing");
    case "outside-shift":
      return i18n.t("Outside the shift");
    case "shorter-than-shift":
      return i18n.t("Shorter than the shift");
    case "clipped":
      return i18n.t("Overloaded");
    case "under-range":
      return i18n.t("Under range");
  }
}
