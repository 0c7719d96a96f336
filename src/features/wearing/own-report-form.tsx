import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import {
  Form,
  RadioGroup,
  SubmitButton,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { ProblemIssues } from "../../components/problem-issues";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { ANSWERS, type Answer, OwnReportFields, ownReport } from "./own-report";
import { useSendRound } from "./queries";

function answerWord(i18n: I18n, answer: Answer): string {
  switch (answer) {
    case "always":
      return i18n.t("All the time");
    case "mostly":
      return i18n.t("Most of the time");
    case "half":
      return i18n.t("About half of the time");
    case "seldom":
      return i18n.t("Now and then");
    case "never":
      return i18n.t("Not at all");
  }
}

/** A worker says, task by task, for how long the protector was worn that day. */
export function OwnReportForm({
  workerId,
  siteId,
  date,
  tasks,
  onSent,
}: {
  workerId: string;
  siteId: string;
  date: string;
  tasks: readonly { readonly id: string; readonly name: string }[];
  onSent: () => void;
}) {
  const { i18n } = useLingui();
  const send = useSendRound();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(OwnReportFields, {
    mode: "onSubmit",
    defaultValues: { answers: Object.fromEntries(tasks.map(({ id }) => [id, null])), note: "" },
  });
  const { errors } = form.formState;
  return (
    <Form
      labels="above"
      className="sample-form"
      aria-label={i18n.t("How long did you wear it?")}
      onSubmit={form.handleSubmit((filled) => {
        if (!begin()) return;
        const body = ownReport(filled, { workerId, siteId, date });
        send.mutate(
          { body, key: changeKey.keyFor(body), tapCount: 0 },
          { onSuccess: onSent, onSettled: end },
        );
      })}
    >
      {tasks.map(({ id, name }) => (
        <RadioGroup
          key={id}
          form={form}
          name={`answers.${id}`}
          label={name}
          choices={ANSWERS.map((answer) => ({ value: answer, label: answerWord(i18n, answer) }))}
        />
      ))}
      {errors.answers && (
        <p className="field-error" role="alert">
          {i18n.t("Choose an answer for one task at least.")}
        </p>
      )}
      <TextAreaField form={form} name="note" label={i18n.t("Note")} rows={3} isOptional />
      <ProblemIssues error={send.error} />
      <SubmitButton size="worker" isBusy={send.isPending}>
        {i18n.t("Send")}
      </SubmitButton>
    </Form>
  );
}
