import { useLingui } from "@lingui/react";
import type { ProtectorWord } from "../../shared/acoustics/types";
import { factsToday } from "../../shared/findings/facts";
import {
  atEarFigure,
  inOrderSentence,
  noticedSentence,
  orderSentence,
  remedyFigure,
} from "../../shared/findings/sentences";
import { formatDate } from "../../shared/format/date";
import type { FindingRow } from "../../shared/schemas/finding";
import { useLocale } from "../lib/i18n";
import { protectorWordText } from "./protector-word";

type Said = Pick<FindingRow, "kind" | "facts" | "today" | "rulesUntil">;

/** The order with what it would bring, and beneath it what was noticed, by which rules where they no longer govern. */
export function FindingWords({ finding, more = "" }: { finding: Said; more?: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { kind, facts, today, rulesUntil } = finding;
  const wordText = (word: ProtectorWord) => protectorWordText(i18n, word);
  const [order, figure] =
    today?.is === "in-order"
      ? [inOrderSentence(i18n), atEarFigure(locale, today, wordText)]
      : [
          orderSentence(i18n, locale, kind, factsToday(finding)),
          remedyFigure(locale, factsToday(finding), wordText),
        ];
  const noticed = noticedSentence(i18n, locale, kind, facts);
  return (
    <span className="two-lines">
      <b>{figure ? i18n.t("{order}: {figure}", { order, figure }) : order}</b>
      <span className="beneath">
        {noticed}
        {rulesUntil &&
          `; ${i18n.t("under the rules before {date}", { date: formatDate(rulesUntil, locale) })}`}
        {more}
      </span>
    </span>
  );
}
