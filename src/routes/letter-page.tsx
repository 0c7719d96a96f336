import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { formatDate, formatInstant, localDateOf } from "../../shared/format/date";
import { isLocale } from "../../shared/i18n/index";
import { isolate } from "../../shared/i18n/isolate";
import { ruleSetVersion } from "../../shared/rule-sets";
import { resultNoticeOf } from "../../shared/rule-sets/result-notice";
import type { LetterView } from "../../shared/schemas/letter";
import { letterStateNote, letterStateWord } from "../../shared/words/letter-words";
import { Button } from "../components/button";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { PaperForm } from "../features/letters/paper-form";
import { letterQueries } from "../features/letters/queries";
import { useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { useMoveFocus } from "../lib/move-focus";
import { paths } from "../paths";
import "../styles/field-sheet.css";
import "../styles/letters.css";

/** A letter as it was written, to be read again, printed, and recorded once it is signed. */
export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const { data, error, refetch } = useQuery(letterQueries.one(id));
  if (data) return <Letter letter={data} />;
  return (
    <PageBody>
      <PageHead
        title={i18n.t("Letter of results")}
        lead={error ? undefined : <span className="loading-line" />}
      />
      {error && <Failed error={error} onRetry={() => void refetch()} />}
    </PageBody>
  );
}

function Letter({ letter }: { letter: LetterView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const timeZone = user.sites.find(({ id }) => id === letter.siteId)?.timeZone ?? "UTC";
  const note = letterStateNote(i18n, locale, letter, timeZone);
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();
  const isOpen = ["to-print", "waiting", "sent", "failed"].includes(letter.state);
  const { withinDays, citation } = resultNoticeOf(letter.ruleSetKey);
  const ruleSet = ruleSetVersion(letter.ruleSetKey, letter.ruleSetVersion);
  return (
    <div className="field-sheets" ref={place}>
      <PageBody
        margin={
          <MarginNote title={i18n.t("When")}>
            <Leaders
              items={[
                {
                  key: "written",
                  label: i18n.t("written"),
                  value: formatInstant(letter.writtenAt, timeZone, locale),
                },
                ...(letter.sentAt
                  ? [
                      {
                        key: "sent",
                        label: i18n.t("sent"),
                        value: formatInstant(letter.sentAt, timeZone, locale),
                      },
                    ]
                  : []),
                { key: "due", label: i18n.t("due"), value: formatDate(letter.dueOn, locale) },
              ]}
            />
            <p>
              {citation
                ? i18n.t("{days} days after the measurement: {citation}, from memory.", {
                    days: withinDays,
                    citation,
                  })
                : i18n.t(
                    "The rules say that the worker is told, and name no number of days; {days} are the program’s own.",
                    { days: withinDays },
                  )}
            </p>
            {letter.replacesId && (
              <p>
                <TextLink to={paths.letter(letter.replacesId)}>
                  {i18n.t("The letter that this one replaces")}
                </TextLink>
              </p>
            )}
            {letter.replacedById && (
              <p>
                <TextLink to={paths.letter(letter.replacedById)}>
                  {i18n.t("The letter that replaces this one")}
                </TextLink>
              </p>
            )}
          </MarginNote>
        }
        marginWidthPx={240}
      >
        <PageHead
          way={
            <>
              <TextLink to={paths.letters}>{i18n.t("Letters of results")}</TextLink> /{" "}
              <TextLink
                to={paths.worker(letter.worker.id)}
              >{`${isolate(letter.worker.name)}, ${letter.worker.employeeNumber}`}</TextLink>
            </>
          }
          title={i18n.t("Letter of results: {name}", { name: letter.worker.name })}
          lead={
            <span data-said tabIndex={-1}>
              <b>{letterStateWord(i18n, letter.state)}</b>
              {note && `: ${note}`}. {letter.isLate && <b>{i18n.t("It is late.")}</b>}
            </span>
          }
          actions={isOpen && <Button onClick={() => window.print()}>{i18n.t("Print")}</Button>}
        />
        <article className="field-sheet result-letter" lang={letter.language}>
          <div className="field-sheet-head">
            <span>{letter.paper.from}</span>
            <span>
              {formatDate(
                localDateOf(letter.writtenAt, timeZone),
                isLocale(letter.language) ? letter.language : "en",
              )}
            </span>
          </div>
          <h2>{letter.subject}</h2>
          <div className="result-letter-text">{letter.text}</div>
          <p className="result-letter-signature">{letter.paper.signature}</p>
        </article>
        {isOpen && letter.can.acknowledge && (
          <div className="no-print">
            <Section title={i18n.t("Signed on paper")} id="paper">
              <PaperForm
                letter={letter}
                today={localDateOf(new Date().toISOString(), timeZone)}
                onSaved={() => moveFocus("[data-said]")}
              />
            </Section>
          </div>
        )}
      </PageBody>
      <Folio>
        {ruleSet &&
          i18n.t("{title}, rule set version {version}.", {
            title: i18n._(ruleSet.title),
            version: ruleSet.version,
          })}
      </Folio>
    </div>
  );
}
