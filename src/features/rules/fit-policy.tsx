import { useLingui } from "@lingui/react";
import { keepPreviousData, useQuery, useQueryClient } from "@tanstack/react-query";
import { useDeferredValue, useState } from "react";
import { z } from "zod";
import { formatShortDate } from "../../../shared/format/date";
import { CONFIDENCE_PCT, FitPolicyInput, FitPolicyPreview } from "../../../shared/schemas/fit";
import { SiteView } from "../../../shared/schemas/site";
import { Button } from "../../components/button";
import { ConflictDialog } from "../../components/conflict-dialog";
import {
  Form,
  FormActions,
  NumberField,
  SelectField,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { Status } from "../../components/status";
import { api } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { useRevisedSave } from "../../lib/revised-save";
import { ruleQueries } from "./queries";

/** The choice is one of texts; the server's own schema has numbers. */
const Fields = FitPolicyInput.omit({ confidencePct: true }).extend({ confidence: z.string() });

/** How sure a fit has to be at a site, when it is tested again, and their change. */
export function FitPolicy({ site }: { site: SiteView }) {
  const { i18n } = useLingui();
  const [isOpen, setIsOpen] = useState(false);
  const { confidencePct, everyMonths, afterFailDays, firstDays } = site.fitPolicy;
  if (isOpen) return <PolicyForm site={site} onDone={() => setIsOpen(false)} />;
  return (
    <>
      <p>
        {i18n.t("A fit counts as what the worker gets with {pct} % confidence.", {
          pct: confidencePct,
        })}{" "}
        {everyMonths === null
          ? i18n.t("No interval is stated, so that no fit becomes due by age.")
          : i18n.t(
              "It is tested again {months, plural, one {every month} other {every # months}}.",
              {
                months: everyMonths,
              },
            )}{" "}
        {afterFailDays !== null &&
          i18n.t(
            "After a fail, a refit or with a new device {days, plural, one {within # day} other {within # days}}.",
            { days: afterFailDays },
          )}{" "}
        {(everyMonths !== null || afterFailDays !== null) &&
          i18n.t(
            "A device never tested on its wearer has its test {days, plural, one {within # day} other {within # days}}.",
            { days: firstDays },
          )}
      </p>
      {site.can.changeRules && (
        <p className="after-table">
          <Button onClick={() => setIsOpen(true)}>{i18n.t("Change how fits are tested")}</Button>
        </p>
      )}
    </>
  );
}

const toBody = ({ fitPolicy }: SiteView): FitPolicyInput => fitPolicy;

function PolicyForm({ site, onDone }: { site: SiteView; onDone: () => void }) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const { confidencePct, everyMonths, afterFailDays, firstDays } = site.fitPolicy;
  const form = useSchemaForm(Fields, {
    defaultValues: { confidence: String(confidencePct), everyMonths, afterFailDays, firstDays },
  });
  const filled = FitPolicyInput.safeParse({ ...form.watch(), confidencePct });
  const { save, isSaving, error, conflict, leaveConflict } = useRevisedSave<
    FitPolicyInput,
    SiteView
  >({
    path: () => `/sites/${site.id}/fit-policy`,
    schema: SiteView,
    toBody,
    onSaved: (view) => {
      client.setQueryData(ruleQueries.site(view.id).queryKey, view);
      for (const name of ["fits", "findings", "waiting"])
        void client.invalidateQueries({ queryKey: [name] });
      onDone();
    },
    onError: showIssuesOn(form, i18n),
  });
  const shown = (value: number | null) => (value === null ? i18n.t("not stated") : String(value));
  return (
    <>
      <Form
        aria-label={i18n.t("How fits are tested")}
        onSubmit={form.handleSubmit(({ confidence, ...facts }) =>
          save(
            FitPolicyInput.parse({ ...facts, confidencePct: Number(confidence) }),
            site.revision,
          ),
        )}
      >
        <SelectField
          form={form}
          name="confidence"
          label={i18n.t("Confidence")}
          choices={CONFIDENCE_PCT.map((pct) => ({ value: String(pct), label: `${pct} %` }))}
          note={i18n.t(
            "The PAR is what the worker reaches or passes with it. Fits on record keep theirs.",
          )}
        />
        <NumberField
          form={form}
          name="everyMonths"
          label={i18n.t("Tested again every")}
          unit={i18n.t("months")}
          isOptional
          note={i18n.t("Empty: no fit becomes due by age.")}
        />
        <NumberField
          form={form}
          name="afterFailDays"
          label={i18n.t("Sooner, within")}
          unit={i18n.t("days")}
          isOptional
          note={i18n.t("After a fail, a refit, or with a new device in place of a tested one.")}
        />
        <NumberField
          form={form}
          name="firstDays"
          label={i18n.t("The first test within")}
          unit={i18n.t("days")}
          note={i18n.t(
            "Of the day on which a device was given. Who has one already gets a date within as many days from now, spread over them. 90 days: common practice, no source.",
          )}
        />
        <WhatFallsDue siteId={site.id} policy={filled.data} />
        <FormProblem error={error} />
        <FormActions>
          <SubmitButton isBusy={isSaving}>{i18n.t("Save")}</SubmitButton>
          <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
        </FormActions>
      </Form>
      {conflict && (
        <ConflictDialog
          title={i18n.t("Someone changed this site before you")}
          conflict={conflict}
          toBody={toBody}
          fields={[
            {
              key: "confidencePct",
              label: i18n.t("Confidence"),
              show: (body) => `${body.confidencePct} %`,
            },
            {
              key: "everyMonths",
              label: i18n.t("Months"),
              show: (body) => shown(body.everyMonths),
            },
            {
              key: "firstDays",
              label: i18n.t("Days to the first test"),
              show: (body) => shown(body.firstDays),
            },
            {
              key: "afterFailDays",
              label: i18n.t("Days after a fail"),
              show: (body) => shown(body.afterFailDays),
            },
          ]}
          isSaving={isSaving}
          onSave={save}
          onKeepSaved={(view) => {
            client.setQueryData(ruleQueries.site(view.id).queryKey, view);
            onDone();
          }}
          onClose={leaveConflict}
        />
      )}
    </>
  );
}

/** Said before it is saved: whose tests would be due at once, and when those of the others. */
function WhatFallsDue({ siteId, policy }: { siteId: string; policy: FitPolicyInput | undefined }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const asked = useDeferredValue(policy);
  const { data, error } = useQuery({
    queryKey: ["fits", "policy-preview", siteId, asked],
    queryFn: ({ signal }) =>
      api.post(`/sites/${siteId}/fit-policy/preview`, {
        body: asked ?? {},
        schema: FitPolicyPreview,
        signal,
      }),
    enabled: asked !== undefined,
    placeholderData: keepPreviousData,
  });
  if (error) return <FormProblem error={error} />;
  const { untestedFrom, untestedTo } = data ?? {};
  return (
    <p className="policy-due">
      <Status>
        {data &&
          [
            i18n.t(
              "{count, plural, =0 {No test of fit is due at once by this.} one {One test of fit is due at once by this.} other {# tests of fit are due at once by this.}}",
              { count: data.dueNowCount },
            ),
            untestedFrom &&
              untestedTo &&
              i18n.t(
                "{count, plural, one {One wearer who was never tested becomes due} other {# wearers who were never tested become due}} later, between {from} and {to}.",
                {
                  count: data.untestedCount,
                  from: formatShortDate(untestedFrom, locale),
                  to: formatShortDate(untestedTo, locale),
                },
              ),
          ]
            .filter(Boolean)
            .join(" ")}
      </Status>
    </p>
  );
}
