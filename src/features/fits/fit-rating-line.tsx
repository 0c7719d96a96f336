import { useLingui } from "@lingui/react";
import { fitRating, hasToPass } from "../../../shared/acoustics/protection/fit-rating";
import { formatLevel } from "../../../shared/format/level";
import { passWord } from "../../../shared/words/register-words";
import { Status } from "../../components/status";
import { useLocale } from "../../lib/i18n";
import { FitScale } from "./fit-scale";

/** What the trials typed so far come to, beside what the noise asks for. */
export function FitRatingLine({
  leftDb,
  rightDb,
  methodSdDb,
  confidencePct,
  needDb,
  labelLess7Db = null,
}: {
  leftDb: readonly number[];
  rightDb: readonly number[];
  methodSdDb: number;
  confidencePct: number;
  needDb: number | null;
  /** The label’s US number less 7, where Appendix B governs, dB. */
  labelLess7Db?: number | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const uprightDb = hasToPass(needDb) ? needDb : null;
  const { rating, refusal } = fitRating({ leftDb, rightDb, methodSdDb, confidencePct, needDb });
  // Which trial that is stands at its ear.
  if (refusal?.code === "above-bone-conduction")
    return <p className="not-assessed">{i18n.t("Not rated while a trial can’t be right.")}</p>;
  if (!rating)
    return (
      <div className="fit-rating">
        <p className="not-assessed">{i18n.t("Type what each trial took off.")}</p>
        <LabelLess7 db={labelLess7Db} />
        <FitScale ticksDb={[]} uprightDb={uprightDb} />
      </div>
    );
  const { left, right, weakerEar, parDb, isOneEar, hasSingleTrial, hasPassed } = rating;
  const ears = [left, right].flatMap((ear) => (ear ? [ear.parDb] : []));
  return (
    <div className="fit-rating">
      <Status>
        <span className="fit-par">
          {i18n.t("PAR {par} dB", { par: formatLevel(parDb, locale) })}
        </span>{" "}
        <b className={hasPassed === false ? "reversed" : "fit-pass"}>
          {passWord(i18n, { hasPassed, needDb })}
        </b>
      </Status>
      <p>
        {isOneEar
          ? weakerEar === "left"
            ? i18n.t("Left ear only, at {pct} % confidence.", { pct: confidencePct })
            : i18n.t("Right ear only, at {pct} % confidence.", { pct: confidencePct })
          : weakerEar === "left"
            ? i18n.t("The weaker ear is the left one, at {pct} % confidence.", {
                pct: confidencePct,
              })
            : i18n.t("The weaker ear is the right one, at {pct} % confidence.", {
                pct: confidencePct,
              })}{" "}
        {left && i18n.t("Left {level}.", { level: formatLevel(left.parDb, locale) })}{" "}
        {right && i18n.t("Right {level}.", { level: formatLevel(right.parDb, locale) })}{" "}
        {needDb !== null &&
          (hasToPass(needDb)
            ? i18n.t("Needed {need}.", { need: formatLevel(needDb, locale) })
            : i18n.t("Nothing has to come off, so there is nothing to pass."))}
      </p>
      {isOneEar && hasToPass(needDb) && hasPassed === null && (
        <p className="field-note">
          {weakerEar === "left"
            ? i18n.t("The weaker ear decides: measure the right one too before it can pass.")
            : i18n.t("The weaker ear decides: measure the left one too before it can pass.")}
        </p>
      )}
      <LabelLess7 db={labelLess7Db} />
      <FitScale ticksDb={ears} uprightDb={uprightDb} />
      {[...leftDb, ...rightDb].some((trialDb) => trialDb < 0) && (
        <p className="field-note">
          {i18n.t(
            "A trial below 0 dB says that it was louder under the protector than without it. Is the sign right?",
          )}
        </p>
      )}
      {hasSingleTrial && (
        <p className="field-note">
          {i18n.t(
            "A single trial says nothing of how the next one would sit. Two or more are better.",
          )}
        </p>
      )}
    </div>
  );
}

/** What Appendix B takes off an A-weighted level by the label, without any derating: it stays beside every own fit. */
function LabelLess7({ db }: { db: number | null }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (db === null) return null;
  return (
    <p className="beneath">
      {i18n.t("By its label, rating − 7: {level} dB.", { level: formatLevel(db, locale) })}
    </p>
  );
}
