import type { I18n } from "@lingui/core";
import type { RetentionKind } from "../../../shared/rule-sets/retention";
import type { SuccessionDutyView } from "../../../shared/schemas/record-transfer";
import type { KeptBecause, PeriodView } from "../../../shared/schemas/retention";

export function keptWord(i18n: I18n, because: KeptBecause): string {
  switch (because) {
    case "held":
      return i18n.t("held back from erasure");
    case "no-term":
      return i18n.t("no term is known");
    case "not-due":
      return i18n.t("not due yet");
    case "open-finding":
      return i18n.t("a finding is open");
    case "other-role":
      return i18n.t("has another role here");
    case "employed":
      return i18n.t("works here, or was erased already");
    case "withdrawn":
      return i18n.t("proposal withdrawn");
  }
}

export function kindWord(i18n: I18n, kind: RetentionKind): string {
  switch (kind) {
    case "measurements":
      return i18n.t("Exposure measurements");
    case "assessments":
      return i18n.t("Exposure assessments");
    case "training":
      return i18n.t("Training records");
  }
}

/** "2 years after the last record", "for the length of employment". */
export function termWord(i18n: I18n, { months, counts }: PeriodView): string {
  if (months === null) return i18n.t("to be kept; the text sets no term");
  if (counts === "from-leaving" && months === 0) return i18n.t("for the length of employment");
  const isYears = months % 12 === 0;
  const count = isYears ? months / 12 : months;
  if (counts === "from-leaving")
    return isYears
      ? i18n.t("{count, plural, one {# year after leaving} other {# years after leaving}}", {
          count,
        })
      : i18n.t("{count, plural, one {# month after leaving} other {# months after leaving}}", {
          count,
        });
  return isYears
    ? i18n.t(
        "{count, plural, one {# year after the last record} other {# years after the last record}}",
        { count },
      )
    : i18n.t(
        "{count, plural, one {# month after the last record} other {# months after the last record}}",
        { count },
      );
}

/** What a rule asks of whoever ends or sells a site. */
export function successionWord(i18n: I18n, { kind, monthsBefore }: SuccessionDutyView): string {
  switch (kind) {
    case "hand-over":
      return i18n.t("Hand the records over to the employer that follows.");
    case "receive":
      return i18n.t("Whoever follows receives the records and keeps them.");
    case "tell-workers":
      return i18n.t(
        "Where nobody follows: tell workers of their right to see the records, at least {count, plural, one {# month} other {# months}} before the end.",
        { count: monthsBefore ?? 0 },
      );
  }
}
