import type { I18n } from "@lingui/core";
import { hasToPass } from "../../../shared/acoustics/protection/fit-rating";
import { formatShortDate } from "../../../shared/format/date";
import type { LevelBound } from "../../../shared/format/level";
import { startsSentence } from "../../../shared/format/words";
import type { Locale } from "../../../shared/i18n/index";
import type {
  Candidate,
  FitMethod,
  FitTestView,
  IssueView,
  RefusalInput,
} from "../../../shared/schemas/fit";
import { passWord } from "../../../shared/words/register-words";

export function fitMethodWord(i18n: I18n, method: FitMethod): string {
  switch (method) {
    case "psychophysical":
      return i18n.t("Heard thresholds");
    case "real-ear-microphones":
      return i18n.t("Microphones in the real ear");
    case "two-microphones":
      return i18n.t("Two microphones");
  }
}

export function outcomeWord(i18n: I18n, { isVoid, outcome }: FitTestView): string {
  if (isVoid) return i18n.t("struck out");
  return outcome === "issued" ? i18n.t("issued") : i18n.t("tried");
}

/** Why a test has no rating; null: it has one. Then only the active part was checked, and there is no trial. */
export function notRatedWord(i18n: I18n, { parDb, facts }: FitTestView): string | null {
  if (parDb !== null) return null;
  const isRelative = [facts.bands?.left, facts.bands?.right].some((ear) => ear?.isRelative);
  return isRelative ? i18n.t("relative analysis only") : i18n.t("not rated");
}

/** Of a check of one ear alone that it passed: the other cup cancels for itself, and none of it is credited. */
export const isHalfChecked = ({ activePassed, facts: { bands } }: FitTestView): boolean =>
  activePassed === true && bands !== null && (bands.left === null) !== (bands.right === null);

export function activeWord(i18n: I18n, test: FitTestView): string {
  if (!test.activePassed) return i18n.t("active part not passed");
  if (!isHalfChecked(test)) return i18n.t("active part passed");
  return test.facts.bands?.left
    ? i18n.t("active part passed on the left, not checked on the right")
    : i18n.t("active part passed on the right, not checked on the left");
}

/** Of a test with a single trial of an ear, that it was one: how the next would sit is not in its uncertainty. */
export const singleTrialWord = (i18n: I18n, { parDb, facts }: FitTestView): string | null =>
  parDb !== null && (facts.leftDb.length === 1 || facts.rightDb.length === 1)
    ? i18n.t("a single trial")
    : null;

/** Whether it fits; of a test that only checked the active part, whether that does its work. */
export const saysWord = (i18n: I18n, test: FitTestView): string =>
  test.parDb === null && test.activePassed !== null
    ? startsSentence(activeWord(i18n, test))
    : passWord(i18n, test);

export const isFault = ({ isVoid, hasPassed, needDb, parDb, activePassed }: FitTestView): boolean =>
  !isVoid &&
  ((hasPassed === false && (needDb === null || hasToPass(needDb))) ||
    (parDb === null && activePassed === false));

export function endedWord(i18n: I18n, how: NonNullable<IssueView["endedHow"]>): string {
  switch (how) {
    case "returned":
      return i18n.t("brought back");
    case "lost":
      return i18n.t("lost");
    case "damaged":
      return i18n.t("broken");
    case "replaced":
      return i18n.t("replaced");
  }
}

export function refusalWord(i18n: I18n, kind: RefusalInput["kind"]): string {
  switch (kind) {
    case "refused":
      return i18n.t("Refused it");
    case "not-worn":
      return i18n.t("Did not wear it");
    case "cannot-wear":
      return i18n.t("Cannot wear it");
  }
}

/** Of a device beside its name: that this worker would not have it, or cannot. */
export const refusedWord = (
  i18n: I18n,
  { kind, happenedOn }: Pick<RefusalInput, "kind" | "happenedOn">,
  locale: Locale,
): string =>
  kind === "refused"
    ? i18n.t("this worker refused it on {date}", { date: formatShortDate(happenedOn, locale) })
    : i18n.t("this worker cannot wear it, said on {date}", {
        date: formatShortDate(happenedOn, locale),
      });

