import type { I18n } from "@lingui/core";
import { isSameFigure, outsideCriterion } from "../acoustics/outside-criterion";
import type { Criterion, RuleSetVersion, Verdict as VerdictCode } from "../acoustics/types";
import { verdictWord } from "../day/words";
import { criterionValue, levelBasis } from "../findings/basis";
import { asReason, reasonText } from "../findings/reasons";
import { formatLevel, formatLimit } from "../format/level";
import { withinSentence } from "../format/words";
import type { Locale } from "../i18n/index";
import { levelOf, ruleSetVersion } from "../rule-sets";
import type { DayFigures } from "../schemas/finding";

interface Judged {
  readonly verdict: VerdictCode;
  readonly isClear: boolean;
  readonly levelDb: number;
  readonly criterion: Criterion;
}

const LEVEL_QUANTITIES: ReadonlySet<string> = new Set(["lex-8h", "dose", "table-dose"]);
const SAYS: readonly VerdictCode[] = ["not-assessed", "under", "cant-tell-yet", "over"];

/** Criteria without protection that are about one figure, by value; of several at one value the one that says most. */
export function judgedOutside(
  figures: DayFigures,
  ruleSet: RuleSetVersion,
  figure: Criterion = outsideCriterion(ruleSet),
): Judged[] {
  const byValue = new Map<number, Judged>();
  for (const result of figures.governingCriteria) {
    const criterion = ruleSet.criteria.find(({ id }) => id === result.criterionId);
    if (criterion?.judged !== "without-protection" || !isSameFigure(criterion, figure)) continue;
    const levelDb = levelOf(criterion);
    const before = byValue.get(levelDb);
    if (before && SAYS.indexOf(before.verdict) >= SAYS.indexOf(result.verdict)) continue;
    byValue.set(levelDb, { verdict: result.verdict, isClear: result.isClear, levelDb, criterion });
  }
  return [...byValue.values()].sort((a, b) => a.levelDb - b.levelDb);
}

/** Levels without protection that are not the main figure and are over or open, each with its own: "Over 90 dBA: 91.9 (TWA, threshold 90)". */
export function otherOutside(
  i18n: I18n,
  locale: Locale,
  figures: DayFigures,
): { id: string; words: string }[] {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  if (!ruleSet) return [];
  const main = outsideCriterion(ruleSet);
  return figures.governingCriteria.flatMap(({ criterionId, verdict, levelDb, bound }) => {
    const criterion = ruleSet.criteria.find(({ id }) => id === criterionId);
    if (criterion?.judged !== "without-protection" || !LEVEL_QUANTITIES.has(criterion.quantity))
      return [];
    if (isSameFigure(criterion, main) || levelDb === null) return [];
    const values = {
      value: criterionValue(locale, criterion),
      level: formatLevel(levelDb, locale, bound),
      basis: levelBasis(i18n, locale, criterion) ?? "",
    };
    if (verdict === "over")
      return [{ id: criterionId, words: i18n.t("Over {value}: {level} ({basis})", values) }];
    if (verdict === "cant-tell-yet")
      return [{ id: criterionId, words: i18n.t("{value} open: {level} ({basis})", values) }];
    return [];
  });
}

/** What is said of the noise without protection after its level, as the end of a sentence. */
export function outsideWords(i18n: I18n, locale: Locale, figures: DayFigures): string {
  return [outsideVerdict(i18n, locale, figures), ...otherOutside(i18n, locale, figures)]
    .map(({ words }) => withinSentence(words, locale))
    .join("; ");
}

/** The main figure's verdict without protection with the value that it is about: "Over 85", "Over 80, 85 open", "Under 80". */
export function outsideVerdict(i18n: I18n, locale: Locale, figures: DayFigures): OutsideVerdict {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  const judged = ruleSet ? judgedOutside(figures, ruleSet) : [];
  return (
    verdictOf(i18n, judged, ({ criterion }) => criterionValue(locale, criterion)) ?? {
      verdict: figures.verdictOutside,
      words: verdictWord(i18n, figures.verdictOutside),
      isClear: false,
    }
  );
}

