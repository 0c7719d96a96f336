import { useLingui } from "@lingui/react";
import { useQuery, useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import { formatDate } from "../../../shared/format/date";
import {
  CombinationInput,
  CombinationList,
  type CombinationView,
  type ProtectorView,
} from "../../../shared/schemas/protector";
import { BandFields } from "../../components/band-fields";
import {
  DateField,
  Field,
  Form,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { LookActions, ReviewedChange, useReviewedChange } from "../../components/reviewed-change";
import { useLocale } from "../../lib/i18n";
import { hasTips } from "./kinds";
import { protectorQueries } from "./queries";

const NOT_YET = [null, null, null, null, null, null, null, null];

/** A plug goes under a cup. */
const goesInside = (kind: ProtectorView["kind"]): boolean => hasTips(kind);

/** Test data of two worn together, from a date on: filled in, looked at with who changes verdict, then saved. */
export function CombinationForm({
  protector,
  known,
  from,
  today,
  onLeave,
  onSaved,
}: {
  protector: Pick<ProtectorView, "id" | "name" | "kind">;
  /** Data of its pairs so far. */
  known: readonly CombinationView[];
  /** The data that these follow; null: of a new pair. */
  from: CombinationView | null;
  today: string;
  onLeave: () => void;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const register = useQuery(protectorQueries.list());
  const isThisInside = goesInside(protector.kind);
  const form = useSchemaForm(CombinationInput, {
    keepAs: `together ${from?.id ?? "new"}`,
    defaultValues: from
      ? {
          innerModelId: from.innerModelId,
          outerModelId: from.outerModelId,
          effectiveFrom: today,
          bands: from.bands,
          reason: null,
        }
      : {
          innerModelId: isThisInside ? protector.id : "",
          outerModelId: isThisInside ? "" : protector.id,
          effectiveFrom: today,
          bands: { meanDb: NOT_YET, sdDb: NOT_YET } as never,
          reason: null,
        },
  });
  const change = useReviewedChange<CombinationInput, z.infer<typeof CombinationList>>({
    path: "/protector-combinations",
    schema: CombinationList,
    onError: showIssuesOn(form, i18n),
    onSaved: () => {
      void client.invalidateQueries({ queryKey: protectorQueries.all });
      onSaved();
    },
  });
  const [innerModelId, outerModelId] = form.watch(["innerModelId", "outerModelId"]);
  const isInner = innerModelId === protector.id;
  const partnerId = isInner ? outerModelId : innerModelId;
  const put = (inner: string, outer: string) => {
    form.setValue("innerModelId", inner, { shouldDirty: true });
    form.setValue("outerModelId", outer, { shouldDirty: true });
    if (form.formState.isSubmitted) void form.trigger(["innerModelId", "outerModelId"]);
  };
  const choices = (register.data?.rows ?? []).filter(
    ({ id, isArchived }) => id !== protector.id && (!isArchived || id === partnerId),
  );
  const needsReason = known.some(
    (one) => one.innerModelId === innerModelId && one.outerModelId === outerModelId,
  );
  const { errors } = form.formState;
  const partnerError = (isInner ? errors.outerModelId : errors.innerModelId) ?? null;
  const nameOf = (id: string) =>
    id === protector.id ? protector.name : (choices.find((one) => one.id === id)?.name ?? "");
  const look = form.handleSubmit((body) => {
    if (needsReason && body.reason === null) {
      form.setError(
        "reason",
        {
          type: "reason-needed",
          message: i18n.t("A reason is needed: what is there already changes."),
        },
        { shouldFocus: true },
      );
      return;
    }
    change.look(body);
  });
  return (
    <ReviewedChange
      change={change}
      what={(body) =>
        i18n.t("{inner} under {outer}: test data from {date} on.", {
          inner: nameOf(body.innerModelId),
          outer: nameOf(body.outerModelId),
          date: formatDate(body.effectiveFrom, locale),
        })
      }
    >
      <Form className="section-form" aria-label={i18n.t("Worn together")} onSubmit={look}>
        <Field
          label={i18n.t("Together with")}
          isReadOnly={from !== null}
          error={
            partnerError === null
              ? undefined
              : partnerError.type === "invalid_format"
                ? i18n.t("Choose the other protector.")
                : partnerError.message
          }
        >
          {({ readOnly, ...wires }) => (
            <select
              {...wires}
              className="input"
              disabled={readOnly}
              value={partnerId}
              onChange={(event) => {
                const chosen = choices.find(({ id }) => id === event.target.value);
                const isUnder = chosen
                  ? goesInside(protector.kind) || !goesInside(chosen.kind)
                  : isInner;
                put(
                  isUnder ? protector.id : event.target.value,
                  isUnder ? event.target.value : protector.id,
                );
              }}
            >
              <option value="">{i18n.t("Choose a protector")}</option>
              {choices.map(({ id, name }) => (
                <option key={id} value={id}>
                  {name}
                </option>
              ))}
            </select>
          )}
        </Field>
        <Field label={i18n.t("Next to the ear")} isGroup error={undefined}>
          {() =>
            [protector.id, partnerId]
              .filter((id) => id !== "")
              .map((id) => (
                <label key={id} className="choice">
                  <input
                    type="radio"
                    name="next-to-the-ear"
                    checked={innerModelId === id}
                    disabled={from !== null}
                    onChange={() => put(id, id === protector.id ? partnerId : protector.id)}
                  />
                  <span>{nameOf(id)}</span>
                </label>
              ))
          }
        </Field>
        <BandFields
          form={form}
          name="bands"
          label={i18n.t("Of both together, dB")}
          isOptional={false}
          rows={[
            { key: "meanDb", label: i18n.t("Mean attenuation") },
            { key: "sdDb", label: i18n.t("Standard deviation") },
          ]}
          thirds="centre"
          note={i18n.t(
            "As tested on both at once: the sum of two single attenuations is more than anybody gets.",
          )}
        />
        <DateField
          form={form}
          name="effectiveFrom"
          label={i18n.t("Holds from")}
          note={i18n.t("It may lie back: who wore both since then is judged again.")}
        />
        {needsReason && (
          <TextAreaField form={form} name="reason" label={i18n.t("Reason")} rows={2} />
        )}
        <LookActions preview={change.preview} onLeave={onLeave} />
      </Form>
    </ReviewedChange>
  );
}
