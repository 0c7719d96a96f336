import type { I18n } from "@lingui/core";
import {
  compareRatings,
  type RatingComparison,
  type RatingName,
} from "../../../shared/acoustics/protection/ratings";
import type { RatingFacts } from "./typed-facts";

export function ratingWord(i18n: I18n, rating: RatingName): string {
  switch (rating) {
    case "h":
      return i18n.t("H");
    case "m":
      return i18n.t("M");
    case "l":
      return i18n.t("L");
    case "snr":
      return i18n.t("SNR");
    case "us":
      return i18n.t("US number");
    case "slc80":
      return i18n.t("SLC80");
  }
}

const NOTHING = { modelId: "", revisionId: null, name: "", kind: "earmuff", active: null } as const;

/**
 * The label beside what its test data give, dB: by means and deviations, and where there are single subjects by these
 * as well. Only what a label states or the data can give, or could if they were right.
 */
export function labelRatings(facts: RatingFacts): RatingComparison[] {
  const pooled = compareRatings({ ...NOTHING, ...facts, subjectsDb: null });
  const bySubjects = facts.subjectsDb
    ? compareRatings({ ...NOTHING, ...facts, bands: null }).filter(({ by }) => by === "per-subject")
    : [];
  return pooled
    .flatMap((one) => {
      const beside = bySubjects.filter(({ rating }) => rating === one.rating);
      const isReplaced = one.recomputedDb === null && one.reason === null && beside.length > 0;
      return isReplaced ? beside : [one, ...beside];
    })
    .filter((one) => one.labelDb !== null || hasTestData(one));
}

/** Test data give the rating, or it is said why they don't. */
export const hasTestData = ({ recomputedDb, reason }: RatingComparison): boolean =>
  recomputedDb !== null || reason !== null;
