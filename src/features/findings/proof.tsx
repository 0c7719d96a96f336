import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { formatDate, formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import type { Locale } from "../../../shared/i18n/index";
import { isolate } from "../../../shared/i18n/isolate";
import type { DayFigures } from "../../../shared/schemas/finding";
import type { FollowUpView } from "../../../shared/schemas/follow-up";
import { DataTable } from "../../components/data-table";
import {
  AtEarFigure,
  DayStrip,
  OutsideFigure,
  TableStripGround,
  TableStripScale,
  useTableFrame,
} from "../../components/day-figures";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

type Proof = NonNullable<FollowUpView["proof"]>;

function sideWords(i18n: I18n, locale: Locale, { days, ...side }: Proof["before"]): string {
  const { medianOutsideDb, lowestOutsideDb, highestOutsideDb } = side;
  if (medianOutsideDb === null || lowestOutsideDb === null || highestOutsideDb === null) return "";
  const words = {
    days,
    median: formatLevel(medianOutsideDb, locale),
    lowest: formatLevel(lowestOutsideDb, locale),
    highest: formatLevel(highestOutsideDb, locale),
  };
  return days === 1
    ? i18n.t("{median} dB on the one day measured", words)
    : i18n.t("{median} dB in the middle of {days} days measured, {lowest} to {highest}", words);
}

/** What came to the ear on the day that showed it, and what does since; nothing where one of the two is not known. */
function atEarWords(
  i18n: I18n,
  locale: Locale,
  shown: DayFigures,
  { lowestAtEarDb, highestAtEarDb }: Proof["after"],
): string | null {
  if (shown.atEarDb === null || lowestAtEarDb === null || highestAtEarDb === null) return null;
  const words = {
    level: formatLevel(shown.atEarDb, locale, shown.atEarBound),
    day: formatDate(shown.date, locale),
    lowest: formatLevel(lowestAtEarDb, locale),
    highest: formatLevel(highestAtEarDb, locale),
  };
  return words.lowest === words.highest
    ? i18n.t(
        "At the ear it was {level} dB on {day}, which showed it last; after the measure {highest} dB.",
        words,
      )
    : i18n.t(
        "At the ear it was {level} dB on {day}, which showed it last; after the measure {lowest} to {highest} dB.",
        words,
      );
}

/** Noise without protection, and what of it came to the ear, before and after the first measure was done, on measured days only. */
export function ProofTable({
  proof,
  shown,
}: {
  proof: FollowUpView["proof"];
  /** The last day that showed what was found. */
  shown: DayFigures | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const rows = proof
    ? [
        ...proof.after.latest.map((day) => ({ ...day, isAfter: true })),
        ...proof.before.latest.map((day) => ({ ...day, isAfter: false })),
      ]
    : [];
  const frame = useTableFrame(rows);
  if (!proof) {
    return (
      <p>
        {i18n.t("No measure is done yet. From the day after one is, measured days stand here.")}
      </p>
    );
  }
  const { before, after } = proof;
  const date = formatDate(proof.doneOn, locale);
  const fell =
    before.medianOutsideDb !== null && after.medianOutsideDb !== null
      ? before.medianOutsideDb - after.medianOutsideDb
      : null;
  return (
    <>
      <p>
        {i18n.t("The first measure was done on {date}.", { date })}{" "}
        {before.days === 0
          ? i18n.t("Before it nothing was measured that this could be held against.")
          : i18n.t("Without protection before it: {words}.", {
              words: sideWords(i18n, locale, before),
            })}{" "}
        {after.days === 0 ? (
          <b>{i18n.t("Since then nothing was measured: what it brought is not known.")}</b>
        ) : (
          i18n.t("After it: {words}.", { words: sideWords(i18n, locale, after) })
        )}{" "}
        {fell !== null && (
          <b>
            {fell >= 0
              ? i18n.t("That is {difference} dB less.", { difference: formatLevel(fell, locale) })
              : i18n.t("That is {difference} dB more.", {
                  difference: formatLevel(-fell, locale),
                })}
          </b>
        )}
      </p>
      {shown && <p>{atEarWords(i18n, locale, shown, after)}</p>}
      {rows.length > 0 && (
        <div className="stacked-table evidence-table">
          <DataTable
            caption={i18n.t("Measured days after and before the measure, latest first")}
            rows={rows}
            rowKey={({ resultId }) => resultId}
            isTwoLine
            groupOf={({ isAfter }) =>
              isAfter
                ? { key: "after", label: i18n.t("After {date}", { date }) }
                : { key: "before", label: i18n.t("Before {date}", { date }) }
            }
            columns={[
              {
                id: "wrong",
                head: i18n.t("Day, and whose"),
                isRowHead: true,
                cell: ({ worker, date: on }) => (
                  <span className="two-lines">
                    <TextLink to={paths.result(worker.id, on)}>
                      {formatShortDate(on, locale)}
                    </TextLink>
                    <span className="beneath">{isolate(worker.name)}</span>
                  </span>
                ),
              },
              {
                id: "at-ear",
                head: i18n.t("At the ear"),
                unit: i18n.t("day, dB"),
                cell: (day) => <AtEarFigure figures={day} />,
              },
              {
                id: "strip",
                kind: "strip",
                head: <TableStripScale frame={frame} />,
                widthPx: 216,
                filler: <TableStripGround frame={frame} />,
                cell: (day) => <DayStrip figures={day} isHidden />,
              },
              {
                id: "outside",
                head: i18n.t("Without protection"),
                unit: i18n.t("day, dB"),
                cell: (day) => <OutsideFigure figures={day} />,
              },
            ]}
          />
        </div>
      )}
    </>
  );
}
