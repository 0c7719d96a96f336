import { useLingui } from "@lingui/react";
import { TrainingStrike, type TrainingView } from "../../../shared/schemas/training";
import { Button } from "../../components/button";
import {
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { useStrikeTraining } from "./queries";

/** A training entered by mistake is struck out, with the reason. */
export function StrikeTraining({
  training,
  onDone,
}: {
  training: TrainingView;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const strike = useStrikeTraining();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(TrainingStrike, {
    defaultValues: { reason: "" },
    keepAs: `strike ${training.id}`,
  });
  return (
    <Form
      aria-label={i18n.t("Strike out: {what}", { what: training.title })}
      onSubmit={form.handleSubmit(({ reason }) => {
        if (!begin()) return;
        strike.mutate(
          { training, reason, key: changeKey.keyFor({ id: training.id, reason }) },
          {
            onSuccess: () => {
              changeKey.forget();
              onDone();
            },
            onError: showIssuesOn(form, i18n),
            onSettled: end,
          },
        );
      })}
    >
      <TextAreaField
        form={form}
        name="reason"
        rows={2}
        label={i18n.t("Why it is struck out")}
        note={i18n.t("It stays to be read, crossed out, with the reason.")}
      />
      <FormProblem error={strike.error} />
      <FormActions>
        <SubmitButton isBusy={strike.isPending}>{i18n.t("Strike out")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
