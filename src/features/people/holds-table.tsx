import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { z } from "zod";
import { formatInstant, formatShortDate } from "../../../shared/format/date";
import { HoldInput, type HoldView, LiftInput } from "../../../shared/schemas/retention";
import { ComboboxField } from "../../components/combobox-field";
import { type DataColumn, DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import {
  Form,
  FormActions,
  RadioGroup,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { TextButton } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { ByWhom } from "./by-whom";
import { searchPresentAndFormer } from "./queries";
import { retentionQueries, useLiftHold, usePlaceHold } from "./retention-queries";

/** Holds that stand, then those that were lifted. */
export function HoldsTable({ timeZone }: { timeZone: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const holds = useQuery(retentionQueries.holds);
  const at = (instant: string) => formatInstant(instant, timeZone, locale);
  const columns: DataColumn<HoldView>[] = [
    {
      id: "of",
      head: i18n.t("Whose records"),
      isRowHead: true,
      cell: ({ worker, siteName }) => (
        <>
          <bdi>{worker ? worker.name : i18n.t("Everybody of {site}", { site: siteName })}</bdi>
          {worker && <span className="visitor-mail">{siteName}</span>}
        </>
      ),
    },
    { id: "reason", head: i18n.t("Reason"), cell: ({ reason }) => reason },
    {
      id: "placed",
      head: i18n.t("Held by"),
      cell: ({ placedBy, placedAt }) => <ByWhom name={placedBy} at={at(placedAt)} />,
    },
    {
      id: "lifted",
      head: i18n.t("Lifted"),
      cell: (hold) =>
        hold.lifted ? (
          <ByWhom name={hold.lifted.by} at={`${at(hold.lifted.at)}: ${hold.lifted.reason}`} />
        ) : (
          hold.can.lift && <Lift hold={hold} />
        ),
    },
  ];
  return (
    <DataTable
      caption={i18n.t("Holds")}
      columns={columns}
      rows={holds.data ?? []}
      rowKey={({ id }) => id}
      state={holds.isPending ? "loading" : holds.isError ? "failed" : "ready"}
      error={holds.error}
      onRetry={() => void holds.refetch()}
      stacksOnPhone
      groupOf={({ lifted }) =>
        lifted
          ? { key: "lifted", label: i18n.t("Lifted") }
          : { key: "standing", label: i18n.t("Standing") }
      }
      empty={<Empty title={i18n.t("Nothing is held.")} />}
    />
  );
}

function Lift({ hold }: { hold: HoldView }) {
  const { i18n } = useLingui();
  const [isOpen, setIsOpen] = useState(false);
  const form = useSchemaForm(LiftInput, {
    defaultValues: { reason: "" },
    keepAs: `/legal-holds/${hold.id}/lift`,
  });
  const lift = useLiftHold(hold.id, () => setIsOpen(false));
  if (!isOpen)
    return (
      <TextButton onClick={() => setIsOpen(true)}>
        {i18n.t("Lift")}
        <span className="sr-only"> {hold.worker?.name ?? hold.siteName}</span>
      </TextButton>
    );
  return (
    <Form
      labels="above"
      aria-label={i18n.t("Lift the hold")}
      onSubmit={form.handleSubmit((body) =>
        lift.start(body, { onError: showIssuesOn(form, i18n) }),
      )}
    >
      <TextAreaField form={form} name="reason" rows={2} label={i18n.t("Why it is lifted")} />
      <FormProblem error={lift.error} />
      <FormActions>
        <SubmitButton isBusy={lift.isPending}>{i18n.t("Lift")}</SubmitButton>
        <TextButton onClick={() => setIsOpen(false)}>{i18n.t("Leave as it was")}</TextButton>
      </FormActions>
    </Form>
  );
}

/** Everybody's records are held only where that was chosen, never because nobody is named. */
const HoldFields = HoldInput.extend({ whose: z.enum(["worker", "everybody"]) }).check((context) => {
  const { whose, workerId } = context.value;
  if (whose === "worker" && workerId === null)
    context.issues.push({
      code: "custom",
      input: workerId,
      path: ["workerId"],
      params: { code: "required" },
    });
});

/** Holds a worker's records or everybody's of the site. */
export function HoldForm({ siteId, onPlaced }: { siteId: string; onPlaced: () => void }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const form = useSchemaForm(HoldFields, {
    defaultValues: { siteId, whose: "worker", workerId: null, reason: "" },
    keepAs: `/legal-holds new ${siteId}`,
  });
  const place = usePlaceHold(() => {
    form.reset();
    onPlaced();
  });
  return (
    <Form
      aria-label={i18n.t("Hold records")}
      onSubmit={form.handleSubmit(({ whose, ...body }) =>
        place.start(
          { ...body, workerId: whose === "everybody" ? null : body.workerId },
          { onError: showIssuesOn(form, i18n) },
        ),
      )}
    >
      <RadioGroup
        form={form}
        name="whose"
        label={i18n.t("Whose records")}
        choices={[
          { value: "worker", label: i18n.t("One worker’s") },
          { value: "everybody", label: i18n.t("Everybody’s of the site") },
        ]}
      />
      {form.watch("whose") === "worker" && (
        <ComboboxField
          form={form}
          name="workerId"
          label={i18n.t("Worker")}
          note={i18n.t("By name or number; whoever left is found too.")}
          search={searchPresentAndFormer(siteId, (date) =>
            i18n.t("left {date}", { date: formatShortDate(date, locale) }),
          )}
        />
      )}
      <TextAreaField form={form} name="reason" rows={2} label={i18n.t("Reason")} />
      <FormProblem error={place.error} />
      <FormActions>
        <SubmitButton isBusy={place.isPending}>{i18n.t("Hold")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
