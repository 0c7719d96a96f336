import { useLingui } from "@lingui/react";
import { type FormEvent, useId, useState } from "react";
import { Button } from "../../components/button";
import { FormProblem } from "../../components/form-problem";
import { useChangeKey } from "../../lib/change-key";
import { tooManyText } from "../../lib/too-many";
import { useReportProblem } from "./changes";

/** The server wants as much, and takes no more. */
const SHORTEST = 3;
const LONGEST = 2000;

/** A word to the safety officer; what is written stays until it has arrived. */
export function ReportForm({
  workerId,
  text,
  isAsked,
  onText,
  onSent,
  onCancel,
}: {
  workerId: string;
  text: string;
  /** Somebody has just asked for it, and the keyboard goes on in it. */
  isAsked: boolean;
  onText: (text: string) => void;
  onSent: () => void;
  onCancel: () => void;
}) {
  const { i18n } = useLingui();
  const id = useId();
  const report = useReportProblem(workerId);
  const { keyFor, forget } = useChangeKey();
  const [isTooShort, setIsTooShort] = useState(false);

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
          onSent();
        },
      },
    );
  }

  const fault = isTooShort ? i18n.t("Write it in a few words.") : tooManyText(i18n, text, LONGEST);
  return (
    <form className="me-form" onSubmit={submit} noValidate>
      <label htmlFor={id}>{i18n.t("What is the problem?")}</label>
      <textarea
        id={id}
        className="input"
        rows={5}
        // biome-ignore lint/a11y/noAutofocus: it was just asked for
        autoFocus={isAsked}
        aria-required="true"
        aria-invalid={fault ? true : undefined}
        aria-describedby={fault && `${id}-error`}
        value={text}
        onChange={(event) => {
          onText(event.target.value);
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
      <Button size="worker" onClick={onCancel}>
        {i18n.t("Cancel")}
      </Button>
    </form>
  );
}
