import { useLingui } from "@lingui/react";
import { useMutation, useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import type { z } from "zod";
import { formatDate } from "../../../shared/format/date";
import {
  NewProtectorInput,
  ProtectorDetail,
  type ProtectorRevisionInput,
} from "../../../shared/schemas/protector";
import type { ChangePreview } from "../../../shared/schemas/site";
import { Button } from "../../components/button";
import { ChangeReview, useChangePreview } from "../../components/change-preview";
import {
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { ApiError, api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { ProtectorDataFields } from "./data-fields";
import { protectorQueries } from "./queries";

type Detail = z.infer<typeof ProtectorDetail>;

/** The server names the fields of a revision; in this form they lie under `data`. */
const underData = (error: unknown): unknown =>
  error instanceof ApiError
    ? new ApiError(
        error.status,
        error.code,
        error.params,
        error.issues.map((issue) => ({ ...issue, path: issue.path ? `data.${issue.path}` : "" })),
        error.body,
        error.message,
      )
    : error;

/** A protector's data from a date on: filled in, looked at with who changes verdict, then saved. */
export function ProtectorDataForm({
  protector,
  today,
  onDone,
  onSaved,
}: {
  protector: Detail;
  today: string;
  onDone: () => void;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const [reviewed, setReviewed] = useState<{
    body: ProtectorRevisionInput;
    preview: z.infer<typeof ChangePreview>;
  } | null>(null);
  const { id: _, number: __, effectiveFrom: ___, ...data } = protector.data;
  const form = useSchemaForm(NewProtectorInput, {
    defaultValues: {
      name: protector.name,
      kind: protector.kind,
      isArchived: protector.isArchived,
      data: { ...data, effectiveFrom: today, reason: null },
    },
  });
  const show = showIssuesOn(form, i18n);
  const preview = useChangePreview(`/protectors/${protector.id}/revisions/preview`, (error) =>
    show(underData(error)),
  );
  const save = useMutation({
    mutationFn: (body: ProtectorRevisionInput) =>
      api.post(`/protectors/${protector.id}/revisions`, {
        body,
        schema: ProtectorDetail,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: (view) => {
      changeKey.forget();
      client.setQueryData(protectorQueries.one(view.id).queryKey, view);
      void client.invalidateQueries({ queryKey: protectorQueries.all });
      void client.invalidateQueries({ queryKey: ["recompute-progress"] });
      onSaved();
    },
    onError: (error) => {
      if (error instanceof ApiError && error.issues.length > 0) setReviewed(null);
      show(underData(error));
    },
  });
  const look = form.handleSubmit(({ data: body }) => {
    if (body.reason === null) {
      form.setError(
        "data.reason",
        {
          type: "reason-needed",
          message: i18n.t("A reason is needed: what is there already changes."),
        },
        { shouldFocus: true },
      );
      return;
    }
    preview.mutate(body, { onSuccess: (found) => setReviewed({ body, preview: found }) });
  });
  return (
    <>
      <div hidden={reviewed !== null}>
        <Form aria-label={i18n.t("New data")} onSubmit={look}>
          <ProtectorDataFields form={form} needsReason />
          <FormProblem error={preview.error} />
          <FormActions>
            <SubmitButton isBusy={preview.isPending}>
              {i18n.t("See who changes verdict")}
            </SubmitButton>
            <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
          </FormActions>
        </Form>
      </div>
      {reviewed && (
        <ChangeReview
          preview={reviewed.preview}
          what={i18n.t("New data of {name} from {date} on.", {
            name: protector.name,
            date: formatDate(reviewed.body.effectiveFrom, locale),
          })}
          workerPath={paths.result}
          isSaving={save.isPending}
          error={save.error}
          onSave={() => save.mutate(reviewed.body)}
          onBack={() => setReviewed(null)}
        />
      )}
    </>
  );
}
