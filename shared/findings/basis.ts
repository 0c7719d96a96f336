import type { I18n } from "@lingui/core";
import type { Criterion, RuleSetVersion } from "../acoustics/types";
import { formatLevel, formatLimit } from "../format/level";
import type { Locale } from "../i18n/index";
import { levelOf, ruleSetVersion } from "../rule-sets";
import { type FindingFacts, numberOf, textOf } from "./facts";

/** Which average a criterion's level is, "TWA, threshold 80"; null for an energy mean, of which a rule has only one. */
export function levelBasis(i18n: I18n, locale: Locale, criterion: Criterion): string | null {
  if (criterion.quantity !== "dose" && criterion.quantity !== "table-dose") return null;
  return criterion.thresholdDb === null
    ? i18n.t("TWA")
    : i18n.t("TWA, threshold {threshold}", {
        threshold: formatLimit(criterion.thresholdDb, locale),
      });
}

/** A criterion's value as an 8-hour level; one that stands for a dose with the unit that it has as a level. */
export function criterionValue(locale: Locale, criterion: Criterion): string {
  const value = formatLimit(levelOf(criterion), locale);
  return criterion.quantity === "dose" || criterion.quantity === "table-dose"
    ? `${value}\u00a0dBA`
    : value;
}

/** The rule set that a finding rests on, as its facts keep it. */
export function ruleSetOf(facts: FindingFacts): RuleSetVersion | null {
  const key = textOf(facts, "ruleSetKey");
  const version = numberOf(facts, "ruleSetVersion");
  return key === null || version === null ? null : (ruleSetVersion(key, version) ?? null);
}

export function criterionOf(facts: FindingFacts): Criterion | null {
  const id = textOf(facts, "criterionId");
  return ruleSetOf(facts)?.criteria.find((one) => one.id === id) ?? null;
}

/** "92.3", with the average it is where the rule has several: "92.3 (TWA, threshold 90)". */
export function levelWithBasis(
  i18n: I18n,
  locale: Locale,
  levelDb: number,
  facts: FindingFacts,
): string {
  const level = formatLevel(levelDb, locale);
  const criterion = criterionOf(facts);
  const basis = criterion && levelBasis(i18n, locale, criterion);
  return basis ? i18n.t("{level} ({basis})", { level, basis }) : level;
}

/** The sources of a rule set and one of its criteria, each named once. */
export function citationOf({ citation }: RuleSetVersion, criterion: Criterion | null): string {
  if (!criterion) return citation;
  return criterion.citation.startsWith(citation)
    ? criterion.citation
    : `${citation}, ${criterion.citation}`;
}