/** In one word, where there is room for no more: the highest value without protection that a figure is over. */
export function gravestOutside(i18n: I18n, locale: Locale, figures: DayFigures): OutsideVerdict {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  const [highest] = figures.governingCriteria
    .flatMap(({ criterionId, verdict, isClear }) => {
      const criterion = ruleSet?.criteria.find(({ id }) => id === criterionId);
      return verdict === "over" &&
        criterion?.judged === "without-protection" &&
        LEVEL_QUANTITIES.has(criterion.quantity)
        ? [{ criterion, isClear }]
        : [];
    })
    .sort((a, b) => levelOf(b.criterion) - levelOf(a.criterion));
  if (!highest) return outsideVerdict(i18n, locale, figures);
  return {
    verdict: "over",
    words: i18n.t("Over {value}", { value: criterionValue(locale, highest.criterion) }),
    isClear: highest.isClear,
  };
}

interface OutsideVerdict {
  readonly verdict: VerdictCode;
  readonly words: string;
  readonly isClear: boolean;
}

/** One verdict on a figure that several criteria are about; null where they are not assessed. */
export function verdictOf(
  i18n: I18n,
  judged: readonly Judged[],
  show: (one: Judged) => string,
): OutsideVerdict | null {
  const over = judged.findLast(({ verdict }) => verdict === "over");
  const open = judged.find(({ verdict }) => verdict === "cant-tell-yet");
  if (over && open && open.levelDb > over.levelDb)
    return {
      verdict: "cant-tell-yet",
      words: i18n.t("Over {value}, {next} open", { value: show(over), next: show(open) }),
      isClear: false,
    };
  if (over)
    return {
      verdict: "over",
      words: i18n.t("Over {value}", { value: show(over) }),
      isClear: over.isClear,
    };
  if (open)
    return {
      verdict: "cant-tell-yet",
      words: i18n.t("{value} open", { value: show(open) }),
      isClear: false,
    };
  const lowest = judged.find(({ verdict }) => verdict === "under");
  if (lowest && judged.every(({ verdict }) => verdict === "under"))
    return {
      verdict: "under",
      words: i18n.t("Under {value}", { value: show(lowest) }),
      isClear: false,
    };
  return null;
}

/** The criteria whose figures without protection a rule tells apart by their threshold, the main one first. */
export function figureCriteria(ruleSet: RuleSetVersion): Criterion[] {
  const found = [outsideCriterion(ruleSet)];
  for (const criterion of ruleSet.criteria) {
    const isLevel =
      criterion.judged === "without-protection" && LEVEL_QUANTITIES.has(criterion.quantity);
    if (isLevel && !found.some((one) => isSameFigure(one, criterion))) found.push(criterion);
  }
  return found;
}

/** What each figure of `OutsideLines` is, one by one: "TWA, threshold 80", "TWA, threshold 90". Empty where it is a LEX. */
export function outsideBases(i18n: I18n, locale: Locale, ruleSet: RuleSetVersion): string[] {
  return figureCriteria(ruleSet).flatMap((criterion) => levelBasis(i18n, locale, criterion) ?? []);
}

export const isBoundReason = (reason: string | null): boolean =>
  reason === "only-upper-bound" || reason === "only-lower-bound";

/** That only a bound of the level is known, and the reading that would settle it. */
function openByBound(i18n: I18n, locale: Locale, figures: DayFigures): string | undefined {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  if (!ruleSet) return undefined;
  const { quantity, exchangeRateDb, thresholdDb } = outsideCriterion(ruleSet);
  if (quantity === "lex-8h" || exchangeRateDb === null)
    return i18n.t("only a bound is known; an LAeq would settle it");
  const exchange = formatLimit(exchangeRateDb, locale);
  return thresholdDb === null
    ? i18n.t("only a bound is known; an average with exchange {exchange} would settle it", {
        exchange,
      })
    : i18n.t("only a bound is known; an average with threshold {threshold} would settle it", {
        threshold: formatLimit(thresholdDb, locale),
      });
}

/** The task and level that decide the protector's word, or why there is none. */
export function decidedBy(i18n: I18n, locale: Locale, figures: DayFigures): string | undefined {
  if (figures.hasProtector === "no") return undefined;
  if (figures.word === null) {
    const reason = asReason(figures.reason);
    if (!reason) return undefined;
    return isBoundReason(reason) ? openByBound(i18n, locale, figures) : reasonText(i18n, reason);
  }
  if (figures.whileWornDb === null) return figures.decidingTaskName ?? undefined;
  const level = formatLevel(figures.whileWornDb, locale, figures.whileWornBound);
  return figures.decidingTaskName ? `${figures.decidingTaskName} ${level}` : level;
}
