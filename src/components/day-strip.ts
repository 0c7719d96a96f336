import type { I18n } from "@lingui/core";
import type { Criterion, RuleSetVersion } from "../../shared/acoustics/types";
import { formatLimit } from "../../shared/format/level";
import { isLocale, type Locale } from "../../shared/i18n/index";
import { actionValueDb, mainLimit, ruleSetVersion } from "../../shared/rule-sets";
import type { DayFigures } from "../../shared/schemas/finding";
import type { DropStripProps } from "./drop-strip";
import type { StripLimit, TargetBand } from "./drop-strip-geometry";

/** What a strip's ground shows of a rule set: its daily limit and, where it has a scale of words, the target. */
export interface DayScale {
  readonly limits: readonly StripLimit[];
  readonly targetBand: TargetBand | null;
  /** Of the first limit, dB. */
  readonly limitDb: number;
  /** Which of the day's two lines the limit is about. */
  readonly judged: Criterion["judged"];
}

const localeOf = (i18n: I18n): Locale => (isLocale(i18n.locale) ? i18n.locale : "en");

/** The target hangs from the action value: 15 dB beneath it to it, good from 10 to 5 beneath. */
function bandUnder(actionDb: number): TargetBand {
  return {
    lowDb: actionDb - 15,
    highDb: actionDb,
    goodLowDb: actionDb - 10,
    goodHighDb: actionDb - 5,
  };
}

export function dayScale(i18n: I18n, key: string, version: number): DayScale | null {
  const ruleSet = ruleSetVersion(key, version);
  if (!ruleSet) return null;
  const limit = mainLimit(ruleSet);
  const limitDb = limit.levelDb ?? limit.value;
  const actionDb = actionValueDb(ruleSet);
  return {
    limits: [
      {
        levelDb: limitDb,
        label: i18n.t("limit {level}", { level: formatLimit(limitDb, localeOf(i18n)) }),
      },
    ],
    targetBand: actionDb === null ? null : bandUnder(actionDb),
    limitDb,
    judged: limit.judged,
  };
}

/** The verdict on the line that the rule set's daily limit is about. */
export const mainVerdict = (figures: DayFigures, scale: Pick<DayScale, "judged">) =>
  scale.judged === "at-the-ear" ? figures.verdictAtEar : figures.verdictOutside;

/** The highest value without protection that was reached or passed. */
function highestOver(figures: DayFigures, ruleSet: RuleSetVersion): number | null {
  const passed = figures.governingCriteria.flatMap(({ criterionId, verdict }) => {
    const criterion = ruleSet.criteria.find(({ id }) => id === criterionId);
    if (!criterion || verdict !== "over" || criterion.judged !== "without-protection") return [];
    if (criterion.kind !== "action" && criterion.kind !== "limit") return [];
    if (criterion.quantity === "peak" || criterion.quantity === "slow-maximum") return [];
    return [criterion.levelDb ?? criterion.value];
  });
  return passed.length === 0 ? null : Math.max(...passed);
}

/** "over 85": the verdict without protection as the end of a sentence. */
export function outsideWords(i18n: I18n, figures: DayFigures): string | undefined {
  const ruleSet = ruleSetVersion(figures.ruleSetKey, figures.ruleSetVersion);
  const overDb = ruleSet && highestOver(figures, ruleSet);
  if (overDb != null)
    return i18n.t("over {level}", { level: formatLimit(overDb, localeOf(i18n)) });
  if (figures.verdictOutside === "cant-tell-yet") return i18n.t("can’t tell yet");
  return undefined;
}

/** A day's figures as the strip draws them. */
export function dayStrip(
  i18n: I18n,
  figures: DayFigures,
  { isExpected = false }: { isExpected?: boolean } = {},
): Omit<DropStripProps, "variant"> {
  const scale = dayScale(i18n, figures.ruleSetKey, figures.ruleSetVersion);
  return {
    outsideDb: figures.outsideDb,
    outsideUDb: figures.uncertaintyDb,
    outsideBound: figures.outsideBound,
    atEarDb: figures.atEarDb,
    atEarUDb: figures.uncertaintyDb,
    atEarActiveDb: figures.atEarActiveDb,
    atEarAsWorkedDb: figures.atEarAsWorkedDb,
    whileWornDb: figures.whileWornDb,
    limits: scale?.limits ?? [],
    targetBand: scale?.targetBand ?? null,
    isExpected,
    hasProtector: figures.hasProtector,
    word: figures.word,
    verdict: scale?.judged === "at-the-ear" ? figures.verdictAtEar : null,
    outsideWords: outsideWords(i18n, figures),
    decidingTask: figures.decidingTaskName ?? undefined,
  };
}
