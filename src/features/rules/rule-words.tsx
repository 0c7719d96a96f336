import type { I18n } from "@lingui/core";
import type { Criterion, RuleSetVersion } from "../../../shared/acoustics/types";
import { formatDate } from "../../../shared/format/date";
import { formatDose } from "../../../shared/format/dose";
import { formatDuration } from "../../../shared/format/duration";
import { formatLimit } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import type { Locale } from "../../../shared/i18n/index";

type Protection = RuleSetVersion["protection"];

export function quantityWord(i18n: I18n, quantity: Criterion["quantity"]): string {
  switch (quantity) {
    case "lex-8h":
      return i18n.t("Daily level");
    case "lex-weekly":
      return i18n.t("Weekly level");
    case "dose":
      return i18n.t("Dose");
    case "table-dose":
      return i18n.t("Dose by the rule’s table");
    case "slow-maximum":
      return i18n.t("Slow maximum");
    case "peak":
      return i18n.t("Peak");
  }
}

/** What the number is compared with: "87 dB", "100 % (90 dB over 8 h)". */
export function criterionValue(i18n: I18n, criterion: Criterion, locale: Locale): string {
  const { quantity, value, levelDb, peakWeighting, referenceMin } = criterion;
  if (quantity === "dose" || quantity === "table-dose") {
    const dose = formatDose(value, locale);
    return levelDb === null
      ? dose
      : i18n.t("{dose}: {level} dB over {hours}", {
          dose,
          level: formatLimit(levelDb, locale),
          hours: formatDuration(referenceMin, locale),
        });
  }
  const unit =
    quantity === "peak" ? (peakWeighting === null ? "dB" : `dB(${peakWeighting})`) : "dB(A)";
  return `${formatLimit(value, locale)} ${unit}`;
}

/** Whether Over begins at the value or past it. */
export const comparatorWord = (i18n: I18n, comparator: Criterion["comparator"]): string =>
  comparator === "exceeds" ? i18n.t("exceeds") : i18n.t("reaches");

export const judgedWord = (i18n: I18n, judged: Criterion["judged"]): string =>
  judged === "at-the-ear" ? i18n.t("at the ear") : i18n.t("without protection");

/** The settings under which the number is formed; null where the quantity has none. */
export function criterionSettings(i18n: I18n, criterion: Criterion, locale: Locale): string[] {
  const {
    exchangeRateDb,
    thresholdDb,
    criterionLevelDb,
    quantity,
    table,
    peakWeighting,
    twaFactor,
  } = criterion;
  if (quantity === "peak")
    return [
      peakWeighting === null
        ? i18n.t("weighting not stated")
        : i18n.t("{weighting}-weighted", { weighting: peakWeighting }),
    ];
  const words: string[] = [];
  if (exchangeRateDb !== null)
    words.push(i18n.t("exchange {rate} dB", { rate: formatLimit(exchangeRateDb, locale) }));
  if (quantity === "dose")
    words.push(
      thresholdDb === null
        ? i18n.t("no threshold")
        : i18n.t("threshold {level} dB", { level: formatLimit(thresholdDb, locale) }),
    );
  if (criterionLevelDb !== null)
    words.push(i18n.t("criterion {level} dB", { level: formatLimit(criterionLevelDb, locale) }));
  if (twaFactor !== null)
    words.push(i18n.t("{factor} lg", { factor: formatNumber(twaFactor, 2, locale) }));
  if (table !== null)
    words.push(
      i18n.t("the table has {count, plural, one {# line} other {# lines}}", {
        count: table.length,
      }),
    );
  if (criterion.usesUncertainty) words.push(i18n.t("with the uncertainty"));
  return words;
}

export function methodWord(i18n: I18n, method: Protection["methods"][number]): string {
  switch (method) {
    case "octave-band":
      return i18n.t("octave band");
    case "hml":
      return i18n.t("HML");
    case "snr":
      return i18n.t("SNR");
    case "us-single-number":
      return i18n.t("US single number");
    case "percentile":
      return i18n.t("percentile rating");
    case "slc80":
      return i18n.t("SLC80");
    case "own-fit":
      return i18n.t("own fit");
  }
}

function deratingWord(i18n: I18n, derating: Protection["derating"]): string {
  switch (derating) {
    case "none":
      return i18n.t("none");
    case "half":
      return i18n.t("half of the rating less 7 dB");
    case "by-type":
      return i18n.t("by type of protector: 25, 50 or 70 %");
  }
}

function adequacyWord(
  i18n: I18n,
  { adequacy, targetDb, strictTargetDb }: Protection,
  locale: Locale,
): string | null {
  if (adequacy === "not-stated" || targetDb === null) return null;
  const target = formatLimit(targetDb, locale);
  if (adequacy === "en-458")
    return i18n.t("Five words while worn, hung from the action value of {target} dB", { target });
  return strictTargetDb === null
    ? i18n.t("Enough, if it brings the level down to {target} dB", { target })
    : i18n.t(
        "Enough, if it brings the level down to {target} dB; {strict} dB for a stricter requirement",
        {
          target,
          strict: formatLimit(strictTargetDb, locale),
        },
      );
}

/** How a rule set counts a protector, line by line; null: it does not state it. */
export function protectionFacts(
  i18n: I18n,
  protection: Protection,
  locale: Locale,
): { key: string; label: string; value: string | null }[] {
  const { methods, alpha, derating, allowanceDb, ownFit, double } = protection;
  return [
    {
      key: "methods",
      label: i18n.t("Methods, the first that the data allow"),
      value:
        methods.length === 0 ? null : methods.map((method) => methodWord(i18n, method)).join(", "),
    },
    {
      key: "alpha",
      label: i18n.t("Deviations taken off by band"),
      value: methods.includes("octave-band")
        ? formatNumber(alpha, Number.isInteger(alpha) ? 0 : 2, locale)
        : null,
    },
    { key: "derating", label: i18n.t("Derating"), value: deratingWord(i18n, derating) },
    {
      key: "allowance",
      label: i18n.t("Real-world allowance"),
      value:
        allowanceDb === 0
          ? i18n.t("none")
          : i18n.t("{level} dB, never on an own fit", { level: formatLimit(allowanceDb, locale) }),
    },
    {
      key: "fit",
      label: i18n.t("Own fit"),
      value:
        ownFit === "replaces" ? i18n.t("replaces the label") : i18n.t("can only lower the label"),
    },
    {
      key: "double",
      label: i18n.t("Two worn together"),
      value:
        double === "better-plus-5"
          ? i18n.t("the better one, and 5 dB")
          : i18n.t("test data of the two together, else Not assessed"),
    },
    {
      key: "adequacy",
      label: i18n.t("When it is enough"),
      value: adequacyWord(i18n, protection, locale),
    },
  ];
}

/** "in force since 6 April 2006", "from 1 January 2020 to 31 May 2026". */
export function datesWords(
  i18n: I18n,
  { effectiveFrom, effectiveTo }: RuleSetVersion,
  locale: Locale,
): string {
  const from = formatDate(effectiveFrom, locale);
  return effectiveTo === null
    ? i18n.t("in force since {from}", { from })
    : i18n.t("in force from {from} to {to}", { from, to: formatDate(effectiveTo, locale) });
}
