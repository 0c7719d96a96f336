import { useLingui } from "@lingui/react";
import { type FormEvent, useId, useState } from "react";
import { Button } from "../../components/button";
import { FormProblem } from "../../components/form-problem";
import { useChangeKey } from "../../lib/change-key";
import { useTypedText } from "../../lib/keep-typed";
import { useMoveFocus } from "../../lib/move-focus";
import { tooManyText } from "../../lib/too-many";
import { useReportProblem } from "./queries";

/** The server wants as much, and takes no more. */
const SHORTEST = 3;
const LONGEST = 2000;

/** A word to the safety officer; what is written stays until it has arrived. */
export function ReportProblem({ workerId }: { workerId: string }) {
  const { i18n } = useLingui();
  const id = useId();
  const report = useReportProblem(workerId);
  const { keyFor, forget } = useChangeKey();
  const [text, setText] = useTypedText(`problem ${workerId}`);
  const [isOpen, setIsOpen] = useState(text !== "");
  const [isTooShort, setIsTooShort] = useState(false);
  const [isSent, setIsSent] = useState(false);
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();

  function submit(event: FormEvent) {
    event.preventDefault();
    const said = text.trim();
    setIsTooShort(said.length < SHORTEST);
    if (said.length < SHORTEST || said.length > LONGEST) {
      document.getElementById(id)?.focus();
      return;
    }
    report.mutate(
      { text: said, idempotencyKey: keyFor(said) },
      {
        onSuccess: () => {
          forget();
          setText("");
          setIsOpen(false);
          setIsSent(true);
          moveFocus("button");
        },
      },
    );
  }

  const fault = isTooShort ? i18n.t("Write it in a few words.") : tooManyText(i18n, text, LONGEST);
  return (
    <div ref={place} className="contents">
      {isOpen ? (
        <form className="me-form" onSubmit={submit} noValidate>
          <label htmlFor={id}>{i18n.t("What is the problem?")}</label>
          <textarea
            id={id}
            className="input"
            rows={5}
            aria-required="true"
            aria-invalid={fault ? true : undefined}
            aria-describedby={fault && `${id}-error`}
            value={text}
            onChange={(event) => {
              setText(event.target.value);
              setIsTooShort(false);
            }}
          />
          {fault && (
            <p className="field-error" id={`${id}-error`}>
              {fault}
            </p>
          )}
          <FormProblem error={report.error} />
          <Button type="submit" kind="primary" size="worker" isBusy={report.isPending}>
            {i18n.t("Send to the safety officer")}
          </Button>
          <Button
            size="worker"
            onClick={() => {
              setIsOpen(false);
              setIsTooShort(false);
              moveFocus("button");
            }}
          >
            {i18n.t("Cancel")}
          </Button>
        </form>
      ) : (
        <Button
          kind="big"
          size="worker"
          onClick={() => {
            setIsOpen(true);
            setIsSent(false);
            moveFocus("textarea");
          }}
        >
          {i18n.t("Report a problem")}
        </Button>
      )}
      <p className="me-note" role="status">
        {isSent && i18n.t("Thank you. Your safety officer has it.")}
      </p>
    </div>
  );
}
