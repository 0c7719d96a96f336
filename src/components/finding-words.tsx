import { useLingui } from "@lingui/react";
import { noticedSentence, orderToday } from "../../shared/findings/sentences";
import { formatDate } from "../../shared/format/date";
import type { FindingRow } from "../../shared/schemas/finding";
import { useLocale } from "../lib/i18n";
import { protectorWordText } from "./protector-word";

type Said = Pick<FindingRow, "kind" | "facts" | "today" | "rulesUntil" | "cannot">;

/** The order with what it would bring, and beneath it what was noticed, by which rules where they no longer govern. */
export function FindingWords({ finding, more = "" }: { finding: Said; more?: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { kind, facts, rulesUntil, cannot } = finding;
  const { order, figure } = orderToday(i18n, locale, finding, (word) =>
    protectorWordText(i18n, word),
  );
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
      {cannot && (
        <b className="beneath-ink">
          {i18n.t("Can’t, because: {text} ({name})", { text: cannot.text, name: cannot.byName })}
        </b>
      )}
    </span>
  );
}
