import { useLingui } from "@lingui/react";
import type { OwnReports } from "../../../shared/schemas/wearing";
import { Button } from "../../components/button";
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
import { ANSWERS, answerOf, answerWord } from "../../lib/wearing-answers";
import { OwnReportFields, ownReport } from "./own-report";
import { useSendRound } from "./queries";

/** A worker says, task by task, for how long the protector was worn that day; filled in with what was said before. */
export function OwnReportForm({
  workerId,
  siteId,
  date,
  tasks,
  said,
  onSent,
  onLeave,
}: {
  workerId: string;
  siteId: string;
  date: string;
  tasks: readonly { readonly id: string; readonly name: string }[];
  said: OwnReports["rows"];
  onSent: () => void;
  onLeave: (() => void) | undefined;
}) {
  const { i18n } = useLingui();
  const send = useSendRound();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const saidOf = (taskId: string) => said.find((one) => one.taskId === taskId);
  const form = useSchemaForm(OwnReportFields, {
    mode: "onSubmit",
    defaultValues: {
      answers: Object.fromEntries(
        tasks.map(({ id }) => {
          const before = saidOf(id);
          return [id, before ? answerOf(before) : null];
        }),
      ),
      note: said[0]?.note ?? "",
    },
  });
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
      <TextAreaField form={form} name="note" label={i18n.t("Note")} rows={3} isOptional />
      <ProblemIssues error={send.error} />
      <SubmitButton size="worker" isBusy={send.isPending}>
        {i18n.t("Send")}
      </SubmitButton>
      {onLeave && (
        <Button size="worker" onClick={onLeave}>
          {i18n.t("Leave it")}
        </Button>
      )}
    </Form>
  );
}
