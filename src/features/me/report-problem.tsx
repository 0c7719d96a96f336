import { useLingui } from "@lingui/react";
import { type FormEvent, useId, useState } from "react";
import { Button } from "../../components/button";
import { useChangeKey } from "../../lib/change-key";
import { useMoveFocus } from "../../lib/move-focus";
import { problemText } from "../../lib/problem-text";
import { useReportProblem } from "./queries";

/** The server wants as much. */
const SHORTEST = 3;

/** A word to the safety officer; what is written stays until it has arrived. */
export function ReportProblem({ workerId }: { workerId: string }) {
  const { i18n } = useLingui();
  const id = useId();
  const report = useReportProblem(workerId);
  const { keyFor, forget } = useChangeKey();
  const [isOpen, setIsOpen] = useState(false);
  const [text, setText] = useState("");
  const [isTooShort, setIsTooShort] = useState(false);
  const [isSent, setIsSent] = useState(false);
  const [place, moveFocus] = useMoveFocus<HTMLDivElement>();

  function submit(event: FormEvent) {
    event.preventDefault();
    const said = text.trim();
    setIsTooShort(said.length < SHORTEST);
    if (said.length < SHORTEST) {
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

  return (
    <div ref={place} className="contents">
      {isOpen ? (
        <form className="me-form" onSubmit={submit} noValidate>
          <label htmlFor={id}>{i18n.t("What is the problem?")}</label>
          <textarea
            id={id}
            className="input"
            rows={5}
            maxLength={2000}
            // biome-ignore lint/a11y/noAutofocus: it was just asked for
            autoFocus
            aria-required="true"
            aria-invalid={isTooShort || undefined}
            aria-describedby={isTooShort ? `${id}-error` : undefined}
            value={text}
            onChange={(event) => {
              setText(event.target.value);
              setIsTooShort(false);
            }}
          />
          {isTooShort && (
            <p className="field-error" id={`${id}-error`}>
              {i18n.t("Write it in a few words.")}
            </p>
          )}
          {report.isError && (
            <p className="field-error" role="alert">
              {problemText(i18n, report.error)}
            </p>
          )}
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
