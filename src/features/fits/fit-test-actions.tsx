import { useLingui } from "@lingui/react";
import { useState } from "react";
import { z } from "zod";
import { Reason } from "../../../shared/schemas/common";
import { type FitTestView, FitTestVoid } from "../../../shared/schemas/fit";
import { Button } from "../../components/button";
import { Dialog } from "../../components/dialog";
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
import { TextButton } from "../../components/link";
import { useChangeKey } from "../../lib/change-key";
import { FitFields, factsOf, numbersIn } from "./fit-fields";
import { showFitIssuesOn } from "./fit-issues";
import { FitRatingLine } from "./fit-rating-line";
import { fitMethodWord } from "./fit-words";
import { useCorrectFitTest, useVoidFitTest } from "./queries";
import { TrialCells } from "./trial-cells";

/** What can be done with a fit test on record: corrected, or struck out; either with a reason. */
export function FitTestActions({ test }: { test: FitTestView }) {
  const { i18n } = useLingui();
  const [open, setOpen] = useState<"correct" | "void" | null>(null);
  const close = () => setOpen(null);
  return (
    <>
      <TextButton
        aria-label={i18n.t("Correct the fit of {protector}", { protector: test.modelName })}
        onClick={() => setOpen("correct")}
      >
        {i18n.t("Correct")}
      </TextButton>
      <TextButton
        aria-label={i18n.t("Strike out the fit of {protector}", { protector: test.modelName })}
        onClick={() => setOpen("void")}
      >
        {i18n.t("Strike out")}
      </TextButton>
      {open === "correct" && <CorrectDialog test={test} onClose={close} />}
      {open === "void" && <VoidDialog test={test} onClose={close} />}
    </>
  );
}

const CorrectionFields = FitFields.extend({
  needDb: z.number().min(0).max(80).nullable(),
  reason: Reason,
});

function CorrectDialog({ test, onClose }: { test: FitTestView; onClose: () => void }) {
  const { i18n } = useLingui();
  const correct = useCorrectFitTest(test);
  const form = useSchemaForm(CorrectionFields, {
    keepAs: test.id,
    defaultValues: {
      size: test.size,
      method: test.method,
      methodSdDb: test.facts.methodSdDb,
      leftDb: test.facts.leftDb,
      rightDb: test.facts.rightDb,
      needDb: test.needDb,
      note: test.note,
      reason: "",
    },
  });
  const values = form.watch();
  return (
    <Dialog
      isOpen
      onClose={onClose}
      title={i18n.t("Correct this fit")}
      lead={i18n.t("What was entered stays as the earlier revision.")}
      actions={null}
    >
      <Form
        labels="above"
        aria-label={i18n.t("Correct this fit")}
        onSubmit={form.handleSubmit(({ leftDb, rightDb, methodSdDb, ...facts }) =>
          correct.mutate(
            {
              ...facts,
              confidencePct: test.confidencePct,
              facts: factsOf({ leftDb, rightDb, methodSdDb }, test.facts.bands),
            },
            { onSuccess: onClose, onError: showFitIssuesOn(form, i18n) },
          ),
        )}
      >
        <TextField form={form} name="size" label={i18n.t("Size")} isOptional />
        <SelectField
          form={form}
          name="method"
          label={i18n.t("Tested by")}
          choices={(["psychophysical", "real-ear-microphones", "two-microphones"] as const).map(
            (method) => ({ value: method, label: fitMethodWord(i18n, method) }),
          )}
        />
        <NumberField
          form={form}
          name="methodSdDb"
          label={i18n.t("Its own uncertainty")}
          unit="dB"
        />
        <TrialCells
          form={form}
          name="leftDb"
          label={i18n.t("Left ear")}
          onLeave={() => form.setFocus("rightDb")}
        />
        <TrialCells
          form={form}
          name="rightDb"
          label={i18n.t("Right ear")}
          onLeave={() => form.setFocus("needDb")}
        />
        <NumberField form={form} name="needDb" label={i18n.t("Needed")} unit="dB" isOptional />
        <FitRatingLine
          leftDb={numbersIn(values.leftDb)}
          rightDb={numbersIn(values.rightDb)}
          methodSdDb={typeof values.methodSdDb === "number" ? values.methodSdDb : 0}
          confidencePct={test.confidencePct}
          needDb={typeof values.needDb === "number" ? values.needDb : null}
        />
        <TextAreaField form={form} name="note" label={i18n.t("Note")} rows={2} isOptional />
        <TextAreaField form={form} name="reason" label={i18n.t("Why it is corrected")} rows={2} />
        <FormProblem error={correct.error} />
        <FormActions>
          <SubmitButton isBusy={correct.isPending}>{i18n.t("Save the correction")}</SubmitButton>
          <Button onClick={onClose}>{i18n.t("Leave as it was")}</Button>
        </FormActions>
      </Form>
    </Dialog>
  );
}

function VoidDialog({ test, onClose }: { test: FitTestView; onClose: () => void }) {
  const { i18n } = useLingui();
  const strike = useVoidFitTest(test);
  const changeKey = useChangeKey();
  const form = useSchemaForm(FitTestVoid, { keepAs: test.id, defaultValues: { reason: "" } });
  return (
    <Dialog
      isOpen
      onClose={onClose}
      title={i18n.t("Strike this fit out")}
      lead={i18n.t(
        "It stays on record and counts for nothing; days that rest on it are judged anew.",
      )}
      actions={null}
    >
      <Form
        labels="above"
        aria-label={i18n.t("Strike this fit out")}
        onSubmit={form.handleSubmit((body) =>
          strike.mutate(
            { body, key: changeKey.keyFor(body) },
            { onSuccess: onClose, onError: showIssuesOn(form, i18n) },
          ),
        )}
      >
        <TextAreaField form={form} name="reason" label={i18n.t("Why it is struck")} rows={2} />
        <FormProblem error={strike.error} />
        <FormActions>
          <SubmitButton isBusy={strike.isPending}>{i18n.t("Strike it out")}</SubmitButton>
          <Button onClick={onClose}>{i18n.t("Leave as it was")}</Button>
        </FormActions>
      </Form>
    </Dialog>
  );
}
