import { useLingui } from "@lingui/react";
import { formatNumber } from "../../../shared/format/number";
import type { FigureCell } from "../../../shared/schemas/site-figures";
import { useLocale } from "../../lib/i18n";

/** A count of people, or why it is not said. */
export function Figure({ value }: { value: FigureCell }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (typeof value === "number") return formatNumber(value, 0, locale);
  return (
    <span className="figure-kept">
      {value === "few" ? i18n.t("fewer than 5") : i18n.t("not shown")}
    </span>
  );
}
