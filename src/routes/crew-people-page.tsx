import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import { formatDay } from "../../shared/format/date";
import { startsSentence } from "../../shared/format/words";
import { Button } from "../components/button";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { AbsenceForm, LoanForm } from "../features/crew-sheet/attendance-forms";
import { SpanList } from "../features/crew-sheet/attendance-list";
import { attendanceQuery } from "../features/crew-sheet/attendance-queries";
import { SheetLoading } from "../features/crew-sheet/sheet-part";
import { useLocale } from "../lib/i18n";
import { useMoveFocus } from "../lib/move-focus";
import { paths } from "../paths";
import "../styles/crew-sheet.css";

/** Who of a crew is not in, and who is lent to whom, by date: the sheet of those days knows it. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { crewId = "" } = useParams();
  const { data, error, refetch } = useQuery(attendanceQuery(crewId));
  /** Each for itself: opening the one loses nothing that was typed into the other. */
  const [open, setOpen] = useState({ absence: false, loan: false });
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const toWay = (form: "absence" | "loan") => () =>
    moveFocus(`[data-open="${form}"]`, `[data-form="${form}"] select`);
  const close = (from: "absence" | "loan") => () => {
    setOpen((before) => ({ ...before, [from]: false }));
    toWay(from)();
  };
  const show = (form: "absence" | "loan") => {
    setOpen((before) => ({ ...before, [form]: true }));
    moveFocus(`[data-form="${form}"] select`);
  };
  return (
    <>
      <PageBody>
        <div className="crew-people" ref={place}>
          <PageHead
            way={<TextLink to={paths.crewSheetOf(crewId)}>{i18n.t("Crew sheet")}</TextLink>}
            title={
              data
                ? i18n.t("Not in and on loan, {crew}", { crew: data.crew.name })
                : i18n.t("Not in and on loan")
            }
            lead={
              data &&
              i18n.t("{day}: today and to come.", {
                day: startsSentence(formatDay(data.today, locale), locale),
              })
            }
          />
          {error && !data && <Failed error={error} onRetry={() => void refetch()} />}
          {!data && !error && <SheetLoading />}
          {data && (
            <>
              <Section title={i18n.t("Not in")} id="absences">
                <SpanList
                  view={data}
                  part="absences"
                  spans={data.absences}
                  wordsOf={() => null}
                  empty={i18n.t("Everybody is in, as far as is known.")}
                  onTakenBack={toWay("absence")}
                />
                <p className="sheet-noticed">
                  {i18n.t("Whoever is not in is not expected on the sheet. Why is not asked here.")}
                </p>
                {open.absence ? (
                  <div data-form="absence">
                    <AbsenceForm view={data} onDone={close("absence")} />
                  </div>
                ) : (
                  <Button size="supervisor" data-open="absence" onClick={() => show("absence")}>
                    {i18n.t("Somebody is not in")}
                  </Button>
                )}
              </Section>
              <Section title={i18n.t("On loan")} id="loans">
                <SpanList
                  view={data}
                  part="loans"
                  spans={data.loans}
                  wordsOf={({ way, crewName }) => (
                    <p>
                      {way === "out"
                        ? i18n.t("lent to {crew}", { crew: crewName })
                        : crewName === ""
                          ? i18n.t("on loan")
                          : i18n.t("on loan from {crew}", { crew: crewName })}
                    </p>
                  )}
                  empty={i18n.t("Nobody is lent to another crew, and nobody to this one.")}
                  onTakenBack={toWay("loan")}
                />
                <p className="sheet-noticed">
                  {i18n.t(
                    "On the days of a loan the other crew’s supervisor sees the person, and no other days. To a crew of another site nobody is lent: an officer moves them there.",
                  )}
                </p>
                {open.loan ? (
                  <div data-form="loan">
                    <LoanForm view={data} onDone={close("loan")} />
                  </div>
                ) : (
                  <Button size="supervisor" data-open="loan" onClick={() => show("loan")}>
                    {i18n.t("Lend somebody")}
                  </Button>
                )}
              </Section>
            </>
          )}
        </div>
      </PageBody>
      <Folio />
    </>
  );
}
