import type { I18n } from "@lingui/core";
import { asReason, reasonText } from "../../../shared/findings/reasons";
import type { MethodRow } from "../../../shared/schemas/at-ear";

/** "Octave-band, 84 % protected": a method in one of its ways. */
export function methodInItsWay(i18n: I18n, row: MethodRow): string {
  switch (row.method) {
    case "octave-band":
      return row.protectedPct === null
        ? i18n.t("Octave-band, with the rule set’s own share")
        : i18n.t("Octave-band, {share} % protected", { share: row.protectedPct });
    case "hml":
      return i18n.t("HML");
    case "snr":
      return i18n.t("SNR");
    case "us-single-number":
      switch (row.derating) {
        case "half":
          return row.startsFrom === "lc"
            ? i18n.t("US single number, half of the rating")
            : i18n.t("US single number, half of the rating less 7 dB");
        case "by-type":
          return i18n.t("US single number, less by type");
        default:
          return i18n.t("US single number, in full");
      }
    case "percentile":
      return row.reachedBy === "few"
        ? i18n.t("Percentile rating, reached by few")
        : i18n.t("Percentile rating, reached by most");
    case "slc80":
      return i18n.t("SLC80");
    case "own-fit":
      return i18n.t("Own fit");
  }
}

/** What the method's figure comes off. */
export function startWord(i18n: I18n, { startsFrom }: MethodRow): string {
  switch (startsFrom) {
    case "la":
      return i18n.t("off the A-weighted level");
    case "lc":
      return i18n.t("off the C-weighted level");
    case "bands":
      return i18n.t("band by band");
  }
}

/** Why a method has no figure; an own fit is a worker's, and no matter of the protector's data. */
export function whyNot(i18n: I18n, row: MethodRow, hasWorker: boolean): string {
  if (row.method === "own-fit" && row.reason === "no-attenuation-data")
    return hasWorker
      ? i18n.t("no fit of this worker is on record")
      : i18n.t("a fit is a worker’s own: open this for a worker");
  if (row.reason === "no-attenuation-data") return i18n.t("not stated");
  const reason = asReason(row.reason);
  return reason ? reasonText(i18n, reason) : (row.reason ?? "");
}
