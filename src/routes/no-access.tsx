import { useLingui } from "@lingui/react";
import { useMutation, useQuery } from "@tanstack/react-query";
import { formatInstant } from "../../shared/format/date";
import { WorkerCodeInput } from "../../shared/schemas/session";
import { ButtonLink } from "../components/button";
import {
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../components/form";
import { FormProblem } from "../components/form-problem";
import { LangSwitch } from "../components/lang-switch";
import { TextButton, TextLink } from "../components/link";
import { Page, PageBody, PageHead, RunningHead, Section } from "../components/page";
import { sessionQuery, signOut } from "../features/session/session";
import { api } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";

/** For somebody the provider vouched for, but to whom nobody has granted a role; anybody else is shown the way. */
export function Component() {
  const { data } = useQuery(sessionQuery);
  return (
    <Page head={<RunningHead account={<LangSwitch />} />}>
      <PageBody>
        {data?.pendingName &&
          (data.endedAt ? (
            <AccessEnded name={data.pendingName} endedAt={data.endedAt} />
          ) : (
            <NoRole name={data.pendingName} />
          ))}
        {data?.user && <HasAccess />}
        {data && !data.user && !data.pendingName && <SignedOut />}
      </PageBody>
    </Page>
  );
}

function HasAccess() {
  const { i18n } = useLingui();
  return (
    <>
      <PageHead title={i18n.t("You have access here")} />
      <p>
        <TextLink to={paths.home}>{i18n.t("To your first page")}</TextLink>
      </p>
    </>
  );
}

/** What was granted for a time is over: nothing is wrong with the sign-in. */
function AccessEnded({ name, endedAt }: { name: string; endedAt: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <>
      <PageHead
        title={i18n.t("Your access has ended")}
        lead={i18n.t(
          "{name}, you had access until {time} by this device’s clock. If you need it again, ask whoever let you in.",
          {
            name,
            time: formatInstant(endedAt, Intl.DateTimeFormat().resolvedOptions().timeZone, locale),
          },
        )}
      />
      <p>
        <TextButton onClick={() => void signOut()}>
          {i18n.t("Sign out and use another sign-in")}
        </TextButton>
      </p>
    </>
  );
}

function SignedOut() {
  const { i18n } = useLingui();
  return (
    <>
      <PageHead
        title={i18n.t("You are not signed in")}
        lead={i18n.t("Sign in first. With a code on paper too: it is asked for after the sign-in.")}
      />
      <p>
        <ButtonLink kind="primary" to={paths.signIn}>
          {i18n.t("Sign in")}
        </ButtonLink>
      </p>
    </>
  );
}

function NoRole({ name }: { name: string }) {
  const { i18n } = useLingui();
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
    <>
      <PageHead
        title={i18n.t("You have no access here yet")}
        lead={i18n.t(
          "{name}, your sign-in is known, but it opens nothing in Dinward: nobody has given you a role, or the sign-in service does not call your e-mail verified. Ask your safety officer or your administrator.",
          { name },
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
          <FormProblem error={bind.error} form={form} />
          <FormActions>
            <SubmitButton isBusy={bind.isPending}>{i18n.t("This is me")}</SubmitButton>
          </FormActions>
        </Form>
      </Section>
      <p className="mt-6">
        <TextButton onClick={() => void signOut()}>
          {i18n.t("Sign out and use another sign-in")}
        </TextButton>
      </p>
    </>
  );
}
