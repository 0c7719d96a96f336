import { useLingui } from "@lingui/react";
import { useState } from "react";
import type { z } from "zod";
import { type HandOverDraft, HandOverInput } from "../../../shared/schemas/hand-over";
import {
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { ApiError } from "../../lib/api";
import { useGiveHandOver } from "./hand-over-queries";

const Typed = HandOverInput.omit({ fingerprint: true });

/** A free word beside the lists, and to whom it goes. */
export function HandOverForm({ draft }: { draft: HandOverDraft }) {
  const { i18n } = useLingui();
  const [said, setSaid] = useState("");
  const form = useSchemaForm(Typed, { defaultValues: { recipientId: "", note: "" } });
  const give = useGiveHandOver(draft.crew.id);
  const hasChanged = give.error instanceof ApiError && give.error.status === 412;
  return (
    <>
      <Form
        labels="above"
        aria-label={i18n.t("Hand over")}
        onSubmit={form.handleSubmit((typed: z.output<typeof Typed>) => {
          setSaid("");
          give.start(
            { ...typed, fingerprint: draft.fingerprint },
            {
              onSuccess: ({ toName }) => {
                form.reset();
                setSaid(i18n.t("Handed over to {name}.", { name: toName }));
              },
              onError: showIssuesOn(form, i18n),
            },
          );
        })}
      >
        <TextAreaField
          form={form}
          name="note"
          rows={4}
          isOptional
          label={i18n.t("What the next in charge should know")}
        />
        <SelectField
          form={form}
          name="recipientId"
          label={i18n.t("To whom")}
          emptyLabel={i18n.t("Choose")}
          choices={draft.recipients.map(({ id, name }) => ({ value: id, label: name }))}
        />
        {hasChanged ? (
          <p className="field-error" role="alert">
            {i18n.t(
              "The sheet has changed meanwhile; the lists above are new. Look at them and hand over again.",
            )}
          </p>
        ) : (
          <FormProblem error={give.error} />
        )}
        <FormActions>
          <SubmitButton size="supervisor" isBusy={give.isPending}>
            {i18n.t("Hand over")}
          </SubmitButton>
        </FormActions>
      </Form>
      <p className="status" role="status">
        {said}
      </p>
    </>
  );
}
