import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { lazy, Suspense } from "react";
import { formatDay, formatTime } from "../../../shared/format/date";
import { formatLimit, formatWholeLevel } from "../../../shared/format/level";
import { startsSentence } from "../../../shared/format/words";
import type { Locale } from "../../../shared/i18n/index";
import { Empty } from "../../components/empty";
import { stripOfDay } from "../../components/strip-of-day";
import { WorkerStrip } from "../../components/worker-strip";
import { useLocale } from "../../lib/i18n";
import { Emphasis } from "./emphasis";
import { ownFrame } from "./own-frame";
import type { OwnDay } from "./queries";

/** The last shift in one sentence; what stands out is between asterisks. */
export function lastShiftSentence(i18n: I18n, locale: Locale, day: OwnDay): string {
  const { atEarDb, outsideDb, uncertaintyDb, limit } = day;
  const atEar = formatWholeLevel(atEarDb, locale, limit?.levelDb);
  const values = {
    day: formatDay(day.date, locale),
    level:
      day.atEarBound === "lower"
        ? i18n.t("at least {level}", { level: atEar })
        : day.atEarBound === "upper"
          ? i18n.t("at most {level}", { level: atEar })
          : atEar,
    around:
      day.outsideBound === "lower"
        ? i18n.t("at least {level}", { level: formatWholeLevel(outsideDb, locale) })
        : formatWholeLevel(outsideDb, locale),
    limit: limit ? formatLimit(limit.levelDb, locale) : "",
    top: atEarDb === null ? "" : formatWholeLevel(atEarDb + (uncertaintyDb ?? 0), locale),
  };
  if (atEarDb === null || day.verdictAtEar === "not-assessed") {
    if (atEarDb !== null && !limit?.isAtEar) {
      if (day.word === "too-little")
        return i18n.t(
          "On {day} *{level} decibels* reached your ear. Your protector was too little for that.",
          values,
        );
      // A bang over its own limit stands at the top of the page: nothing here may say that all was well.
      if (day.word !== null && !hasLoudMoment(day))
        return i18n.t(
          "On {day} *{level} decibels* reached your ear. Your protector was enough.",
          values,
        );
      return i18n.t("On {day} *{level} decibels* reached your ear.", values);
    }
    if (day.reason === "wearing-unknown")
      return i18n.t(
        "On {day} we can’t say how much reached your ear: nobody wrote down how long you wore your protector.",
        values,
      );
    if (day.reason === "time-unknown")
      return i18n.t(
        "On {day} we can’t say how much reached your ear: a part of your shift is not written down.",
        values,
      );
    return outsideDb === null
      ? i18n.t("On {day} we can’t say how loud it was.", values)
      : i18n.t(
          "On {day} it was *{around} decibels* around you. We can’t say how much reached your ear.",
          values,
        );
  }
  if (day.verdictAtEar === "over")
    return i18n.t(
      "On {day} *{level} decibels* reached your ear, over the limit of {limit}.",
      values,
    );
  if (day.verdictAtEar === "cant-tell-yet")
    return i18n.t(
      "On {day} about *{level} decibels* reached your ear. It could be up to {top}, and the limit is {limit}.",
      values,
    );
  return i18n.t(
    "On {day} *{level} decibels* reached your ear, under the limit of {limit}.",
    values,
  );
}

/**
 * Of days, latest first: the last one whose shift is over, and before it those of shifts that are written down but not
 * over. A day of unknown hours counts as over.
 */
export function lastFinished(
  days: readonly OwnDay[],
  now: Date,
): { finished: OwnDay | null; running: readonly OwnDay[] } {
  const isOver = ({ endsAt }: OwnDay) => endsAt === null || Date.parse(endsAt) <= now.getTime();
  const finished = days.find(isOver) ?? null;
  return { finished, running: finished ? days.slice(0, days.indexOf(finished)) : days };
}

/** A shift that was written down before its end: until when it lasts, and that nothing is told of it yet. */
export function notOverSentence(
  i18n: I18n,
  locale: Locale,
  { date, endsAt }: OwnDay,
  { timeZone, today }: { timeZone: string; today: string },
): string {
  const until = endsAt === null ? "" : formatTime(endsAt, timeZone);
  return date === today
    ? i18n.t("Your shift until {until} today is not over. Its figures stand here afterwards.", {
        until,
      })
    : i18n.t(
        "Your shift of {day}, until {until}, is not over. Its figures stand here afterwards.",
        {
          day: formatDay(date, locale),
          until,
        },
      );
}

const hasLoudMoment = ({ kindsOver }: OwnDay) =>
  kindsOver.includes("peak") || kindsOver.includes("ceiling");

/** After the page itself, as what it says comes from elsewhere. */
const OwnSaid = lazy(() => import("./own-said").then(({ OwnSaid }) => ({ default: OwnSaid })));

export function LastShift({
  day,
  running,
  workerId,
  askedFor,
  today,
  timeZone,
}: {
  /** The last one that is over. */
  day: OwnDay | null;
  /** Those written down whose shift is not over. */
  running: readonly OwnDay[];
  workerId: string;
  /** The date for which the head of the page asks how long the protector was worn. */
  askedFor: string | undefined;
  today: string;
  timeZone: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const notOver = running.map((one) => (
    <p key={one.date} className="me-note">
      {notOverSentence(i18n, locale, one, { timeZone, today })}
    </p>
  ));
  if (!day && running.length > 0) return notOver;
  if (!day) return <Empty title={i18n.t("No shift of yours is recorded yet.")} />;
  return (
    <>
      {notOver}
      <p>
        <Emphasis text={startsSentence(lastShiftSentence(i18n, locale, day))} />
      </p>
      {(day.atEarDb !== null || day.outsideDb !== null) && (
        <div className="me-strip">
          <WorkerStrip {...stripOfDay(day, ownFrame(i18n, locale, day))} />
        </div>
      )}
      {day.isStale && (
        <p className="me-note">
          {i18n.t("Something was corrected; this is being worked out again.")}
        </p>
      )}
      {day.hasProtector !== "no" && day.origin === "computed" && (
        <Suspense fallback={<p>&nbsp;</p>}>
          <OwnSaid
            workerId={workerId}
            lastDate={day.date}
            hasFigure={day.atEarDb !== null}
            askedFor={askedFor}
            today={today}
          />
        </Suspense>
      )}
    </>
  );
}
