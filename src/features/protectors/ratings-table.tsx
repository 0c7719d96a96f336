import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import {
  australianClass,
  type RatingComparison,
} from "../../../shared/acoustics/protection/ratings";
import { formatLevel, formatLevelChange } from "../../../shared/format/level";
import { DataTable } from "../../components/data-table";
import { Status } from "../../components/status";
import { useLocale } from "../../lib/i18n";
import { ratingWord } from "./label-ratings";

function byWord(i18n: I18n, { by, rating, reason }: RatingComparison): string {
  if (reason === "deviation-invalid")
    return i18n.t("not recomputed: a standard deviation is below zero");
  switch (by) {
    case "pooled":
      return i18n.t("means and deviations (1994)");
    case "per-subject":
      return i18n.t("single subjects (2018)");
    case "us-label":
      return i18n.t("US test data");
    case null:
      switch (rating) {
        case "us":
          return i18n.t("needs third-octaves at 3150 and 6300 Hz");
        case "slc80":
          return i18n.t("taken from the label");
        default:
          return i18n.t("needs octave bands");
      }
  }
}

/** The label's ratings, each beside what the test data give, with the difference; and which of them don't agree. */
export function RatingsTable({
  ratings,
  auClass,
}: {
  ratings: readonly RatingComparison[];
  auClass: number | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const atOdds = [
    ...new Set(
      ratings.filter(({ isAtOdds }) => isAtOdds).map(({ rating }) => ratingWord(i18n, rating)),
    ),
  ];
  const slc80Db = ratings.find(({ rating }) => rating === "slc80")?.labelDb ?? null;
  const ofSlc80 = slc80Db === null ? null : australianClass(slc80Db);
  const isOtherClass = auClass !== null && slc80Db !== null && ofSlc80 !== auClass;
  return (
    <div className="ratings-table">
      <DataTable<RatingComparison>
        caption={i18n.t("The label beside its test data")}
        rows={ratings}
        rowKey={({ rating, by }) => `${rating} ${by}`}
        isTwoLine
        columns={[
          {
            id: "rating",
            head: i18n.t("Rating"),
            isRowHead: true,
            cell: (one) => (
              <span className="two-lines">
                {ratingWord(i18n, one.rating)}
                <span
                  className={`beneath${one.by === null && one.rating !== "slc80" ? " not-assessed" : ""}`}
                >
                  {byWord(i18n, one)}
                </span>
              </span>
            ),
          },
          {
            id: "label",
            head: i18n.t("Label"),
            unit: "dB",
            kind: "figure",
            cell: ({ labelDb }) => formatLevel(labelDb, locale),
          },
          {
            id: "recomputed",
            head: i18n.t("Recomputed"),
            unit: "dB",
            kind: "figure",
            cell: ({ recomputedDb }) => formatLevel(recomputedDb, locale),
          },
          {
            id: "difference",
            head: i18n.t("Difference"),
            unit: "dB",
            kind: "figure",
            cell: ({ differenceDb, isAtOdds }) => (
              <span className={isAtOdds ? "is-fault" : undefined}>
                {formatLevelChange(differenceDb, locale)}
              </span>
            ),
          },
        ]}
      />
      <p className={`ratings-word${atOdds.length > 0 || isOtherClass ? " is-fault" : ""}`}>
        <Status>
          {atOdds.length > 0
            ? i18n.t(
                "{ratings}: label and test data lie further apart than rounding explains. Look at both again.",
                { ratings: atOdds.join(", ") },
              )
            : ratings.some(({ differenceDb }) => differenceDb !== null)
              ? i18n.t("Label and test data agree within rounding.")
              : null}
          {isOtherClass &&
            ` ${
              ofSlc80 === null
                ? i18n.t("An SLC80 of {level} dB is below any class.", {
                    level: formatLevel(slc80Db, locale),
                  })
                : i18n.t("An SLC80 of {level} dB is class {class}.", {
                    level: formatLevel(slc80Db, locale),
                    class: ofSlc80,
                  })
            }`}
        </Status>
      </p>
    </div>
  );
}
