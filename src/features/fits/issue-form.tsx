import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useMemo, useState } from "react";
import { useController } from "react-hook-form";
import { z } from "zod";
import { formatShortDate } from "../../../shared/format/date";
import { Reason } from "../../../shared/schemas/common";
import {
  type FitTestView,
  type FittingDesk,
  type IssueSaved,
  reasonAskedFor,
} from "../../../shared/schemas/fit";
import { Button } from "../../components/button";
import {
  CheckField,
  DateField,
  Field,
  Form,
  FormActions,
  SelectField,
  SubmitButton,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { ApiError } from "../../lib/api";
import { assignedUse, EVERYWHERE } from "../../lib/assigned-use";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { references } from "../../lib/references";
import { showFitIssuesOn } from "./fit-issues";
import { useIssue } from "./queries";

const IssueFields = z.object({
  use: z.string(),
  offeredModelIds: z.array(z.uuid()).min(1).max(40),
  wasInstructed: z.boolean(),
  isAcknowledged: z.boolean(),
  /** A field that was emptied states none. */
  reason: z
    .string()
    .transform((reason) => reason.trim() || null)
    .pipe(Reason.nullable()),
  issuedOn: z.iso.date(),
});

/** What is laid out decides whether a reason is asked for: said before it is sent. */
const fieldsAt = ({ candidates }: FittingDesk, device: ToIssue) =>
  IssueFields.check((context) => {
    const { offeredModelIds, reason } = context.value;
    const asked = askedFor(candidates, device, offeredModelIds);
    if (reason === null && asked !== null)
      context.issues.push({
        code: "custom",
        input: reason,
        path: ["reason"],
        params: { code: asked },
      });
  });

const askedFor = (
  candidates: FittingDesk["candidates"],
  device: ToIssue,
  offeredModelIds: readonly string[],
) =>
  reasonAskedFor(
    candidates.flatMap(({ modelId, kind }) => (offeredModelIds.includes(modelId) ? [kind] : [])),
    candidates.find(({ modelId }) => modelId === device.modelId)?.stock ?? null,
    device.fit,
  );

/** What was assigned for the same use on that day, and is not this device already: it ends with the issue. */
const replacedBy = (
  { assigned }: FittingDesk,
  { modelId, size }: ToIssue,
  { use, issuedOn }: { use: string; issuedOn: string },
) =>
  assigned.find(
    (one) =>
      assignedUse(one) === use &&
      one.fromDate <= issuedOn &&
      (one.toDate === null || one.toDate >= issuedOn) &&
      !(one.innerModelId === modelId && one.outerModelId === null && one.size === size),
  );

/** What goes out: a device, and the fit that it goes out on where one was tested. */
export interface ToIssue {
  readonly modelId: string;
  readonly size: string | null;
  readonly fit: FitTestView | null;
}

/** Hands a device out, in one act: for which use, what was on offer, that its wearing was shown and that it was received. */
export function IssueForm({
  desk,
  device,
  today,
  onIssued,
  onLeave,
}: {
  desk: FittingDesk;
  device: ToIssue;
  today: string;
  onIssued: (issue: IssueSaved, stockLeft: number | null) => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const issue = useIssue(desk.worker.id);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const { siteId } = desk.worker;
  const tasks = useQuery(references.tasks(siteId));
  const areas = useQuery(references.areas(siteId));
  const candidate = desk.candidates.find(({ modelId }) => modelId === device.modelId);
  // A fit of an earlier day is one from paper: the device went out with it.
  const issuedOn = device.fit?.testedOn ?? today;
  const tried = desk.tests
    .filter(({ isVoid, testedOn }) => !isVoid && testedOn === issuedOn)
    .map(({ modelId }) => modelId);
  const fields = useMemo(() => fieldsAt(desk, device), [desk, device]);
  const form = useSchemaForm(fields, {
    mode: "onSubmit",
    keepAs: `issue ${device.modelId}`,
    defaultValues: {
      use: EVERYWHERE,
      offeredModelIds: [...new Set([device.modelId, ...tried])],
      wasInstructed: false,
      isAcknowledged: false,
      reason: "",
      issuedOn,
    },
  });
  const offered = form.watch("offeredModelIds");
  const asked = askedFor(desk.candidates, device, offered);
  const stock = candidate?.stock ?? null;
  const replaced = replacedBy(desk, device, form.watch());
  // The server counts the stock by size; once a reason was asked for, the field stays for what is typed.
  const [askedByServer, setAskedByServer] = useState<string | null>(null);
  const hasAsked = askedByServer !== null || form.watch("reason") !== "";
  const why = asked ?? askedByServer;
  const name = [
    candidate?.name ?? "",
    device.size !== null && i18n.t("size {size}", { size: device.size }),
  ]
    .filter(Boolean)
    .join(", ");
  const uses = [
    { value: EVERYWHERE, label: i18n.t("everywhere in noise") },
    ...(areas.data?.rows ?? [])
      .filter(({ isArchived }) => !isArchived)
      .map(({ id, name }) => ({
        value: `area ${id}`,
        label: i18n.t("in the area {name}", { name }),
      })),
    ...(tasks.data?.rows ?? [])
      .filter(({ isArchived }) => !isArchived)
      .map(({ id, name }) => ({
        value: `task ${id}`,
        label: i18n.t("in the task {name}", { name }),
      })),
  ];

  return (
    <Form
      className="issue-form"
      aria-label={i18n.t("Issue {protector}", { protector: candidate?.name ?? "" })}
      onSubmit={form.handleSubmit(({ use, ...facts }) => {
        if (!begin()) return;
        const [what, id = null] = use.split(" ");
        const body = {
          ...facts,
          modelId: device.modelId,
          size: device.size,
          fitTestId: device.fit?.id ?? null,
          taskId: what === "task" ? id : null,
          areaId: what === "area" ? id : null,
        };
        issue.mutate(
          { body, key: changeKey.keyFor(body) },
          {
            // It is not let through again: what went out went out.
            onSuccess: (view) => onIssued(view, stock === null ? null : stock - 1),
            onError: (error) => {
              end();
              setAskedByServer(reasonIssue(error));
              showFitIssuesOn(form, i18n)(error);
            },
          },
        );
      })}
    >
      <SelectField
        form={form}
        name="use"
        label={i18n.t("Worn")}
        choices={uses}
        note={
          replaced &&
          (replaced.fromDate < form.getValues("issuedOn")
            ? i18n.t(
                "Replaces {protector}, assigned for this since {date}: that ends the day before.",
                { protector: replaced.name, date: formatShortDate(replaced.fromDate, locale) },
              )
            : i18n.t("Replaces {protector}, assigned for this on the same day.", {
                protector: replaced.name,
              }))
        }
      />
      <OfferedField form={form} desk={desk} deviceId={device.modelId} />
      <CheckField
        form={form}
        name="wasInstructed"
        label={i18n.t("Instruction")}
        text={i18n.t("How to put it on, wear it and care for it was shown")}
      />
      <CheckField
        form={form}
        name="isAcknowledged"
        label={i18n.t("Receipt")}
        text={i18n.t("The worker says that it was received, free of charge")}
      />
      {(asked !== null || hasAsked) && (
        <TextAreaField
          form={form}
          name="reason"
          label={i18n.t("All the same, because")}
          rows={2}
          note={
            why === "fit-not-passed"
              ? i18n.t("This fit did not pass. Only officers read this.")
              : why === "fit-not-assessed"
                ? i18n.t("This fit is not assessed for one ear. Only officers read this.")
                : why === "one-kind-offered"
                  ? i18n.t("Only one kind is on offer. Only officers read this.")
                  : why === "none-in-stock"
                    ? i18n.t("None of {protector} is in stock. Only officers read this.", {
                        protector: name,
                      })
                    : i18n.t("Only officers read this.")
          }
        />
      )}
      <DateField form={form} name="issuedOn" label={i18n.t("Issued")} />
      <FormProblem error={issue.error} />
      <FormActions>
        <SubmitButton isBusy={issue.isPending}>{i18n.t("Issue this")}</SubmitButton>
        <Button onClick={onLeave}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}

/** Why the server asks for a reason; null: it doesn't. */
const reasonIssue = (error: unknown): string | null =>
  (error instanceof ApiError && error.issues.find(({ path }) => path === "reason")?.code) || null;

/** More than one kind has to be on offer: what was laid out on the desk. */
function OfferedField({
  form,
  desk,
  deviceId,
}: {
  form: ReturnType<typeof useSchemaForm<typeof IssueFields>>;
  desk: FittingDesk;
  deviceId: string;
}) {
  const { i18n } = useLingui();
  const { field, fieldState } = useController({ control: form.control, name: "offeredModelIds" });
  const chosen = field.value;
  const choices = desk.candidates.filter(
    ({ modelId, excludedBy }) => excludedBy === null || chosen.includes(modelId),
  );
  return (
    <Field label={i18n.t("On offer were")} isGroup error={fieldState.error?.message}>
      {() => (
        <span className="offered">
          {choices.map(({ modelId, name }, place) => (
            <label key={modelId} className="choice">
              <input
                type="checkbox"
                ref={place === 0 ? field.ref : undefined}
                checked={chosen.includes(modelId)}
                disabled={modelId === deviceId}
                onChange={(event) =>
                  field.onChange(
                    event.target.checked
                      ? [...chosen, modelId]
                      : chosen.filter((id) => id !== modelId),
                  )
                }
              />
              <span>{name}</span>
            </label>
          ))}
        </span>
      )}
    </Field>
  );
}
