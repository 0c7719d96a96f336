import { useLingui } from "@lingui/react";
import { useMutation } from "@tanstack/react-query";
import type { ReactNode } from "react";
import type { DefaultValues, FieldValues, UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import { api, type ReplySchema } from "../lib/api";
import { useChangeKey } from "../lib/change-key";
import { useOneAtATime } from "../lib/one-at-a-time";
import { useRevisedSave } from "../lib/revised-save";
import { Button } from "./button";
import { ConflictDialog, type ConflictField } from "./conflict-dialog";
import { Form, FormActions, SubmitButton, showIssuesOn, useSchemaForm } from "./form";
import { FormProblem } from "./form-problem";

/**
 * The form of one row of a register, new or seen before: saved as a change of the revision that was seen, and settled
 * in a dialog where somebody else saved in between.
 */
export function RecordForm<
  Schema extends z.ZodType<FieldValues, FieldValues>,
  View extends { id: string; revision: number },
>({
  name,
  schema,
  viewSchema,
  path,
  defaultValues,
  record,
  toBody,
  fields,
  conflictTitle,
  keepAs = "",
  onSaved,
  onLeave,
  children,
}: {
  /** Read out as the form's name. */
  name: string;
  schema: Schema;
  viewSchema: ReplySchema<View>;
  /** Of the collection: "/areas". */
  path: string;
  defaultValues: DefaultValues<z.input<Schema>>;
  /** Without: a new one. */
  record: View | null;
  toBody: (view: View) => z.output<Schema>;
  fields: readonly ConflictField<z.output<Schema>>[];
  conflictTitle: string;
  /** Which of several new ones at one address. */
  keepAs?: string;
  onSaved: (view: View) => void;
  onLeave: () => void;
  children: (form: UseFormReturn<z.input<Schema>, unknown, z.output<Schema>>) => ReactNode;
}) {
  const { i18n } = useLingui();
  const changeKey = useChangeKey();
  const form = useSchemaForm(schema, {
    defaultValues,
    keepAs: `${path} ${record?.id ?? `new ${keepAs}`}`,
  });
  const showIssues = showIssuesOn(form, i18n);
  const { begin, end } = useOneAtATime();
  const create = useMutation({
    mutationFn: (body: z.output<Schema>) =>
      api.post(path, { body, schema: viewSchema, idempotencyKey: changeKey.keyFor(body) }),
    onSuccess: (view) => {
      changeKey.forget();
      onSaved(view);
    },
    onError: showIssues,
    onSettled: end,
  });
  const change = useRevisedSave<z.output<Schema>, View>({
    path: () => `${path}/${record?.id}`,
    schema: viewSchema,
    toBody,
    onSaved,
    onError: showIssues,
  });
  return (
    <>
      <Form
        aria-label={name}
        onSubmit={form.handleSubmit((body) => {
          if (record) change.save(body, record.revision);
          else if (begin()) create.mutate(body);
        })}
      >
        {children(form)}
        <FormProblem error={record ? change.error : create.error} />
        <FormActions>
          <SubmitButton isBusy={create.isPending || change.isSaving}>{i18n.t("Save")}</SubmitButton>
          <Button onClick={onLeave}>{record ? i18n.t("Leave as it was") : i18n.t("Cancel")}</Button>
        </FormActions>
      </Form>
      {change.conflict && (
        <ConflictDialog
          title={conflictTitle}
          conflict={change.conflict}
          toBody={toBody}
          fields={fields}
          isSaving={change.isSaving}
          onSave={change.save}
          onKeepSaved={onSaved}
          onClose={change.leaveConflict}
        />
      )}
    </>
  );
}
