import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useQuery, useQueryClient } from "@tanstack/react-query";
import { useState } from "react";
import { z } from "zod";
import {
  type MailChoiceInput,
  MailChoiceView,
  type MailKind,
} from "../../../shared/schemas/mail-choice";
import { Failed } from "../../components/failed";
import {
  CheckField,
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useRevisedSave } from "../../lib/revised-save";
import { mailQueries } from "./queries";

function mailWord(i18n: I18n, kind: MailKind): string {
  switch (kind) {
    case "own-results":
      return i18n.t("Letters with what was measured on you");
    case "own-limit":
      return i18n.t("That a limit was passed on one of your days");
    case "crew-limit":
      return i18n.t("That a limit was passed by somebody in your charge");
    case "overdue":
      return i18n.t("What is overdue at a site that names you");
  }
}

type Row = MailChoiceView["rows"][number];

/** Why a mail always comes. */
function whyAlways(i18n: I18n, { kind, citation }: Row): string {
  if (kind === "overdue") return i18n.t("Always comes. An officer can name another person.");
  return citation === null
    ? i18n.t("Always comes: somebody has to be told.")
    : i18n.t("Always comes: {citation} (from memory).", { citation });
}

/** As it is ticked: what can be done without, there is one so far. */
const Typed = z.object({ ownLimit: z.boolean() });

/** Which mails come, and why some of them can't be switched off. */
export function MailChoices() {
  const { i18n } = useLingui();
  const { data, error, refetch } = useQuery(mailQueries.choices);
  const [said, setSaid] = useState("");
  if (error) return <Failed error={error} onRetry={() => void refetch()} />;
  if (!data) return <span className="loading-line" />;
  const optional = data.rows.filter(({ isOptional }) => isOptional);
  return (
    <>
      {data.email === null && (
        <p className="account-note">
          {i18n.t("You have no mail address here: letters reach you on paper.")}
        </p>
      )}
      <dl className="mail-kinds">
        {data.rows
          .filter(({ isOptional }) => !isOptional)
          .map((one) => (
            <div key={one.kind}>
              <dt>{mailWord(i18n, one.kind)}</dt>
              <dd>{whyAlways(i18n, one)}</dd>
            </div>
          ))}
      </dl>
      {optional.length > 0 && data.email !== null && (
        <ChooseMails key={data.revision} view={data} onSaid={setSaid} />
      )}
      <p className="status" role="status">
        {said}
      </p>
    </>
  );
}

function ChooseMails({ view, onSaid }: { view: MailChoiceView; onSaid: (words: string) => void }) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const isOn = ({ rows }: MailChoiceView) =>
    rows.some((row) => row.kind === "own-limit" && row.isOn);
  const form = useSchemaForm(Typed, { defaultValues: { ownLimit: isOn(view) }, keepAs: "mails" });
  const save = useRevisedSave<MailChoiceInput, MailChoiceView>({
    path: () => "/me/mails",
    schema: MailChoiceView,
    toBody: (saved) => ({ off: isOn(saved) ? [] : ["own-limit"] }),
    onSaved: (saved) => {
      client.setQueryData(mailQueries.choices.queryKey, saved);
      onSaid(
        isOn(saved)
          ? i18n.t("The mail comes from now on.")
          : i18n.t("The mail does not come any more. It stands on your page."),
      );
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Form
      labels="above"
      aria-label={i18n.t("Mails that come to me")}
      onSubmit={form.handleSubmit(({ ownLimit }) =>
        save.save(
          { off: ownLimit ? [] : ["own-limit"] },
          save.conflict?.saved.revision ?? view.revision,
        ),
      )}
    >
      <CheckField
        form={form}
        name="ownLimit"
        label={i18n.t("If you want it as well")}
        text={mailWord(i18n, "own-limit")}
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