/** Which figure of the label stands for what most people get. */
export function labelWord(i18n: I18n, method: string | null): string {
  switch (method) {
    case "percentile":
      return i18n.t("percentile rating, most users");
    case "hml":
      return i18n.t("M of the label");
    case "us-single-number":
      return i18n.t("US number less 7");
    case "snr":
      return i18n.t("SNR");
    default:
      return i18n.t("nothing comparable");
  }
}

/** The comparison that put a candidate behind the one before it. */
export function decidedWord(i18n: I18n, decidedBy: Candidate["decidedBy"]): string {
  switch (decidedBy) {
    case "first":
      return i18n.t("suits best");
    case "compatibility":
      return i18n.t("by what is worn with it");
    case "adequacy":
      return i18n.t("by its word while worn");
    case "underprotection":
      return i18n.t("enough for the shift, but by EN 458 too little in a task");
    case "overprotection":
      return i18n.t("enough, but by EN 458 it protects too much");
    case "margin":
      return i18n.t("by the margin at the ear");
    case "least-margin":
      return i18n.t("all take off too much by EN 458, the least first");
    case "fit":
      return i18n.t("by own fit");
    case "battery":
      return i18n.t("by the battery");
    case "stock":
      return i18n.t("by the stock");
    case "name":
      return i18n.t("alike, by name");
  }
}

/** Who would wear them, as far as an active part may count. */
export interface ActiveCredit {
  readonly siteCredits: boolean;
  /** On how many of those who would wear it its active part has passed the check, and how many they are; null: one worker. */
  readonly checkedOf: (modelId: string) => { checked: number; all: number } | null;
}

/** Of an active protector, which of its two figures it was judged by, and why; null: it has only one. */
export function judgedByWord(
  i18n: I18n,
  { modelId, wornActiveDb, isActiveCredited, twaDb }: Candidate,
  { siteCredits, checkedOf }: ActiveCredit,
): string | null {
  if (wornActiveDb === null) return null;
  const group = checkedOf(modelId);
  if (isActiveCredited)
    return group === null
      ? i18n.t("judged with the active part on: its check is passed")
      : i18n.t("judged with the active part on: its check is passed on all of them");
  if (twaDb !== null) return i18n.t("judged with the active part off: the rule’s word is of that");
  if (!siteCredits) return i18n.t("judged with the active part off: no credit at this site");
  if (group === null || group.checked === 0)
    return i18n.t("judged with the active part off: no passed check on record");
  // Of so many only the first are looked at.
  if (group.checked === group.all)
    return i18n.t("judged with the active part off: not all who would wear it are known");
  return i18n.t("judged with the active part off: its check is passed on {checked} of {all}", {
    checked: group.checked,
    all: group.all,
  });
}

/** The level that a candidate's word is about: the shift's where the rule judges that, else while worn in a task. */
export const judgedDb = ({ twaDb, wornDb, wornActiveDb, isActiveCredited }: Candidate) =>
  twaDb ?? (isActiveCredited ? wornActiveDb : wornDb);

export const judgedBound = ({ twaDb, isTwaMost, isWornMost }: Candidate): LevelBound =>
  (twaDb === null ? isWornMost : isTwaMost) ? "upper" : "exact";

/** Why no need is stated, or what it rests on. */
export function needReasonText(i18n: I18n, reason: string | null): string | null {
  switch (reason) {
    case "no-noise":
      return i18n.t(
        "No noise of this worker is known: no day is on record, and the job has no nominal day.",
      );
    case "not-stated":
      return i18n.t("The rules of the site state no target at the ear.");
    case "nominal-day":
      return i18n.t("By the job’s nominal day; no own day is on record yet.");
    default:
      return null;
  }
}
