import { useLingui } from "@lingui/react";
import { useMutation, useQueryClient } from "@tanstack/react-query";
import { LOCALE_NAMES, LOCALES, localeOf } from "../../../shared/i18n/index";
import { EmployerShareInput, EmployerShareView } from "../../../shared/schemas/employer-share";
import {
  DateField,
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { api } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { shareQueries } from "./queries";

const languages = LOCALES.map((value) => ({ value, label: LOCALE_NAMES[value] }));

/** Lets somebody of an employer read its people's results at a site until a day that is named. */
export function ShareForm({
  site,
  employers,
  onShared,
}: {
  site: { id: string; timeZone: string };
  employers: readonly { kind: "agency" | "contractor"; name: string }[];
  onShared: (share: EmployerShareView) => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const kinds = { agency: i18n.t("agency"), contractor: i18n.t("contractor") };
  const [first] = employers;
  const form = useSchemaForm(EmployerShareInput, {
    defaultValues: {
      employer: first ? `${first.kind}:${first.name}` : "",
      name: "",
      email: "",
      lastDay: "",
      language: localeOf(i18n),
    },
    keepAs: `/employer-shares ${site.id}`,
  });
  const share = useMutation({
    mutationFn: (body: EmployerShareInput) =>
      api.post(`/sites/${site.id}/employer-shares`, {
        body,
        schema: EmployerShareView,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: (shared) => {
      changeKey.forget();
      form.reset();
      void client.invalidateQueries({ queryKey: shareQueries.all });
      onShared(shared);
    },
    onError: showIssuesOn(form, i18n),
    onSettled: end,
  });
  return (
    <Form
      aria-label={i18n.t("Let somebody of an employer in")}
      onSubmit={form.handleSubmit((body) => {
        if (begin()) share.mutate(body);
      })}
    >
      <SelectField
        form={form}
        name="employer"
        label={i18n.t("Employer")}
        note={i18n.t("Results of its people at this site, of days on which they worked for it.")}
        choices={employers.map(({ kind, name }) => ({
          value: `${kind}:${name}`,
          label: i18n.t("{name}, {kind}", { name, kind: kinds[kind] }),
        }))}
      />
      <TextField
        form={form}
        name="name"
        label={i18n.t("Name")}
        inputProps={{ autoComplete: "off" }}
      />
      <TextField
        form={form}
        name="email"
        inputProps={{ type: "email", autoComplete: "off" }}
        label={i18n.t("E-mail")}
        note={i18n.t("As the sign-in service knows it, and calls it verified.")}
      />
      <DateField
        form={form}
        name="lastDay"
        label={i18n.t("Last day")}
        note={i18n.t("A year from today at the latest. Access ends at midnight in {zone}.", {
          zone: site.timeZone,
        })}
      />
      <SelectField form={form} name="language" label={i18n.t("Language")} choices={languages} />
      <FormProblem error={share.error} />
      <FormActions>
        <SubmitButton isBusy={share.isPending}>{i18n.t("Let in")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
