import { useLingui } from "@lingui/react";
import { queryOptions, useQuery, useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import { z } from "zod";
import { isolate } from "../../../shared/i18n/isolate";
import { type DigestInput, DigestView } from "../../../shared/schemas/digest";
import { Failed } from "../../components/failed";
import {
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { api } from "../../lib/api";
import { useRevisedSave } from "../../lib/revised-save";

const digestQuery = queryOptions({
  queryKey: ["digest"],
  queryFn: ({ signal }) => api.get("/me/digest", { schema: DigestView, signal }),
});

const hourText = (hour: number) => `${String(hour).padStart(2, "0")}:00`;

/** As it is chosen in the list: an hour's number, or nothing. */
const Typed = z.object({
  hour: z
    .string()
    .nullable()
    .transform((text) => (text === null || text === "" ? null : Number(text))),
});

/** At which hour the day's sheets come by mail, if at all. */
export function DigestForm() {
  const { i18n } = useLingui();
  const { data, error, refetch } = useQuery(digestQuery);
  const [said, setSaid] = useState("");
  if (error) return <Failed error={error} onRetry={() => void refetch()} />;
  if (!data) return <span className="loading-line" />;
  if (data.email === null)
    return <p>{i18n.t("You have no mail address here. An administrator can enter one.")}</p>;
  return (
    <>
      {data.bounced !== null && (
        <p className="field-error">
          {i18n.t(
            "The latest one to {email} came back undeliverable ({reason}). Whoever administers can put the address right.",
            { email: isolate(data.email), reason: data.bounced },
          )}
        </p>
      )}
      <ChooseHour key={data.revision} digest={data} onSaid={setSaid} />
      <p className="status" role="status">
        {said}
      </p>
    </>
  );
}

function ChooseHour({ digest, onSaid }: { digest: DigestView; onSaid: (words: string) => void }) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const form = useSchemaForm(Typed, {
    defaultValues: { hour: digest.hour === null ? "" : String(digest.hour) },
    keepAs: "digest",
  });
  const save = useRevisedSave<DigestInput, DigestView>({
    path: () => "/me/digest",
    schema: DigestView,
    toBody: ({ hour }) => ({ hour }),
    onSaved: ({ hour, ...view }) => {
      client.setQueryData(digestQuery.queryKey, { hour, ...view });
      onSaid(
        hour === null
          ? i18n.t("No mail comes.")
          : i18n.t("The mail comes at {time}.", { time: hourText(hour) }),
      );
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Form
      labels="above"
      aria-label={i18n.t("Daily mail")}
      onSubmit={form.handleSubmit((body) =>
        save.save(body, save.conflict?.saved.revision ?? digest.revision),
      )}
    >
      <SelectField
        form={form}
        name="hour"
        label={i18n.t("Comes at")}
        emptyLabel={i18n.t("not at all")}
        choices={Array.from({ length: 24 }, (_, hour) => ({
          value: String(hour),
          label: hourText(hour),
        }))}
        note={i18n.t("By the clock of the site, to {email}.", { email: digest.email ?? "" })}
      />
      <FormProblem error={save.error} />
      {save.conflict && (
        <p className="field-error" role="alert">
          {i18n.t("It was changed in another window meanwhile. Choose again and save.")}
        </p>
      )}
      <FormActions>
        <SubmitButton isBusy={save.isSaving}>{i18n.t("Save")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
