import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { type FormEvent, useId, useState } from "react";
import { orderSentence } from "../../../shared/findings/sentences";
import { formatInstant } from "../../../shared/format/date";
import type { CrewSheetRow } from "../../../shared/schemas/crew";
import { Button } from "../../components/button";
import { Empty } from "../../components/empty";
import { Failed } from "../../components/failed";
import { FormProblem } from "../../components/form-problem";
import { useLocale } from "../../lib/i18n";
import { useTypedText } from "../../lib/keep-typed";
import { tooManyText } from "../../lib/too-many";
import { keptWords, useSendStep } from "./order-actions";
import { crewSheetQueries, type SheetOrder } from "./queries";
import { StaleOrder } from "./stale-order";

/** The server takes no more. */
const LONGEST_QUESTION = 10_000;

type AskedRow = CrewSheetRow & { order: SheetOrder };

const hasOrder = (row: CrewSheetRow): row is AskedRow => row.order !== null;

/** A question to the safety officer about one of the crew; what was said before stands above it. */
export function AskOfficer({
  crewId,
  timeZone,
  rows,
  onStale,
}: {
  crewId: string;
  timeZone: string;
  rows: readonly CrewSheetRow[];
  onStale: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const titleId = useId();
  const known = new Map(rows.filter(hasOrder).map((row) => [row.worker.id, row]));
  const choices = [...known.values()];
  const [chosenId, setChosenId] = useTypedText(`about ${crewId}`);
  const chosen = choices.find(({ worker }) => worker.id === chosenId) ?? choices[0] ?? null;
  return (
    <section className="sheet-part" data-part="ask" aria-labelledby={titleId}>
      <h2 className="sheet-title" id={titleId}>
        {i18n.t("Ask the officer")}
      </h2>
      {chosen ? (
        <>
          <p className="sheet-lead">
            {i18n.t(
              "Your question goes to the safety officer with the order; the answer stands here.",
            )}
          </p>
          <fieldset className="sheet-ask-about">
            <legend>{i18n.t("About")}</legend>
            {choices.map(({ worker, order }) => (
              <label key={worker.id} className="choice">
                <input
                  type="radio"
                  name={titleId}
                  checked={worker.id === chosen.worker.id}
                  onChange={() => setChosenId(worker.id)}
                />
                <span>
                  {worker.name}
                  <span className="beneath block">
                    {orderSentence(i18n, locale, order.kind, order.facts)}
                  </span>
                </span>
              </label>
            ))}
          </fieldset>
          <Question
            key={chosen.worker.id}
            crewId={crewId}
            timeZone={timeZone}
            row={chosen}
            onStale={onStale}
          />
        </>
      ) : (
        <Empty
          title={i18n.t("No order is open for this crew, so there is nothing to ask about here.")}
        >
          {i18n.t("For anything else, talk to your safety officer.")}
        </Empty>
      )}
    </section>
  );
}

function Question({
  crewId,
  timeZone,
  row: { worker, order },
  onStale,
}: {
  crewId: string;
  timeZone: string;
  row: AskedRow;
  onStale: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const id = useId();
  const finding = useQuery(crewSheetQueries.order(order.findingId));
  // Whoever reads the thread has seen its revision; the sheet may be older.
  const seen = { ...order, revision: finding.data?.revision ?? order.revision };
  const { send, forget, asked, current, isBusy, error } = useSendStep(crewId, seen, worker.name);
  const [text, setText] = useTypedText(`question ${order.findingId}`);
  const [isEmpty, setIsEmpty] = useState(false);
  const [said, setSaid] = useState("");
  const sent = (isKept: boolean) => {
    setText("");
    setSaid(isKept ? keptWords(i18n) : i18n.t("Your question is with the officer."));
  };

  function submit(event: FormEvent) {
    event.preventDefault();
    const question = text.trim();
    setIsEmpty(question === "");
    if (question === "" || question.length > LONGEST_QUESTION) {
      document.getElementById(id)?.focus();
      return;
    }
    send({ kind: "comment", text: question }, sent);
  }

  const fault = isEmpty
    ? i18n.t("Write what you want to know.")
    : tooManyText(i18n, text, LONGEST_QUESTION);
  return (
    <>
      {finding.isError && <Failed error={finding.error} onRetry={() => void finding.refetch()} />}
      {finding.data && (
        <ol className="sheet-thread" aria-label={i18n.t("Said so far")}>
          {finding.data.steps
            .filter(({ text: said_ }) => said_ !== null)
            .map((step) => (
              <li key={step.id}>
                <p>{step.text}</p>
                <p className="sheet-noticed">
                  {i18n.t("{name}, {time}", {
                    name: step.authorName ?? i18n.t("Dinward"),
                    time: formatInstant(step.at, timeZone, locale),
                  })}
                </p>
              </li>
            ))}
        </ol>
      )}
      <form className="sheet-form" onSubmit={submit} noValidate>
        <label htmlFor={id}>{i18n.t("Your question")}</label>
        <textarea
          id={id}
          className="input"
          rows={4}
          aria-required="true"
          aria-invalid={fault ? true : undefined}
          aria-describedby={fault && `${id}-error`}
          value={text}
          onChange={(event) => {
            setText(event.target.value);
            setIsEmpty(false);
          }}
        />
        {fault && (
          <p className="field-error" id={`${id}-error`}>
            {fault}
          </p>
        )}
        <FormProblem error={error} />
        <div className="sheet-form-actions">
          <Button type="submit" kind="big" size="supervisor" isBusy={isBusy}>
            {i18n.t("Send to the officer")}
          </Button>
        </div>
        <p className="status sheet-said" role="status">
          {said}
        </p>
      </form>
      {current && asked && (
        <StaleOrder
          current={current}
          step={asked}
          workerName={worker.name}
          isBusy={isBusy}
          onKeep={() => {
            forget();
            onStale();
            void finding.refetch();
          }}
          onSend={() => send(asked, sent, current.revision)}
        />
      )}
    </>
  );
}
