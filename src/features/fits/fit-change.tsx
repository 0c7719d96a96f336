import { useLingui } from "@lingui/react";
import { Reason } from "../../../shared/schemas/common";
import { FIT_METHODS, type FitTestView, FitTestVoid } from "../../../shared/schemas/fit";
import { Button } from "../../components/button";
import {
  Form,
  FormActions,
  NumberField,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useChangeKey } from "../../lib/change-key";
import { FitFields, factsOf, possibleTrials, trialsTyped } from "./fit-fields";
import { showFitIssuesOn } from "./fit-issues";
import { FitRatingLine } from "./fit-rating-line";
import { fitMethodWord } from "./fit-words";
import { useCorrectFitTest, useVoidFitTest } from "./queries";
import { TrialCells } from "./trial-cells";

const CorrectionFields = FitFields.extend({ reason: Reason }).check(possibleTrials);

interface ChangeProps {
  test: FitTestView;
  onSaved: () => void;
  onLeave: () => void;
}

/** What was misread or mistyped. Need and confidence stay those of the day of the test. */
export function CorrectFit({ test, onSaved, onLeave }: ChangeProps) {
  const { i18n } = useLingui();
  const correct = useCorrectFitTest(test);
  const { facts, needDb, confidencePct } = test;
  const form = useSchemaForm(CorrectionFields, {
    keepAs: test.id,
    defaultValues: {
      size: test.size,
      method: test.method,
      methodSdDb: facts.methodSdDb,
      leftDb: facts.leftDb,
      rightDb: facts.rightDb,
      note: test.note,
      reason: "",
    },
  });
  const values = form.watch();
  return (
    <Form
      className="inset-form fit-form"
      aria-label={i18n.t("Correct the fit of {protector}", { protector: test.modelName })}
      onSubmit={form.handleSubmit(({ leftDb, rightDb, methodSdDb, ...changed }) =>
        correct.mutate(
          {
            ...changed,
            needDb,
            confidencePct,
            facts: factsOf({ leftDb, rightDb, methodSdDb }, facts.bands),
          },
          { onSuccess: onSaved, onError: showFitIssuesOn(form, i18n) },
        ),
      )}
    >
      <TextField form={form} name="size" label={i18n.t("Size")} isOptional />
      <SelectField
        form={form}
        name="method"
        label={i18n.t("Tested by")}
        choices={FIT_METHODS.map((method) => ({
          value: method,
          label: fitMethodWord(i18n, method),
        }))}
      />
      <NumberField form={form} name="methodSdDb" label={i18n.t("Its own uncertainty")} unit="dB" />
      <TrialCells
        form={form}
        name="leftDb"
        ear="left"
        label={i18n.t("Left ear")}
        onLeave={() => form.setFocus("rightDb")}
      />
      <TrialCells
        form={form}
        name="rightDb"
        ear="right"
        label={i18n.t("Right ear")}
        onLeave={() => form.setFocus("note")}
      />
      <FitRatingLine
        {...trialsTyped(values.leftDb, values.rightDb)}
        methodSdDb={typeof values.methodSdDb === "number" ? values.methodSdDb : 0}
        confidencePct={confidencePct}
        needDb={needDb}
      />
      <TextAreaField form={form} name="note" label={i18n.t("Note")} rows={2} isOptional />
      <TextAreaField
        form={form}
        name="reason"
        label={i18n.t("Why it is corrected")}
        rows={2}
        note={i18n.t("What was entered stays as the earlier revision.")}
      />
      <FormProblem error={correct.error} />
      <FormActions>
        <SubmitButton isBusy={correct.isPending}>{i18n.t("Save the correction")}</SubmitButton>
        <Button onClick={onLeave}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}

export function StrikeFit({ test, onSaved, onLeave }: ChangeProps) {
  const { i18n } = useLingui();
  const strike = useVoidFitTest(test);
  const changeKey = useChangeKey();
  const form = useSchemaForm(FitTestVoid, { keepAs: test.id, defaultValues: { reason: "" } });
  return (
    <Form
      className="inset-form"
      aria-label={i18n.t("Strike out the fit of {protector}", { protector: test.modelName })}
      onSubmit={form.handleSubmit((body) =>
        strike.mutate(
          { body, key: changeKey.keyFor(body) },
          { onSuccess: onSaved, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <TextAreaField
        form={form}
        name="reason"
        label={i18n.t("Why it is struck")}
        rows={2}
        note={i18n.t(
          "It stays on record and counts for nothing; days that rest on it are judged anew.",
        )}
      />
      <FormProblem error={strike.error} />
      <FormActions>
        <SubmitButton isBusy={strike.isPending}>{i18n.t("Strike it out")}</SubmitButton>
        <Button onClick={onLeave}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}
