import type { I18n } from "@lingui/core";
import { formatLimit } from "../../../shared/format/level";
import type { Locale } from "../../../shared/i18n";
import { levelOf, ruleSetVersion } from "../../../shared/rule-sets";
import type { SiteFiguresView } from "../../../shared/schemas/site-figures";

type Criterion = SiteFiguresView["criteria"][number];

/** "Upper action value, 85 dB", and what it asks for where several stand at one value; with whose it is where several rule. */
export function criterionWords(
  i18n: I18n,
  locale: Locale,
  { ruleSetKey, ruleSetVersion: version, id }: Criterion,
  isOneOfSeveral: boolean,
): { label: string; rule: string | null } {
  const ruleSet = ruleSetVersion(ruleSetKey, version);
  const criterion = ruleSet?.criteria.find((one) => one.id === id);
  if (!ruleSet || !criterion) return { label: id, rule: ruleSetKey };
  return {
    label: i18n.t("{criterion}, {level} dB", {
      criterion: i18n._(criterion.label),
      level: formatLimit(levelOf(criterion), locale),
    }),
    rule: isOneOfSeveral ? i18n._(ruleSet.title) : null,
  };
}
