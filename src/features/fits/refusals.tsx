import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { formatShortDate } from "../../../shared/format/date";
import { RefusalInput } from "../../../shared/schemas/fit";
import { Button } from "../../components/button";
import { Failed } from "../../components/failed";
import {
  DateField,
  Form,
  FormActions,
  RadioGroup,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { references } from "../../lib/references";
import { refusalWord } from "./fit-words";
import { fitQueries, useRecordRefusal } from "./queries";

/** What a worker would not or cannot wear, with reasons that only officers read. */
export function Refusals({ workerId, today }: { workerId: string; today: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [isOpen, setIsOpen] = useState(false);
  const { data, error, refetch } = useQuery(fitQueries.refusals(workerId));
  return (
    <>
      {error && <Failed error={error} onRetry={() => void refetch()} />}
      {data?.length === 0 && <p>{i18n.t("None on record.")}</p>}
      {data && data.length > 0 && (
        <ul className="refusals">
          {data.map(({ id, kind, modelName, happenedOn, reason, authorName }) => (
            <li key={id}>
              <b>{refusalWord(i18n, kind)}</b>
              {modelName ? `: ${modelName}` : ""}
              <span className="block">{reason}</span>
              <span className="beneath block">
                {[formatShortDate(happenedOn, locale), authorName].filter(Boolean).join(", ")}
              </span>
            </li>
          ))}
        </ul>
      )}
      {isOpen ? (
        <RefusalForm workerId={workerId} today={today} onDone={() => setIsOpen(false)} />
      ) : (
        <p className="after-table">
          <Button onClick={() => setIsOpen(true)}>{i18n.t("Enter a refusal or non-wear")}</Button>
        </p>
      )}
    </>
  );
}

function RefusalForm({
  workerId,
  today,
  onDone,
}: {
  workerId: string;
  today: string;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const record = useRecordRefusal(workerId);
  const changeKey = useChangeKey();
  const protectors = useQuery(references.protectors());
  const form = useSchemaForm(RefusalInput, {
    defaultValues: { kind: "refused", modelId: null, happenedOn: today, reason: "" },
  });
  return (
    <Form
      className="inset-form"
      aria-label={i18n.t("Refusal or non-wear")}
      onSubmit={form.handleSubmit((body) =>
        record.mutate(
          { body, key: changeKey.keyFor(body) },
          { onSuccess: onDone, onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <RadioGroup
        form={form}
        name="kind"
        label={i18n.t("What happened")}
        choices={(["refused", "not-worn", "cannot-wear"] as const).map((kind) => ({
          value: kind,
          label: refusalWord(i18n, kind),
        }))}
      />
      <SelectField
        form={form}
        name="modelId"
        label={i18n.t("Protector")}
        emptyLabel={i18n.t("any")}
        choices={(protectors.data?.rows ?? []).map(({ id, name }) => ({ value: id, label: name }))}
        isOptional
      />
      <DateField form={form} name="happenedOn" label={i18n.t("Date")} />
      <TextAreaField
        form={form}
        name="reason"
        label={i18n.t("Reason")}
        rows={3}
        note={i18n.t("Only officers read it.")}
      />
      <FormProblem error={record.error} />
      <FormActions>
        <SubmitButton isBusy={record.isPending}>{i18n.t("Save")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
