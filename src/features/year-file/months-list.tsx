import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber, NO_FIGURE } from "../../../shared/format/number";
import { DropStrip, StripScale } from "../../components/drop-strip";
import type { StripFrame } from "../../components/strip-of-day";
import { useLocale } from "../../lib/i18n";
import { AT_EAR, COUNTS, type CountName, medians } from "./months-table";
import type { GapMonth } from "./queries";

const STRIP_PX = 200;
/** What a month is headed by, the gravest that there is; else its number of days. */
const GRAVEST: readonly CountName[] = ["over", "cantTell", "protectorFault", "notAssessed"];

/** The year by months on a phone: name and word, then figure, strip, figure; its counts once they are asked for. */
export function MonthsList({
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
  const limits = frame?.limits ?? [];
  const isThisYear = today.startsWith(String(year));
  const thisMonth = isThisYear ? Number(today.slice(5, 7)) : null;
  const counted = (name: CountName) => !(AT_EAR.has(name) && !hasLimitAtEar);
  const heads: Record<CountName, string> = {
    days: i18n.t("Days"),
    over: i18n.t("Over at the ear"),
    cantTell: i18n.t("Can’t tell yet at the ear"),
    notAssessed: i18n.t("Not assessed"),
    overOutside: i18n.t("Over without protection"),
    cantTellOutside: i18n.t("Can’t tell yet without protection"),
    protectorFault: i18n.t("Protector too little or much"),
    corrected: i18n.t("Corrected"),
  };
  const monthName = (month: number) =>
    i18n.date(new Date(Date.UTC(year, month - 1, 1)), { month: "long", timeZone: "UTC" });
  const figure = (value: number) => formatNumber(value, 0, locale);
  const counts = (of: (name: CountName) => number) => (
    <dl className="month-counts">
      {COUNTS.map((name) => (
        <div key={name}>
          <dt>{heads[name]}</dt>
          <dd className="mono">{counted(name) ? figure(of(name)) : NO_FIGURE}</dd>
        </div>
      ))}
    </dl>
  );
  const word = (month: GapMonth) => {
    const gravest = GRAVEST.find((name) => counted(name) && month[name] > 0);
    return gravest ? (
      <b>{`${heads[gravest]}: ${figure(month[gravest])}`}</b>
    ) : (
      `${heads.days}: ${figure(month.days)}`
    );
  };
  return (
    <section className="months-list" aria-label={i18n.t("The year by months")}>
      <div className="month-figures months-scale">
        <span>
          {i18n.t("At the ear")}
          <em className="block">{i18n.t("Median dB")}</em>
        </span>
        <StripScale limits={limits} targetBand={null} widthPx={STRIP_PX} />
        <span>
          {i18n.t("Without protection")}
          <em className="block">{i18n.t("Median dB")}</em>
        </span>
      </div>
      {months === undefined &&
        [1, 2, 3].map((month) => (
          <div key={month} className="month" aria-hidden="true">
            <span className="loading-line" />
          </div>
        ))}
      {months && months.length > 0 && (
        <details className="month" open>
          <summary>
            <h3>
              {isThisYear
                ? i18n.t("To {day}", { day: formatShortDate(today, locale) })
                : i18n.t("The year")}
            </h3>
          </summary>
          {counts((name) => months.reduce((sum, month) => sum + month[name], 0))}
        </details>
      )}
      {months?.map((month) => (
        <details key={month.month} className="month">
          <summary>
            <span className="month-head">
              <h3>
                {monthName(month.month)}
                {month.month === thisMonth && (
                  <span className="month-note"> {i18n.t("not over yet")}</span>
                )}
              </h3>
              <span className="month-word">{word(month)}</span>
            </span>
            <span className="month-figures">
              <span className="figure is-strong">{formatLevel(month.medianAtEarDb, locale)}</span>
              <DropStrip
                {...medians(month)}
                limits={limits}
                variant="list"
                widthPx={STRIP_PX}
                k={1.15}
              />
              <span className="figure">{formatLevel(month.medianOutsideDb, locale)}</span>
            </span>
          </summary>
          {counts((name) => month[name])}
        </details>
      ))}
    </section>
  );
}
