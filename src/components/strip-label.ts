import type { I18n } from "@lingui/core";
import { formatLevel } from "../../shared/format/level";
import { withinSentence } from "../../shared/format/words";
import { type Locale, localeOf } from "../../shared/i18n/index";
import type { StripFacts } from "./drop-strip-geometry";
import { verdictWord } from "./verdict";

export interface StripWords extends StripFacts {
  /** The verdict without protection as the end of a sentence: "over 85". */
  readonly outsideWords?: string;
  /** The task that decides the protector's word. */
  readonly decidingTask?: string;
}

/** What a strip says, for those who hear it. One function, so that it never says less than it shows. */
export function stripLabel(i18n: I18n, props: StripWords): string {
  const locale: Locale = localeOf(i18n);
  const level = (levelDb: number) => formatLevel(levelDb, locale);
  const sentences: string[] = [];

  if (props.atEarDb === null) sentences.push(i18n.t("At the ear not known."));
  else {
    const atEar = { level: level(props.atEarDb) };
    const parts = [
      props.atEarBound === "lower"
        ? i18n.t("At the ear at least {level}", atEar)
        : props.atEarBound === "upper"
          ? i18n.t("At the ear at most {level}", atEar)
          : props.atEarUDb === null
            ? i18n.t("At the ear {level}", atEar)
            : i18n.t("At the ear {level} plus or minus {uncertainty}", {
                level: level(props.atEarDb),
                uncertainty: level(props.atEarUDb),
              }),
      ...props.limits.map((limit) => limit.label),
    ];
    if (props.isExpected) parts.push(i18n.t("expected"));
    if (props.verdict) parts.push(withinSentence(verdictWord(i18n, props.verdict), locale));
    let sentence = parts.join(", ");
    if (props.atEarOffDb != null)
      sentence += i18n.t("; {level} with the active part off", { level: level(props.atEarOffDb) });
    if (props.atEarActiveDb !== null)
      sentence += i18n.t("; {level} with the active part on", {
        level: level(props.atEarActiveDb),
      });
    if (props.atEarAsWorkedDb !== null)
      sentence += i18n.t("; {level} as worked", { level: level(props.atEarAsWorkedDb) });
    sentences.push(`${sentence}.`);
  }

  if (props.outsideDb === null) sentences.push(i18n.t("Without protection not known."));
  else {
    const text = level(props.outsideDb);
    const outside =
      props.outsideBound === "lower"
        ? i18n.t("Without protection at least {level}", { level: text })
        : props.outsideBound === "upper"
          ? i18n.t("Without protection at most {level}", { level: text })
          : i18n.t("Without protection {level}", { level: text });
    sentences.push(props.outsideWords ? `${outside}, ${props.outsideWords}.` : `${outside}.`);
  }

  if (props.hasProtector === "no") sentences.push(i18n.t("No protector."));
  else if (props.hasProtector === "unknown") sentences.push(i18n.t("Protector not known."));
  else if (props.word && props.whileWornDb !== null) {
    const worn = formatLevel(props.whileWornDb, locale, props.whileWornBound);
    const word = protectorSentence(i18n, props.word);
    sentences.push(
      props.decidingTask
        ? i18n.t("{word}: {level} in {task}.", { word, level: worn, task: props.decidingTask })
        : i18n.t("{word}: {level} while worn.", { word, level: worn }),
    );
  }
  return sentences.join(" ");
}

function protectorSentence(i18n: I18n, word: NonNullable<StripFacts["word"]>): string {
  switch (word) {
    case "too-little":
      return i18n.t("Protector too little");
    case "just-enough":
      return i18n.t("Protector just enough");
    case "good":
      return i18n.t("Protector good");
    case "strong-side":
      return i18n.t("Protector on the strong side");
    case "too-much":
      return i18n.t("Protector too much");
    case "enough":
      return i18n.t("Protector enough");
  }
}
