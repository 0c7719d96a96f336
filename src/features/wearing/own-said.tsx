import { useLingui } from "@lingui/react";
import { useEffect, useState } from "react";
import { useLocation } from "react-router-dom";
import { formatDate } from "../../../shared/format/date";
import type { OwnReports } from "../../../shared/schemas/wearing";
import { Button } from "../../components/button";
import { Section } from "../../components/page";
import { useLocale } from "../../lib/i18n";
import { useMoveFocus } from "../../lib/move-focus";
import { isStated, keptBesideWords, saidWords } from "../../lib/wearing-answers";
import { OWN_REPORT } from "../../paths";
import { OwnReportForm } from "./own-report-form";

/** What a worker said of their own wearing on a day, and the form to say it, or to say it anew while that is possible. */
export function OwnSaid({
  workerId,
  siteId,
  date,
  tasks,
  said,
}: {
  workerId: string;
  siteId: string;
  date: string;
  tasks: readonly {
    readonly id: string;
    readonly name: string;
    readonly statedPct: number | null;
  }[];
  said: OwnReports["rows"];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { hash } = useLocation();
  const [isOpen, setOpen] = useState(said.length === 0);
  const [isKept, setKept] = useState(false);
  // What goes away with the focus on it: the keyboard goes on at what stands in its place.
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  useEffect(() => {
    if (hash === `#${OWN_REPORT}`) document.getElementById(OWN_REPORT)?.scrollIntoView?.();
  }, [hash]);

  const [last] = said;
  const askable = tasks.filter(
    ({ id }) => !said.some(({ taskId, canChange }) => taskId === id && !canChange),
  );
  const beside = keptBesideWords(i18n, tasks);
  const isAllStated = tasks.every(isStated);
  const isChangeable = askable.length > 0;
  return (
    <Section title={i18n.t("How long did you wear it?")} id={OWN_REPORT}>
      <div ref={place}>
        {isKept && (
          <p className="own-kept" tabIndex={-1}>
            {isAllStated
              ? i18n.t("Thank you, that is noted.")
              : i18n.t(
                  "Thank you, that is noted. The days that rest on it are being worked out again.",
                )}
          </p>
        )}
        {beside && <p>{beside}</p>}
        {!isOpen && last && (
          <>
            <p>
              {last.isByWorker
                ? i18n.t("You said on {date}:", { date: formatDate(last.saidOn, locale) })
                : i18n.t("Noted for you on {date}, as you told it:", {
                    date: formatDate(last.saidOn, locale),
                  })}
            </p>
            <ul className="own-said">
              {said.map((one) => (
                <li key={one.taskId}>
                  {one.taskName}: <b>{saidWords(i18n, one)}</b>
                </li>
              ))}
            </ul>
            {last.note !== "" && <p className="beneath">{last.note}</p>}
            <p className="beneath">
              {last.canChange
                ? i18n.t("You can say it anew until {date}.", {
                    date: formatDate(last.changeableUntil, locale),
                  })
                : i18n.t("It is too long ago to be said anew here. Ask your safety officer.")}
            </p>
            {isChangeable && (
              <Button
                className="own-anew"
                size="worker"
                onClick={() => {
                  setKept(false);
                  setOpen(true);
                  moveFocus("input:checked", "input");
                }}
              >
                {i18n.t("Say it anew")}
              </Button>
            )}
          </>
        )}
        {isOpen && (
          <>
            {said.length > 0 ? (
              <p className="beneath">
                {i18n.t("What you send takes the place of what you said before of this day.")}
              </p>
            ) : (
              !isAllStated && (
                <p className="beneath">
                  {i18n.t("It counts together with what was seen, where nobody wrote it down.")}
                </p>
              )
            )}
            <OwnReportForm
              workerId={workerId}
              siteId={siteId}
              date={date}
              tasks={askable}
              said={said}
              onSent={() => {
                setKept(true);
                setOpen(false);
                moveFocus(".own-kept");
              }}
              onLeave={
                said.length === 0
                  ? undefined
                  : () => {
                      setOpen(false);
                      moveFocus(".own-anew");
                    }
              }
            />
          </>
        )}
      </div>
    </Section>
  );
}
