import type { I18n } from "@lingui/core";
import { formatLevel } from "../../../shared/format/level";
import type { Locale } from "../../../shared/i18n/index";
import type { ProtectorFacts } from "../../../shared/schemas/evaluation";

/** The single numbers of a label, those that are stated: "SNR 33, H 34, M 30, L 26". */
export function labelledData(
  i18n: I18n,
  facts: ProtectorFacts,
  locale: Locale,
): { key: string; label: string; value: string }[] {
  const numbers = [
    { key: "us", label: i18n.t("US single number"), db: facts.usRatingDb },
    { key: "snr", label: i18n.t("SNR"), db: facts.snrDb },
    { key: "h", label: i18n.t("H"), db: facts.hDb },
    { key: "m", label: i18n.t("M"), db: facts.mDb },
    { key: "l", label: i18n.t("L"), db: facts.lDb },
    { key: "slc80", label: i18n.t("SLC80"), db: facts.slc80Db },
  ];
  return numbers.flatMap(({ key, label, db }) =>
    db === null ? [] : [{ key, label, value: formatLevel(db, locale) }],
  );
}
