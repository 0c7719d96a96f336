import { useLingui } from "@lingui/react";
import type { ReactNode } from "react";
import { orderSentence } from "../../../shared/findings/sentences";
import { formatDay, formatInstant } from "../../../shared/format/date";
import type { HandOverContent } from "../../../shared/schemas/hand-over";
import { useLocale } from "../../lib/i18n";

function Part({ title, none, children }: { title: string; none: string; children: ReactNode[] }) {
  return (
    <>
      <h3 className="sheet-group">{title}</h3>
      {children.length > 0 ? (
        <ul className="hand-over-list">{children}</ul>
      ) : (
        <p className="sheet-noticed">{none}</p>
      )}
    </>
  );
}

/** What was on the sheet, in the reader's language. */
export function HandOverLists({
  content,
  timeZone,
}: {
  content: HandOverContent;
  timeZone: string;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const until = (date: string | null) =>
    date === null
      ? i18n.t("until further notice")
      : i18n.t("until {day}", { day: formatDay(date, locale) });
  return (
    <>
      <Part title={i18n.t("Open orders")} none={i18n.t("No order is open.")}>
        {content.orders.map(({ findingId, workerName, kind, facts, cannot }) => (
          <li key={findingId ?? workerName}>
            <b>{workerName}</b>
            <span className="block">{orderSentence(i18n, locale, kind, facts)}</span>
            {cannot && (
              <span className="beneath block">
                {i18n.t("Can’t, because: {text} ({name})", {
                  text: cannot.text,
                  name: i18n.t("{name}, {time}", {
                    name: cannot.byName,
                    time: formatInstant(cannot.at, timeZone, locale),
                  }),
                })}
              </span>
            )}
          </li>
        ))}
      </Part>
      <Part title={i18n.t("Not in")} none={i18n.t("Everybody is in, as far as is known.")}>
        {content.absent.map(({ workerName, untilDate }) => (
          <li key={workerName}>
            <b>{workerName}</b> <span>{until(untilDate)}</span>
          </li>
        ))}
      </Part>
      <Part title={i18n.t("On loan")} none={i18n.t("Nobody.")}>
        {content.loans.map(({ workerName, way, crewName, untilDate }) => (
          <li key={`${workerName} ${way}`}>
            <b>{workerName}</b>{" "}
            <span>
              {way === "out"
                ? i18n.t("lent to {crew}", { crew: crewName ?? "" })
                : crewName
                  ? i18n.t("on loan from {crew}", { crew: crewName })
                  : i18n.t("on loan")}{" "}
              {until(untilDate)}
            </span>
          </li>
        ))}
      </Part>
    </>
  );
}
