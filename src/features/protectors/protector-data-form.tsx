import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import { formatDate } from "../../../shared/format/date";
import {
  NewProtectorInput,
  ProtectorDetail,
  type ProtectorRevisionInput,
} from "../../../shared/schemas/protector";
import { Form, showIssuesOn, useSchemaForm } from "../../components/form";
import { LookActions, ReviewedChange, useReviewedChange } from "../../components/reviewed-change";
import { ApiError } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { focusFirstFault, ProtectorDataFields } from "./data-fields";
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
  const change = useReviewedChange<ProtectorRevisionInput, Detail>({
    path: `/protectors/${protector.id}/revisions`,
    schema: ProtectorDetail,
    onError: (error) => show(underData(error)),
    onSaved: (view) => {
      client.setQueryData(protectorQueries.one(view.id).queryKey, view);
      void client.invalidateQueries({ queryKey: protectorQueries.all });
      onSaved();
    },
  });
  const look = form.handleSubmit(
    ({ data: body }) => {
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
      change.look(body);
    },
    () => focusFirstFault(i18n.t("New data")),
  );
  return (
    <ReviewedChange
      change={change}
      what={({ effectiveFrom }) =>
        i18n.t("New data of {name} from {date} on.", {
          name: protector.name,
          date: formatDate(effectiveFrom, locale),
        })
      }
    >
      <Form aria-label={i18n.t("New data")} onSubmit={look}>
        <ProtectorDataFields form={form} needsReason />
        <LookActions preview={change.preview} onLeave={onDone} />
      </Form>
    </ReviewedChange>
  );
}
