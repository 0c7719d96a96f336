import { useLingui } from "@lingui/react";
import { useMutation, useQuery } from "@tanstack/react-query";
import { WorkerCodeInput } from "../../shared/schemas/session";
import {
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../components/form";
import { LangSwitch } from "../components/lang-switch";
import { TextButton } from "../components/link";
import { Page, PageBody, PageHead, RunningHead, Section } from "../components/page";
import { sessionQuery, signOut } from "../features/session/session";
import { api } from "../lib/api";

/** For somebody the provider vouched for, but to whom nobody has granted a role. */
export function Component() {
  const { i18n } = useLingui();
  const { data } = useQuery(sessionQuery);
  const form = useSchemaForm(WorkerCodeInput, { defaultValues: { employeeNumber: "", code: "" } });
  const bind = useMutation({
    mutationFn: (body: unknown) =>
      api.post("/auth/worker-code", {
        body,
        schema: { parse: (value) => value as { returnTo: string } },
      }),
    onSuccess: ({ returnTo }) => window.location.assign(returnTo),
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Page head={<RunningHead account={<LangSwitch />} />}>
      <PageBody>
        <PageHead
          title={i18n.t("You have no access here yet")}
          lead={i18n.t(
            "{name}, your sign-in is known, but it opens nothing in Dinward: nobody has given you a role, or the sign-in service does not call your e-mail verified. Ask your safety officer or your administrator.",
            { name: data?.pendingName ?? i18n.t("Hello") },
          )}
        />
        <Section title={i18n.t("I have a code on paper")} id="code">
          <Form
            onSubmit={form.handleSubmit((body) => bind.mutate(body))}
            aria-label={i18n.t("Code on paper")}
          >
            <TextField form={form} name="employeeNumber" label={i18n.t("Employee number")} />
            <TextField
              form={form}
              name="code"
              label={i18n.t("Code")}
              note={i18n.t("Twelve letters and figures; it works once.")}
            />
            <FormActions>
              <SubmitButton isBusy={bind.isPending}>{i18n.t("This is me")}</SubmitButton>
            </FormActions>
          </Form>
        </Section>
        <p>
          <TextButton onClick={() => void signOut()}>
            {i18n.t("Sign out and use another sign-in")}
          </TextButton>
        </p>
      </PageBody>
    </Page>
  );
}
