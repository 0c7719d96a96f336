import { useLingui } from "@lingui/react";
import { z } from "zod";
import { IsoDate } from "../../../shared/schemas/common";
import type { MicrophoneCheckView } from "../../../shared/schemas/microphone-check";
import { Button } from "../../components/button";
import {
  type Choice,
  DateField,
  Form,
  FormActions,
  NumberField,
  SelectField,
  SubmitButton,
  showIssuesOn,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { useKeepCheck } from "./queries";

const Fields = z.object({
  testedOn: IsoDate,
  size: z.string().nullable(),
  needDb: z.number().min(0).max(80).nullable(),
  joinFitTestId: z.string().nullable(),
});

/** A check becomes a fit test: of its own, or the other ear of one that is on record. */
export function KeepCheckForm({
  checkId,
  today,
  sizes,
  needDb,
  others,
  isRated,
  hasActivePassed,
  onKept,
  onCancel,
}: {
  checkId: string;
  today: string;
  /** Of the model; empty: it has none. */
  sizes: readonly string[];
  /** What the worker's noise asks for, where it is known. */
  needDb: number | null;
  /** Tests of the same protector that lack this ear, each with its day. */
  others: readonly (Choice & { readonly testedOn: string })[];
  /** A rating was found; else only whether the active part does its work is kept. */
  isRated: boolean;
  hasActivePassed: boolean;
  onKept: (view: MicrophoneCheckView) => void;
  onCancel: () => void;
}) {
  const { i18n } = useLingui();
  const [first] = others;
  const form = useSchemaForm(Fields, {
    defaultValues: {
      testedOn: first?.testedOn ?? today,
      size: null,
      needDb: isRated ? needDb : null,
      joinFitTestId: first?.value ?? null,
    },
  });
  const keep = useKeepCheck(checkId);
  const joined = others.find(({ value }) => value === form.watch("joinFitTestId"));
  const submit = form.handleSubmit((filled) =>
    keep.mutate(
      { ...filled, testedOn: joined?.testedOn ?? filled.testedOn },
      { onSuccess: onKept, onError: showIssuesOn(form, i18n) },
    ),
  );
  return (
    <Form aria-label={i18n.t("Keep as a fit test")} onSubmit={submit}>
      {!isRated && (
        <p>
          {i18n.t(
            "Only the check of the active part is kept: no rating comes of it, and the fit that counts stays what it was.",
          )}
        </p>
      )}
      {hasActivePassed && !joined && (
        <p>
          {i18n.t(
            "Each cup cancels for itself: the active part counts once the other ear has passed as well.",
          )}
        </p>
      )}
      {others.length > 0 && (
        <SelectField
          form={form}
          name="joinFitTestId"
          label={i18n.t("Belongs to")}
          emptyLabel={i18n.t("a test of its own")}
          choices={others}
          isOptional
        />
      )}
      {!joined && (
        <>
          <DateField form={form} name="testedOn" label={i18n.t("Tested on")} />
          {sizes.length > 0 && (
            <SelectField
              form={form}
              name="size"
              label={i18n.t("Size")}
              emptyLabel={i18n.t("not said")}
              choices={sizes.map((size) => ({ value: size, label: size }))}
              isOptional
            />
          )}
          {isRated && (
            <NumberField
              form={form}
              name="needDb"
              label={i18n.t("Needed at this worker’s place")}
              unit="dB"
              note={i18n.t("What the fit has to reach. Empty: as at the fitting desk.")}
              isOptional
            />
          )}
        </>
      )}
      <FormProblem error={keep.error} />
      <FormActions>
        <SubmitButton isBusy={keep.isPending}>{i18n.t("Keep as a fit test")}</SubmitButton>
        <Button onClick={onCancel}>{i18n.t("Cancel")}</Button>
      </FormActions>
    </Form>
  );
}
