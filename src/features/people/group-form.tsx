import { useLingui } from "@lingui/react";
import { useMutation, useQueryClient } from "@tanstack/react-query";
import { MappingInput, MappingView } from "../../../shared/schemas/group-mapping";
import {
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
import { roleWord } from "../../lib/role-word";
import { peopleQueries } from "./queries";
import { ROLES } from "./role-words";

/** A role for whoever is in a group of the sign-in service. */
export function GroupForm({ sites }: { sites: readonly { id: string; name: string }[] }) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(MappingInput, {
    defaultValues: { groupName: "", role: "auditor", siteId: sites[0]?.id ?? null },
    keepAs: "/group-mappings new",
  });
  const save = useMutation({
    mutationFn: (body: MappingInput) =>
      api.post("/group-mappings", {
        body,
        schema: MappingView,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: () => {
      changeKey.forget();
      form.reset();
      void client.invalidateQueries({ queryKey: peopleQueries.all });
    },
    onError: showIssuesOn(form, i18n),
    onSettled: end,
  });
  return (
    <Form
      aria-label={i18n.t("Give a group a role")}
      onSubmit={form.handleSubmit((body) => {
        if (begin()) save.mutate(body);
      })}
    >
      <TextField
        form={form}
        name="groupName"
        label={i18n.t("Group")}
        note={i18n.t("Exactly as the sign-in service writes it.")}
        inputProps={{ autoComplete: "off" }}
      />
      <SelectField
        form={form}
        name="role"
        label={i18n.t("Role")}
        choices={ROLES.filter((role) => role !== "worker").map((role) => ({
          value: role,
          label: roleWord(i18n, role),
        }))}
      />
      <SelectField
        form={form}
        name="siteId"
        label={i18n.t("Site")}
        emptyLabel={i18n.t("All sites")}
        choices={sites.map(({ id, name }) => ({ value: id, label: name }))}
      />
      <FormProblem error={save.error} />
      <FormActions>
        <SubmitButton isBusy={save.isPending}>{i18n.t("Give the role")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
