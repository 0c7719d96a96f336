import { useLingui } from "@lingui/react";
import { queryOptions, useQuery, useQueryClient } from "@tanstack/react-query";
import { useEffect, useState } from "react";
import { useLocation } from "react-router-dom";
import { isolate } from "../../../shared/i18n/isolate";
import { EscalationInput, EscalationList, EscalationView } from "../../../shared/schemas/follow-up";
import { Button } from "../../components/button";
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
import { TextButton } from "../../components/link";
import { api } from "../../lib/api";
import { useRevisedSave } from "../../lib/revised-save";

const escalationsQuery = queryOptions({
  queryKey: ["escalations"],
  queryFn: ({ signal }) => api.get("/escalations", { schema: EscalationList, signal }),
});

/** Whom a site's overdue findings go up to. */
export function Escalation({ siteId }: { siteId: string }) {
  const { i18n } = useLingui();
  const [isOpen, setIsOpen] = useState(false);
  const { data, error, refetch } = useQuery(escalationsQuery);
  const site = data?.rows.find((one) => one.siteId === siteId);
  const { hash } = useLocation();
  const isThere = site !== undefined;
  // Its section is not there yet when a link to it is followed.
  useEffect(() => {
    if (isThere && hash === "#escalation") document.getElementById("escalation")?.scrollIntoView();
  }, [isThere, hash]);
  if (error) return <Failed error={error} onRetry={() => void refetch()} />;
  if (!site)
    return (
      <p>
        <span className="loading-line" />
      </p>
    );
  if (isOpen) return <EscalationForm site={site} onDone={() => setIsOpen(false)} />;
  return (
    <p>
      {site.userName === null
        ? i18n.t("Nobody is named: an overdue finding only waits.")
        : i18n.t("A finding past its date goes up to {name}: one mail, and a mark in the lists.", {
            name: isolate(site.userName),
          })}{" "}
      {site.canChange && (
        <TextButton
          aria-label={i18n.t("Change whom overdue findings go up to")}
          onClick={() => setIsOpen(true)}
        >
          {i18n.t("Change")}
        </TextButton>
      )}
    </p>
  );
}

function EscalationForm({ site, onDone }: { site: EscalationView; onDone: () => void }) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const form = useSchemaForm(EscalationInput, {
    keepAs: `escalation ${site.siteId}`,
    defaultValues: { userId: site.userId },
  });
  const { save, isSaving, error, conflict } = useRevisedSave<EscalationInput, EscalationView>({
    path: () => `/sites/${site.siteId}/escalation`,
    schema: EscalationView,
    toBody: ({ userId }) => ({ userId }),
    onSaved: () => {
      void client.invalidateQueries({ queryKey: escalationsQuery.queryKey });
      void client.invalidateQueries({ queryKey: ["sites"] });
      onDone();
    },
    onError: showIssuesOn(form, i18n),
  });
  // One person: whoever comes second sees what stands and may choose again.
  const revision = conflict?.saved.revision ?? site.revision;
  return (
    <Form
      aria-label={i18n.t("Overdue findings")}
      onSubmit={form.handleSubmit((body) => save(body, revision))}
    >
      <SelectField
        form={form}
        name="userId"
        label={i18n.t("They go up to")}
        emptyLabel={i18n.t("nobody")}
        choices={site.people.map(({ id, name }) => ({ value: id, label: name }))}
        note={i18n.t("Officers and auditors of the site who have an address for mail.")}
        isOptional
      />
      {conflict && (
        <p className="field-error">
          {i18n.t(
            "Someone changed the site meanwhile; they go up to {name} now. Save again to put yours.",
            {
              name: conflict.saved.userName ?? i18n.t("nobody"),
            },
          )}
        </p>
      )}
      <FormProblem error={error} />
      <FormActions>
        <SubmitButton isBusy={isSaving}>{i18n.t("Save")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}
