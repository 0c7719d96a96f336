import type { I18n } from "@lingui/core";
import { formatLimit } from "../../../shared/format/level";
import type { Locale } from "../../../shared/i18n/index";
import type { StripFrame } from "../../components/strip-of-day";
import type { OwnDay } from "./queries";

/** What the day's strip hangs from, by the limit that came with it: the rule sets alone weigh as much as this page. */
export function ownFrame(i18n: I18n, locale: Locale, { limit, ...day }: OwnDay): StripFrame {
  return {
    key: `${day.ruleSetKey} ${day.ruleSetVersion}`,
    // A limit for the noise around you says nothing of the level at your ear, which the arrow falls to.
    limits: limit?.isAtEar
      ? [
          {
            levelDb: limit.levelDb,
            label: i18n.t("limit {limit}", { limit: formatLimit(limit.levelDb, locale) }),
          },
        ]
      : [],
    // The arrow draws no target.
    targetBand: null,
    targetLabel: null,
    hasLimitAtEar: limit?.isAtEar ?? false,
  };
}
