import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { formatDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import type { TaskTimes as Times } from "../../../shared/schemas/own-record";
import { Section } from "../../components/page";
import { useLocale } from "../../lib/i18n";
import { ownQueries } from "./queries";

/** How long the tasks of the day may last; nothing at all where nothing is certain. */
export function TaskTimes({ workerId }: { workerId: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { data } = useQuery(ownQueries.taskTimes(workerId));
  const rows = data ?? [];
  if (rows.length === 0) return null;
  const howLong = ({ allowedMin }: Times["rows"][number]) =>
    allowedMin === 0
      ? i18n.t("less than 5 min")
      : i18n.t("at most {time}", { time: formatDuration(allowedMin, locale) });
  return (
    <Section title={i18n.t("How long today")} id="my-times">
      <ul className="me-protectors">
        {rows.map((one) => {
          const values = { date: formatDate(one.measuredOn, locale) };
          return (
            <li key={one.taskId}>
              <p className="me-protector">
                <span>{one.taskName}</span>
                <b>{howLong(one)}</b>
              </p>
              <p className="me-note">
                {one.isWorn
                  ? i18n.t(
                      "If the noise is as measured on {date}, and you wear your protector as you usually do.",
                      values,
                    )
                  : i18n.t("If the noise is as measured on {date}.", values)}
              </p>
            </li>
          );
        })}
      </ul>
      <p className="me-note">{i18n.t("Each with the rest of your day as usual.")}</p>
    </Section>
  );
}
