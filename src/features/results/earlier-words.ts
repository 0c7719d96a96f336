import type { I18n } from "@lingui/core";
import { formatDose } from "../../../shared/format/dose";
import { formatLevel } from "../../../shared/format/level";
import { withinSentence } from "../../../shared/format/words";
import { localeOf } from "../../../shared/i18n/index";
import { ruleSetVersion } from "../../../shared/rule-sets";
import type { ResultView } from "../../../shared/schemas/result";
import { protectorWordText } from "../../components/protector-word";
import { verdictWord } from "../../components/verdict";

type Earlier = ResultView["earlier"][number];
type Figures = Earlier["figures"];

/** Everything of a result that is shown, as it is shown. */
function asShown(i18n: I18n, figures: Figures): string {
  const locale = localeOf(i18n);
  const level = (db: number | null) => (db === null ? "" : formatLevel(db, locale));
  return JSON.stringify([
    level(figures.outsideDb),
    level(figures.atEarDb),
    level(figures.whileWornDb),
    figures.verdictOutside,
    figures.verdictAtEar,
    figures.word,
    figures.governingCriteria.map(({ criterionId, verdict, levelDb, dosePct }) => [
      criterionId,
      verdict,
      level(levelDb),
      dosePct === null ? "" : formatDose(dosePct, locale),
    ]),
  ]);
}

/** In what another result of the same day differs from the one that is shown: by other rules or methods, and in its figures. */
export function otherResultWords(
  i18n: I18n,
  one: Earlier,
  shown: Pick<ResultView, "methodVersion" | "governing" | "figures">,
): string {
  const locale = localeOf(i18n);
  const { figures } = one;
  const ruleSet = ruleSetVersion(one.governingRuleSet, one.ruleSetVersion);
  const isOtherRule =
    one.governingRuleSet !== shown.governing.key || one.ruleSetVersion !== shown.governing.version;
  const isSame = asShown(i18n, figures) === asShown(i18n, shown.figures);
  const by = [
    isOtherRule &&
      ruleSet &&
      i18n.t("by {title}, rule set version {version}", {
        title: ruleSet.citation,
        version: ruleSet.version,
      }),
    one.methodVersion !== shown.methodVersion &&
      i18n.t("by method version {version}", { version: one.methodVersion }),
  ];
  const came = isSame
    ? [i18n.t("no change in the rounded figures")]
    : [
        figures.atEarDb !== null &&
          i18n.t("at the ear {level}", { level: formatLevel(figures.atEarDb, locale) }),
        withinSentence(verdictWord(i18n, figures.verdictAtEar), locale),
        figures.word !== null && withinSentence(protectorWordText(i18n, figures.word), locale),
        figures.outsideDb !== null &&
          i18n.t("outside {level}", { level: formatLevel(figures.outsideDb, locale) }),
      ];
  return [...by, ...came].filter((part) => typeof part === "string").join(", ");
}
