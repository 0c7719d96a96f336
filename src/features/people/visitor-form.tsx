import { useLingui } from "@lingui/react";
import { useMutation, useQueryClient } from "@tanstack/react-query";
import { useWatch } from "react-hook-form";
import { localDateOf } from "../../../shared/format/date";
import { LOCALE_NAMES, LOCALES, localeOf } from "../../../shared/i18n/index";
import type { SessionUser } from "../../../shared/schemas/session";
import { VisitorInput, VisitorView } from "../../../shared/schemas/visitor";
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
import { peopleQueries } from "./queries";

const languages = LOCALES.map((value) => ({ value, label: LOCALE_NAMES[value] }));
/** Records go back no further than anybody asks to see. */
const YEARS_BACK = 10;

/** One year of one site for somebody from outside, until tonight unless another day is named. */
export function VisitorForm({
  sites,
  onLetIn,
}: {
  sites: SessionUser["sites"];
  onLetIn: (visitor: VisitorView) => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const [first] = sites;
  const thisYear = Number(
    localDateOf(new Date().toISOString(), first?.timeZone ?? "UTC").slice(0, 4),
  );
  const form = useSchemaForm(VisitorInput, {
    defaultValues: {
      name: "",
      email: "",
      siteId: first?.id ?? "",
      year: String(thisYear),
      lastDay: null,
      language: localeOf(i18n),
    },
    keepAs: "/visitors new",
  });
  const siteId = useWatch({ control: form.control, name: "siteId" });
  const site = sites.find(({ id }) => id === siteId) ?? first;
  const letIn = useMutation({
    mutationFn: (body: VisitorInput) =>
      api.post("/visitors", {
        body,
        schema: VisitorView,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: (visitor) => {
      changeKey.forget();
      form.reset();
      void client.invalidateQueries({ queryKey: peopleQueries.all });
      onLetIn(visitor);
    },
    onError: showIssuesOn(form, i18n),
    onSettled: end,
  });
  return (
    <Form
      aria-label={i18n.t("Let a visitor in")}
      onSubmit={form.handleSubmit((body) => {
        if (begin()) letIn.mutate(body);
      })}
    >
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
      <SelectField
        form={form}
        name="siteId"
        label={i18n.t("Site")}
        choices={sites.map(({ id, name }) => ({ value: id, label: name }))}
      />
      <SelectField
        form={form}
        name="year"
        label={i18n.t("Year")}
        note={i18n.t("Records of this year and no other, to read and to take as a file.")}
        choices={Array.from({ length: YEARS_BACK }, (_, back) => String(thisYear - back)).map(
          (year) => ({ value: year, label: year }),
        )}
      />
      <DateField
        form={form}
        name="lastDay"
        label={i18n.t("Last day")}
        isOptional
        note={i18n.t("Left empty: access ends tonight, at midnight in {zone}.", {
          zone: site?.timeZone ?? "UTC",
        })}
      />
      <SelectField form={form} name="language" label={i18n.t("Language")} choices={languages} />
      <FormProblem error={letIn.error} />
      <FormActions>
        <SubmitButton isBusy={letIn.isPending}>{i18n.t("Let in")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
