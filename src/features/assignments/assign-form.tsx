import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useRef } from "react";
import { z } from "zod";
import { AudioDb } from "../../../shared/schemas/worker";
import { Button } from "../../components/button";
import {
  DateField,
  Form,
  FormActions,
  NumberField,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { ApiError, newChangeKey } from "../../lib/api";
import { EVERYWHERE } from "../../lib/assigned-use";
import { problemText } from "../../lib/problem-text";
import { references } from "../../lib/references";
import { useAssign } from "./queries";

/** The use as one choice; the server's own schema has it in two fields. */
const AssignFields = z
  .object({
    use: z.string(),
    innerModelId: z.uuid(),
    outerModelId: z.uuid().nullable(),
    fromDate: z.iso.date(),
    toDate: z.iso.date().nullable(),
    /** A field that was emptied states none. */
    size: z
      .string()
      .trim()
      .max(20)
      .nullable()
      .transform((size) => size || null),
    audioDb: AudioDb.nullable(),
  })
  .check((context) => {
    const { innerModelId, outerModelId, fromDate, toDate } = context.value;
    if (innerModelId === outerModelId)
      context.issues.push({
        code: "custom",
        input: outerModelId,
        path: ["outerModelId"],
        params: { code: "same-protector-twice" },
      });
    if (toDate !== null && toDate < fromDate)
      context.issues.push({
        code: "custom",
        input: toDate,
        path: ["toDate"],
        params: { code: "ends-before-start" },
      });
  });

export interface AssignStart {
  /** "everywhere", "task <id>", "area <id>" */
  readonly use?: string;
  readonly innerModelId?: string;
  readonly outerModelId?: string;
}

/** One protector, or a plug under a muff, for a use from a date. */
export function AssignForm({
  workerId,
  siteId,
  today,
  start,
  onDone,
  onCancel,
}: {
  workerId: string;
  siteId: string;
  today: string;
  start: AssignStart;
  onDone: () => void;
  onCancel: () => void;
}) {
  const { i18n } = useLingui();
  const assign = useAssign(workerId);
  const key = useRef(newChangeKey());
  const protectors = useQuery(references.protectors());
  const tasks = useQuery(references.tasks(siteId));
  const areas = useQuery(references.areas(siteId));
  const form = useSchemaForm(AssignFields, {
    defaultValues: {
      use: start.use ?? EVERYWHERE,
      innerModelId: start.innerModelId ?? "",
      outerModelId: start.outerModelId ?? null,
      fromDate: today,
      toDate: null,
      size: null,
      audioDb: null,
    },
  });
  const sizes =
    protectors.data?.rows.find(({ id }) => id === form.watch("innerModelId"))?.data.sizes ?? [];
  const models = (protectors.data?.rows ?? [])
    .filter(({ isArchived }) => !isArchived)
    .map(({ id, name }) => ({ value: id, label: name }));
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
  const failed = protectors.error ?? tasks.error ?? areas.error;
  return (
    <Form
      aria-label={i18n.t("Assign a protector")}
      onSubmit={form.handleSubmit(({ use, ...facts }) => {
        const [what, id = null] = use.split(" ");
        assign.mutate(
          {
            body: {
              ...facts,
              taskId: what === "task" ? id : null,
              areaId: what === "area" ? id : null,
            },
            key: key.current,
          },
          {
            onSuccess: onDone,
            onError: (error) => {
              if (!(error instanceof ApiError) || error.status !== 0) key.current = newChangeKey();
              showIssuesOn(form, i18n)(error);
            },
          },
        );
      })}
    >
      {failed && <p className="field-error">{problemText(i18n, failed)}</p>}
      <SelectField
        form={form}
        name="use"
        label={i18n.t("Worn")}
        choices={uses}
        note={i18n.t(
          "For a task or an area of its own, it takes the place of the one for everywhere.",
        )}
      />
      <SelectField
        form={form}
        name="innerModelId"
        label={i18n.t("Protector")}
        choices={models}
        emptyLabel={i18n.t("Choose one")}
      />
      <SelectField
        form={form}
        name="outerModelId"
        label={i18n.t("A second over it")}
        choices={models}
        emptyLabel={i18n.t("none")}
        isOptional
      />
      {sizes.length > 0 ? (
        <SelectField
          form={form}
          name="size"
          label={i18n.t("Size")}
          choices={sizes.map((size) => ({ value: size, label: size }))}
          emptyLabel={i18n.t("not said")}
          note={i18n.t("A fit of another size says nothing of this one.")}
          isOptional
        />
      ) : (
        <TextField form={form} name="size" label={i18n.t("Size")} isOptional />
      )}
      <NumberField
        form={form}
        name="audioDb"
        label={i18n.t("Radio or signal under it")}
        unit="dB(A)"
        note={i18n.t("Its level at the ear while worn; it adds to the noise that is left.")}
        isOptional
      />
      <DateField
        form={form}
        name="fromDate"
        label={i18n.t("From")}
        note={i18n.t("An open assignment of the same use ends the day before.")}
      />
      <DateField form={form} name="toDate" label={i18n.t("Until, and with")} isOptional />
      <FormProblem error={assign.error} />
      <FormActions>
        <SubmitButton isBusy={assign.isPending}>{i18n.t("Assign")}</SubmitButton>
        <Button onClick={onCancel}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
