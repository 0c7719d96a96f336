import type { I18n } from "@lingui/core";
import { earNotTried, hasToPass } from "../../../shared/acoustics/protection/fit-rating";
import { formatDate } from "../../../shared/format/date";
import type { Locale } from "../../../shared/i18n/index";
import type { FitTestView } from "../../../shared/schemas/fit";
import type { OwnProtector } from "./own-protectors";

/**
 * The latest test of this protector that stands; another size says nothing of this one, and one ear that passed nothing
 * of the other.
 */
export function fitOfOwn(
  tests: readonly FitTestView[],
  { innerModelId, outerName, size }: OwnProtector,
): FitTestView | null {
  if (outerName !== null) return null;
  return (
    tests.find(
      (test) =>
        test.modelId === innerModelId &&
        !test.isVoid &&
        test.parDb !== null &&
        (earNotTried(test) === null || test.hasPassed === false) &&
        (size === null || test.size === null || test.size === size),
    ) ?? null
  );
}

/** Nothing had to come off: then it neither passed nor failed, whatever an old test has stored. */
const hasNothingToPass = ({ needDb }: FitTestView): boolean =>
  needDb !== null && !hasToPass(needDb);

export const isOwnFault = (test: FitTestView | null): boolean =>
  test !== null && test.hasPassed === false && !hasNothingToPass(test);

/** Whether it fits, in plain words. */
export function ownFitSentence(i18n: I18n, locale: Locale, test: FitTestView | null): string {
  if (test === null) return i18n.t("Nobody has tested yet whether it fits you.");
  const date = formatDate(test.testedOn, locale);
  if (hasNothingToPass(test))
    return i18n.t(
      "Tested on you on {date}. Your noise asks nothing of it, so there is nothing to pass.",
      {
        date,
      },
    );
  if (test.hasPassed === null) return i18n.t("Tested on you on {date}.", { date });
  return test.hasPassed
    ? i18n.t("Fits you, tested on {date}.", { date })
    : i18n.t("Does not fit you well enough, tested on {date}. Ask for another.", { date });
}
