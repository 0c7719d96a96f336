import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { z } from "zod";
import { Size } from "../../../shared/schemas/fit";
import { StockMoveInput, type StockMoveView } from "../../../shared/schemas/stock";
import { Button } from "../../components/button";
import {
  type Choice,
  DateField,
  Form,
  FormActions,
  NumberField,
  RadioGroup,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useChangeKey } from "../../lib/change-key";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { references } from "../../lib/references";
import { useEnterStock } from "./queries";
import { partWord } from "./stock-words";

/** As it is filled in: a size that was emptied is none. */
const StockFields = StockMoveInput.safeExtend({
  size: z
    .string()
    .nullable()
    .transform((size) => size?.trim() || null)
    .pipe(Size.nullable()),
});

/** Something came in, was lost or damaged, or was counted. */
export function StockForm({
  siteId,
  sites,
  todayAt,
  onSaved,
  onLeave,
}: {
  siteId: string;
  sites: readonly Choice[];
  todayAt: (siteId: string) => string;
  onSaved: (move: z.infer<typeof StockMoveView>) => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const protectors = useQuery(references.protectors());
  const enter = useEnterStock();
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const form = useSchemaForm(StockFields, {
    keepAs: "stock",
    mode: "onSubmit",
    defaultValues: {
      siteId,
      kind: "received",
      part: "device",
      size: null,
      movedOn: todayAt(siteId),
      note: "",
    },
  });
  const modelId = form.watch("modelId");
  const sizes = protectors.data?.rows.find(({ id }) => id === modelId)?.data.sizes ?? [];
  const kind = form.watch("kind");
  return (
    <Form
      className="inset-form"
      aria-label={i18n.t("Enter stock")}
      onSubmit={form.handleSubmit((body) => {
        if (!begin()) return;
        enter.mutate(
          { body, key: changeKey.keyFor(body) },
          {
            onSuccess: (move) => {
              changeKey.forget();
              onSaved(move);
            },
            onError: showIssuesOn(form, i18n),
            onSettled: end,
          },
        );
      })}
    >
      {sites.length > 1 && (
        <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
      )}
      <RadioGroup
        form={form}
        name="kind"
        label={i18n.t("What happened")}
        choices={[
          { value: "received", label: i18n.t("Received") },
          { value: "lost", label: i18n.t("Lost") },
          { value: "damaged", label: i18n.t("Damaged") },
          {
            value: "counted",
            label: i18n.t("Counted"),
            note: i18n.t("What is on the shelf; the difference is entered."),
          },
        ]}
      />
      <SelectField
        form={form}
        name="modelId"
        label={i18n.t("Protector")}
        emptyLabel={i18n.t("Choose one")}
        choices={(protectors.data?.rows ?? [])
          .filter(({ isArchived }) => !isArchived)
          .map(({ id, name }) => ({ value: id, label: name }))}
      />
      <SelectField
        form={form}
        name="part"
        label={i18n.t("Which part")}
        choices={(["device", "cushions", "tips"] as const).map((part) => ({
          value: part,
          label: partWord(i18n, part),
        }))}
      />
      {sizes.length > 0 ? (
        <SelectField
          form={form}
          name="size"
          label={i18n.t("Size")}
          emptyLabel={i18n.t("one size")}
          choices={sizes.map((size) => ({ value: size, label: size }))}
          isOptional
        />
      ) : (
        <TextField form={form} name="size" label={i18n.t("Size")} isOptional />
      )}
      <NumberField
        form={form}
        name="quantity"
        label={kind === "counted" ? i18n.t("On the shelf") : i18n.t("How many")}
      />
      <DateField form={form} name="movedOn" label={i18n.t("Date")} />
      <TextAreaField form={form} name="note" label={i18n.t("Note")} rows={2} isOptional />
      <FormProblem error={enter.error} />
      <FormActions>
        <SubmitButton isBusy={enter.isPending}>{i18n.t("Save")}</SubmitButton>
        <Button onClick={onLeave}>{i18n.t("Leave it")}</Button>
      </FormActions>
    </Form>
  );
}
