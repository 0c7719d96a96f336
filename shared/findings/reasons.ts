import type { I18n } from "@lingui/core";
import type { Reason, UncertaintyReason } from "../acoustics/types";

/** Why there is no plain verdict, or no uncertainty, as the second half of a sentence. */
export function reasonText(i18n: I18n, reason: Reason | UncertaintyReason): string {
  switch (reason) {
    case "no-tasks":
      return i18n.t("no tasks are entered");
    case "level-missing":
      return i18n.t("a task has no level yet");
    case "time-unknown":
      return i18n.t("a part of the shift is not accounted for");
    case "only-upper-bound":
      return i18n.t("only an upper bound is known");
    case "only-lower-bound":
      return i18n.t("only a lower bound is known");
    case "within-uncertainty":
      return i18n.t("the value lies within the uncertainty");
    case "below-threshold":
      return i18n.t("all levels lie below the threshold");
    case "no-peak":
      return i18n.t("no peak was measured");
    case "peak-weighting":
      return i18n.t("the peak was measured with another weighting");
    case "no-slow-maximum":
      return i18n.t("no slow maximum was measured");
    case "wearing-unknown":
      return i18n.t("the wearing time is not known");
    case "no-attenuation-data":
      return i18n.t("the protector’s data do not allow it");
    case "combination-not-tested":
      return i18n.t("there are no test data for the two worn together");
    case "no-c-weighted-level":
      return i18n.t("no C-weighted level is known");
    case "lc-la-out-of-range":
      return i18n.t("the difference C − A lies outside the method’s range");
    case "no-spectrum":
      return i18n.t("no octave bands were measured");
    case "saturated":
      return i18n.t("the active part saturates");
    case "not-stated":
      return i18n.t("the rule does not state it");
    case "peak-at-ear-not-assessed":
      return i18n.t("no method gives a peak under a protector");
    case "worn-in-part":
      return i18n.t("it is not worn all the time, and a peak may come while it is off");
    case "imported":
      return i18n.t("imported");
    case "not-an-energy-level":
      return i18n.t("a level is not an energy mean");
    case "too-few-samples":
      return i18n.t("there are too few samples");
    case "no-instrument":
      return i18n.t("no instrument is named");
  }
}

const REASONS: ReadonlySet<string> = new Set<Reason>([
  "no-tasks",
  "level-missing",
  "time-unknown",
  "only-upper-bound",
  "only-lower-bound",
  "within-uncertainty",
  "below-threshold",
  "no-peak",
  "peak-weighting",
  "no-slow-maximum",
  "wearing-unknown",
  "no-attenuation-data",
  "combination-not-tested",
  "no-c-weighted-level",
  "lc-la-out-of-range",
  "no-spectrum",
  "saturated",
  "not-stated",
  "peak-at-ear-not-assessed",
  "worn-in-part",
  "imported",
]);

/** A reason as a reply carries it, where it is one that we know. */
export const asReason = (text: string | null): Reason | null =>
  text !== null && REASONS.has(text) ? (text as Reason) : null;
