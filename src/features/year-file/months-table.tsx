import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber, NO_FIGURE } from "../../../shared/format/number";
import { DropStrip, StripGround, StripScale } from "../../components/drop-strip";
import type { StripFrame } from "../../components/strip-of-day";
import { useLocale } from "../../lib/i18n";
import type { GapMonth } from "./queries";

export type CountName = keyof Pick<
  GapMonth,
  | "days"
  | "over"
  | "cantTell"
  | "notAssessed"
  | "overOutside"
  | "cantTellOutside"
  | "protectorFault"
  | "corrected"
>;
export const COUNTS: readonly CountName[] = [
  "days",
  "over",
  "cantTell",
  "notAssessed",
  "overOutside",
  "cantTellOutside",
  "protectorFault",
  "corrected",
];
/** Last of a group of columns: an upright hairline follows. */
const ENDS: ReadonlySet<CountName> = new Set([
  "days",
  "notAssessed",
  "cantTellOutside",
  "protectorFault",
  "corrected",
]);
const STRIP_PX = 200;

export const AT_EAR: ReadonlySet<CountName> = new Set<CountName>([
  "over",
  "cantTell",
  "notAssessed",
]);

const cellOf = (name: CountName) => `is-figure${ENDS.has(name) ? " ends-group" : ""}`;

/** A year by months: days, verdicts, and the medians as a strip. */
export function MonthsTable({
  year,
  months,
  frame,
  hasLimitAtEar,
  today,
}: {
  year: number;
  /** Without: they are being read. */
  months: readonly GapMonth[] | undefined;
  frame: StripFrame | null;
  /** Of any rule set of the year: without, nothing is counted at the ear. */
  hasLimitAtEar: boolean;
  /** ISO date at the site. */
  today: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const isThisYear = today.startsWith(String(year));
  const thisMonth = isThisYear ? Number(today.slice(5, 7)) : null;
  const limits = frame?.limits ?? [];
  const monthName = (month: number) =>
    i18n.date(new Date(Date.UTC(year, month - 1, 1)), { month: "long", timeZone: "UTC" });
  const sum = (name: CountName) => (months ?? []).reduce((total, month) => total + month[name], 0);
  const count = (value: number) =>
    value === 0 ? <span className="is-zero">0</span> : formatNumber(value, 0, locale);
  const [limit] = limits;
  // Where the rule has no limit at the ear there is nothing to count: that is not zero.
  const figure = (name: CountName, value: number) =>
    AT_EAR.has(name) && !hasLimitAtEar ? NO_FIGURE : count(value);
  return (
    <div className="table-frame">
      <section
        className="table-scroll"
        aria-label={i18n.t("Months")}
        // biome-ignore lint/a11y/noNoninteractiveTabindex: wider than a phone, it has to be scrolled by keys
        tabIndex={0}
      >
        <table className="data-table months-table" aria-busy={months === undefined}>
          <caption className="sr-only">{i18n.t("The year by months")}</caption>
          <thead>
            <tr className="months-groups">
              <td colSpan={2} />
              <th scope="colgroup" colSpan={3}>
                {frame?.hasLimitAtEar && limit
                  ? i18n.t("At the ear, {limit}", { limit: formatNumber(limit.levelDb, 0, locale) })
                  : i18n.t("At the ear")}
              </th>
              <th scope="colgroup" colSpan={2}>
                {i18n.t("Without protection")}
              </th>
              <th scope="colgroup">{i18n.t("Protector")}</th>
              <td />
              <th scope="colgroup">{i18n.t("Median dB")}</th>
              <td className="strip-cell" rowSpan={2}>
                <StripScale limits={limits} targetBand={null} widthPx={STRIP_PX} />
              </td>
              <th scope="colgroup">{i18n.t("Median dB")}</th>
            </tr>
            <tr>
              <th scope="col">{year}</th>
              <th scope="col" className="ends-group">
                {i18n.t("Days")}
              </th>
              <th scope="col">{i18n.t("Over")}</th>
              <th scope="col">{i18n.t("Can’t tell yet")}</th>
              <th scope="col" className="ends-group">
                {i18n.t("Not assessed")}
              </th>
              <th scope="col">{i18n.t("Over")}</th>
              <th scope="col" className="ends-group">
                {i18n.t("Can’t tell yet")}
              </th>
              <th scope="col" className="ends-group">
                {i18n.t("too little or much")}
              </th>
              <th scope="col" className="ends-group">
                {i18n.t("Corrected")}
              </th>
              <th scope="col" className="of-strip">
                {i18n.t("at the ear")}
              </th>
              <th scope="col" className="of-strip">
                {i18n.t("without protection")}
              </th>
            </tr>
          </thead>
          <tbody>
            {months === undefined &&
              [1, 2, 3].map((month) => (
                <tr key={month}>
                  <th scope="row">{monthName(month)}</th>
                  {COUNTS.map((name) => (
                    <td key={name} className={cellOf(name)}>
                      <span className="loading-line" />
                    </td>
                  ))}
                  <td className="is-figure" />
                  <td className="strip-cell">
                    <StripGround limits={limits} targetBand={null} widthPx={STRIP_PX} />
                  </td>
                  <td className="is-figure" />
                </tr>
              ))}
            {months?.map((month) => (
              <tr key={month.month}>
                <th scope="row">
                  {monthName(month.month)}
                  {month.month === thisMonth && (
                    <span className="month-note"> {i18n.t("not over yet")}</span>
                  )}
                </th>
                {COUNTS.map((name) => (
                  <td key={name} className={cellOf(name)}>
                    {figure(name, month[name])}
                  </td>
                ))}
                <td className="is-figure is-strong of-strip">
                  {formatLevel(month.medianAtEarDb, locale)}
                </td>
                <td className="strip-cell">
                  <DropStrip
                    {...medians(month)}
                    limits={limits}
                    variant="row"
                    widthPx={STRIP_PX}
                    k={1}
                    isHidden
                  />
                </td>
                <td className="is-figure of-strip">{formatLevel(month.medianOutsideDb, locale)}</td>
              </tr>
            ))}
          </tbody>
          {months && months.length > 0 && (
            <tfoot>
              <tr>
                <th scope="row">
                  {isThisYear
                    ? i18n.t("To {day}", { day: formatShortDate(today, locale) })
                    : i18n.t("The year")}
                </th>
                {COUNTS.map((name) => (
                  <td key={name} className={cellOf(name)}>
                    {figure(name, sum(name))}
                  </td>
                ))}
                <td colSpan={3} className="of-strip" />
              </tr>
            </tfoot>
          )}
        </table>
      </section>
    </div>
  );
}

/** Two medians are no day: no uncertainty, no word, no verdict. */
export const medians = (month: GapMonth) => ({
  outsideDb: month.medianOutsideDb,
  outsideUDb: null,
  outsideBound: "exact" as const,
  atEarDb: month.medianAtEarDb,
  atEarBound: "exact" as const,
  atEarUDb: null,
  atEarActiveDb: null,
  atEarAsWorkedDb: null,
  whileWornDb: null,
  targetBand: null,
  isExpected: false,
  hasProtector: month.medianAtEarDb === null ? ("no" as const) : ("yes" as const),
  word: null,
  verdict: null,
});
