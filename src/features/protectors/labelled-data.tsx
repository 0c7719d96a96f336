import type { I18n } from "@lingui/core";
import type { z } from "zod";
import { formatLevel } from "../../../shared/format/level";
import type { Locale } from "../../../shared/i18n/index";
import type { RegisterData } from "../../../shared/schemas/protector";

type Facts = Pick<
  z.infer<typeof RegisterData>,
  "usRatingDb" | "snrDb" | "hDb" | "mDb" | "lDb" | "slc80Db" | "percentile" | "auClass"
>;

/** What stands on a label, as far as it is stated: "SNR 33, H 34, M 30, L 26"; the class is the only one without a unit. */
export function labelledData(
  i18n: I18n,
  facts: Facts,
  locale: Locale,
): { key: string; label: string; value: string; isLevel: boolean }[] {
  const numbers = [
    { key: "us", label: i18n.t("US single number"), db: facts.usRatingDb },
    { key: "most", label: i18n.t("Most users"), db: facts.percentile?.mostDb ?? null },
    { key: "few", label: i18n.t("Few users"), db: facts.percentile?.fewDb ?? null },
    { key: "snr", label: i18n.t("SNR"), db: facts.snrDb },
    { key: "h", label: i18n.t("H"), db: facts.hDb },
    { key: "m", label: i18n.t("M"), db: facts.mDb },
    { key: "l", label: i18n.t("L"), db: facts.lDb },
    { key: "slc80", label: i18n.t("SLC80"), db: facts.slc80Db },
  ];
  const levels = numbers.flatMap(({ key, label, db }) =>
    db === null ? [] : [{ key, label, value: formatLevel(db, locale), isLevel: true }],
  );
  return facts.auClass === null
    ? levels
    : [
        ...levels,
        {
          key: "class",
          label: i18n.t("Australian class"),
          value: String(facts.auClass),
          isLevel: false,
        },
      ];
}
