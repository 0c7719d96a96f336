import { useLingui } from "@lingui/react";
import type { CSSProperties, ReactNode } from "react";
import { get } from "react-hook-form";
import { NO_FIGURE } from "../../../shared/format/number";
import { Field } from "../../components/form";
import { NumberInput, type Typed } from "../../components/number-input";
import type { ProtectorForm } from "./data-fields";

type NumberName = "usRatingDb" | "snrDb" | "hDb" | "mDb" | "lDb" | "slc80Db";

interface Cell {
  readonly key: string;
  readonly label: string;
  readonly value: Typed | undefined;
  readonly onValue: (value: Typed) => void;
  /** Whether it is looked at when it is left: what belongs to fields still to come is not. */
  readonly isLookedAt?: boolean;
}

/** Figures of one label side by side, as a label has them. */
function LabelCells({
  form,
  label,
  cells,
  further,
  note,
  children,
}: {
  form: ProtectorForm;
  label: string;
  cells: readonly Cell[];
  /** Of what stands behind the figures and is none itself: `children`. */
  further?: { key: string; label: string };
  note?: string;
  children?: ReactNode;
}) {
  const messageOf = (key: string): string | undefined =>
    (get(form.formState.errors, `data.${key}`) as { message?: string } | undefined)?.message;
  const messages = [...cells, ...(further ? [further] : [])].flatMap(({ key, label: name }) => {
    const message = messageOf(key);
    return message ? [`${name}: ${message}`] : [];
  });
  return (
    <Field
      label={label}
      isGroup
      isOptional
      note={note}
      error={messages.length > 0 ? messages.join(" ") : undefined}
    >
      {(wires) => (
        <div
          className="label-cells"
          style={{ "--cells": cells.length + (further ? 1 : 0) } as CSSProperties}
        >
          {cells.map(({ key, label: name, value, onValue }) => (
            <div key={key}>
              <span aria-hidden="true">{name}</span>
              <NumberInput
                className="input band-input"
                aria-label={`${name}, dB`}
                aria-describedby={wires["aria-describedby"]}
                aria-invalid={messageOf(key) ? true : undefined}
                value={value}
                onValue={onValue}
                onBlur={() => {
                  for (const one of cells)
                    if (one.isLookedAt) void form.trigger(`data.${one.key}` as "data.snrDb");
                }}
              />
            </div>
          ))}
          {further && (
            <div>
              <span aria-hidden="true">{further.label}</span>
              {children}
            </div>
          )}
        </div>
      )}
    </Field>
  );
}

/** What stands on the label, by the label's own country: single numbers, the percentile pair, the class. */
export function LabelFields({ form }: { form: ProtectorForm }) {
  const { i18n } = useLingui();
  const touched = { shouldDirty: true, shouldValidate: form.formState.isSubmitted };
  const number = (key: NumberName, label: string): Cell => ({
    key,
    label,
    value: form.watch(`data.${key}`),
    onValue: (value) => form.setValue(`data.${key}`, value as number | null, touched),
  });
  const pair = form.watch("data.percentile") ?? { mostDb: null, fewDb: null };
  const percentile = (key: "mostDb" | "fewDb", label: string): Cell => ({
    key: `percentile.${key}`,
    label,
    value: pair[key],
    onValue: (value) => {
      const next = { ...pair, [key]: value };
      const isEmpty = next.mostDb === null && next.fewDb === null;
      form.setValue("data.percentile", isEmpty ? null : (next as never), touched);
    },
  });
  const auClass = form.watch("data.auClass") ?? null;
  return (
    <>
      <LabelCells
        form={form}
        label={i18n.t("European label, dB")}
        cells={[
          { ...number("snrDb", i18n.t("SNR")), isLookedAt: true },
          number("hDb", i18n.t("H")),
          number("mDb", i18n.t("M")),
          number("lDb", i18n.t("L")),
        ]}
      />
      <LabelCells
        form={form}
        label={i18n.t("US label, dB")}
        cells={[
          number("usRatingDb", i18n.t("US number")),
          percentile("mostDb", i18n.t("Most users")),
          {
            ...percentile("fewDb", i18n.t("Few users")),
            isLookedAt: pair.mostDb !== null && pair.fewDb !== null,
          },
        ]}
        note={i18n.t(
          "The percentile pair as the label prints it: what most users reach, and what only few reach.",
        )}
      />
      <LabelCells
        form={form}
        label={i18n.t("Australian label")}
        cells={[number("slc80Db", i18n.t("SLC80"))]}
        further={{ key: "auClass", label: i18n.t("Class") }}
      >
        <select
          className="input"
          aria-label={i18n.t("Australian class")}
          value={auClass ?? ""}
          onChange={(event) =>
            form.setValue(
              "data.auClass",
              event.target.value === "" ? null : Number(event.target.value),
              touched,
            )
          }
        >
          <option value="">{NO_FIGURE}</option>
          {[1, 2, 3, 4, 5].map((one) => (
            <option key={one}>{one}</option>
          ))}
        </select>
      </LabelCells>
    </>
  );
}
