import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import type { ProtectorWord as WordCode } from "../../shared/acoustics/types";
import { protectorWordText } from "../../shared/day/words";

export { protectorWordText };

/** The standard's own word, where it differs from ours. */
function standardWord(i18n: I18n, word: WordCode): string | null {
  switch (word) {
    case "too-little":
      return i18n.t("insufficient");
    case "just-enough":
    case "strong-side":
      return i18n.t("acceptable");
    case "too-much":
      return i18n.t("overprotection");
    default:
      return null;
  }
}

/** `beneath`: the task and level that decide it. Without `word`: none is judged, and the reason stands beneath. */
export function ProtectorWord({
  word,
  beneath,
  isOpen = false,
  showsStandardWord = false,
}: {
  word: WordCode | null;
  /** Only a bound of the level is known, and it proves no word. */
  isOpen?: boolean;
  beneath?: ReactNode;
  showsStandardWord?: boolean;
}) {
  const { i18n } = useLingui();
  const isFault = word === "too-little" || word === "too-much";
  const standard = word && showsStandardWord ? standardWord(i18n, word) : null;
  return (
    <span className="two-lines">
      <span className={word === null ? "not-assessed" : isFault ? "is-fault" : undefined}>
        {word !== null
          ? protectorWordText(i18n, word)
          : isOpen
            ? i18n.t("Can’t tell yet")
            : i18n.t("Not assessed")}
      </span>
      {standard && <span className="beneath italic">{standard}</span>}
      {beneath !== undefined && <span className="beneath">{beneath}</span>}
    </span>
  );
}
