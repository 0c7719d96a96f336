import { useLingui } from "@lingui/react";
import { formatDayMonth, formatShortDate, formatWeekday } from "../../shared/format/date";
import { addDays } from "../../shared/time/zone";
import { useLocale } from "../lib/i18n";

/** When a finding is due, with its word where that is past: the same wherever it stands. */
export function FindingDue({
  dueOn,
  today,
  isNearby = false,
  isSettled = false,
}: {
  dueOn: string | null;
  today: string;
  /** By weekday within a week of today. */
  isNearby?: boolean;
  /** Marked as done: it waits for a check and is late no more. */
  isSettled?: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  if (dueOn === null) return <>–</>;
  const isNear = dueOn >= addDays(today, -6) && dueOn <= addDays(today, 6);
  const date = !isNearby
    ? formatShortDate(dueOn, locale)
    : isNear
      ? formatWeekday(dueOn, locale)
      : formatDayMonth(dueOn, locale);
  const year = dueOn.slice(0, 4);
  return (
    <span className="two-lines">
      {dueOn === today ? <b>{i18n.t("today")}</b> : <span className="mono">{date}</span>}
      {isNearby && !isNear && year !== today.slice(0, 4) && <span className="beneath">{year}</span>}
      {dueOn < today && !isSettled && <b className="beneath-ink">{i18n.t("overdue")}</b>}
    </span>
  );
}
