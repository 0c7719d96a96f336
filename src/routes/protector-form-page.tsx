import { useLingui } from "@lingui/react";
import { useMutation, useQueryClient } from "@tanstack/react-query";
import { useNavigate } from "react-router-dom";
import type { z } from "zod";
import { localDateOf } from "../../shared/format/date";
import { NewProtectorInput, ProtectorDetail } from "../../shared/schemas/protector";
import { ButtonLink } from "../components/button";
import {
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { focusFirstFault, ProtectorDataFields } from "../features/protectors/data-fields";
import { protectorKinds } from "../features/protectors/kinds";
import { protectorQueries } from "../features/protectors/queries";
import { useUser } from "../features/session/session";
import { api } from "../lib/api";
import { useChangeKey } from "../lib/change-key";
import { useOneAtATime } from "../lib/one-at-a-time";
import { paths } from "../paths";

/** A new protector with its first data. */
export function Component() {
  const { i18n } = useLingui();
  const navigate = useNavigate();
  const client = useQueryClient();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const timeZone = useUser().sites[0]?.timeZone ?? "UTC";
  const form = useSchemaForm(NewProtectorInput, {
    defaultValues: {
      name: "",
      kind: "earmuff",
      data: {
        usRatingDb: null,
        snrDb: null,
        hDb: null,
        mDb: null,
        lDb: null,
        slc80Db: null,
        bands: null,
        active: null,
        percentile: null,
        usLabel: null,
        subjectsDb: null,
        sizes: [],
        worksWith: { helmet: null, glasses: null, respirator: null },
        cushionsEveryDays: null,
        tipsEveryDays: null,
        auClass: null,
        effectiveFrom: localDateOf(new Date().toISOString(), timeZone),
        reason: null,
      },
    },
  });
  const create = useMutation({
    mutationFn: (body: z.output<typeof NewProtectorInput>) =>
      api.post("/protectors", {
        body,
        schema: ProtectorDetail,
        idempotencyKey: changeKey.keyFor(body),
      }),
    onSuccess: (view) => {
      changeKey.forget();
      client.setQueryData(protectorQueries.one(view.id).queryKey, view);
      void client.invalidateQueries({ queryKey: protectorQueries.all });
      void navigate(paths.protector(view.id));
    },
    onError: showIssuesOn(form, i18n),
    onSettled: end,
  });
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.protectors}>{i18n.t("Protectors")}</TextLink>}
          title={i18n.t("New protector")}
          lead={i18n.t(
            "Type what certificate and test report state. What they do not state stays empty.",
          )}
        />
        <Form
          aria-label={i18n.t("New protector")}
          onSubmit={form.handleSubmit(
            (body) => {
              if (begin()) create.mutate(body);
            },
            () => focusFirstFault(i18n.t("New protector")),
          )}
        >
          <TextField form={form} name="name" label={i18n.t("Name")} />
          <SelectField
            form={form}
            name="kind"
            label={i18n.t("Kind")}
            choices={protectorKinds(i18n)}
          />
          <ProtectorDataFields form={form} needsReason={false} />
          <FormProblem error={create.error} />
          <FormActions>
            <SubmitButton isBusy={create.isPending}>{i18n.t("Save protector")}</SubmitButton>
            <ButtonLink to={paths.protectors}>{i18n.t("Leave")}</ButtonLink>
          </FormActions>
        </Form>
      </PageBody>
      <Folio />
    </>
  );
}
