import { useLingui } from "@lingui/react";
import type { UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import { US_LABEL_HZ } from "../../../shared/acoustics/types";
import type { NewProtectorInput } from "../../../shared/schemas/protector";
import { BandFields } from "../../components/band-fields";
import { DateField, Field, NumberField, TextAreaField } from "../../components/form";
import { Disclosure } from "./disclosure";
import { mayBeActive } from "./kinds";
import { LabelFields } from "./label-fields";
import { hasTestData, labelRatings } from "./label-ratings";
import { RatingsTable } from "./ratings-table";
import { SubjectsField } from "./subjects-field";
import { typedFacts } from "./typed-facts";
import { UseFields } from "./use-fields";
import "../../styles/protectors.css";

export type ProtectorForm = UseFormReturn<
  z.input<typeof NewProtectorInput>,
  unknown,
  z.output<typeof NewProtectorInput>
>;

const NO_ACTIVE = {
  attenuationDb: null,
  delayS: null,
  gain: null,
  maximumDb: null,
  bandwidthHz: null,
  saturatesAboveDb: null,
  batteryMin: null,
};

/** Label and test data as they are typed, one beside the other. */
function LiveRatings({ form }: { form: ProtectorForm }) {
  const { i18n } = useLingui();
  const ratings = labelRatings(typedFacts(form.watch("data")));
  if (!ratings.some(hasTestData)) return null;
  return (
    <section className="live-ratings" aria-label={i18n.t("The label beside its test data")}>
      <RatingsTable ratings={ratings} auClass={form.watch("data.auClass") ?? null} />
    </section>
  );
}

/** The electronic part: from its test report, or from delay and gain. */
function ActiveFields({ form }: { form: ProtectorForm }) {
  const { i18n } = useLingui();
  const [kind, active] = form.watch(["kind", "data.active"]);
  if (!mayBeActive(kind) && !active) return null;
  return (
    <>
      <Field
        label={i18n.t("Active part")}
        error={undefined}
        note={
          !active && (kind === "active-earmuff" || kind === "active-plug")
            ? i18n.t("Without it the device counts as its cup or plug alone.")
            : undefined
        }
        isGroup
      >
        {() => (
          <label className="choice">
            <input
              type="checkbox"
              checked={active !== null && active !== undefined}
              onChange={(event) =>
                form.setValue("data.active", event.target.checked ? NO_ACTIVE : null, {
                  shouldDirty: true,
                })
              }
            />
            <span>{i18n.t("It cancels noise electronically")}</span>
          </label>
        )}
      </Field>
      {active && (
        <>
          <BandFields
            form={form}
            name="data.active.attenuationDb"
            label={i18n.t("Active attenuation, dB")}
            rows={[{ label: i18n.t("Active attenuation") }]}
            thirds="refuse"
            note={i18n.t(
              "From its own test report; negative where it adds noise. Without a report: delay and gain.",
            )}
          />
          <NumberField
            form={form}
            name="data.active.delayS"
            label={i18n.t("Delay")}
            unit="µs"
            factor={1e6}
            isOptional
            note={i18n.t("Of the canceller.")}
          />
          <NumberField
            form={form}
            name="data.active.gain"
            label={i18n.t("Gain")}
            isOptional
            note={i18n.t("1 is perfect.")}
          />
          <NumberField
            form={form}
            name="data.active.maximumDb"
            label={i18n.t("At most")}
            unit="dB"
            isOptional
          />
          <NumberField
            form={form}
            name="data.active.bandwidthHz"
            label={i18n.t("Works up to")}
            unit="Hz"
            isOptional
          />
          <NumberField
            form={form}
            name="data.active.saturatesAboveDb"
            label={i18n.t("Saturates above")}
            unit="dB(A)"
            isOptional
          />
          <NumberField
            form={form}
            name="data.active.batteryMin"
            label={i18n.t("Battery lasts")}
            unit="h"
            factor={1 / 60}
            isOptional
          />
        </>
      )}
    </>
  );
}

/** Takes whoever sent the form to the first thing that is wrong with it. */
export function focusFirstFault(formName: string): void {
  // Folded parts open as the form is drawn anew.
  requestAnimationFrame(() =>
    document
      .querySelector<HTMLElement>(`form[aria-label="${formName}"] [aria-invalid="true"]`)
      ?.focus(),
  );
}

/** What certificate and test reports say of a model, from a date on. */
export function ProtectorDataFields({
  form,
  needsReason,
}: {
  form: ProtectorForm;
  needsReason: boolean;
}) {
  const { i18n } = useLingui();
  const [usLabel, subjects, sizes, worksWith, cushions, tips] = form.watch([
    "data.usLabel",
    "data.subjectsDb",
    "data.sizes",
    "data.worksWith",
    "data.cushionsEveryDays",
    "data.tipsEveryDays",
  ]);
  const faults = form.formState.errors.data;
  const usesStated =
    (sizes?.length ?? 0) > 0 ||
    Object.values(worksWith ?? {}).some((value) => value !== null) ||
    cushions != null ||
    tips != null;
  return (
    <>
      <LabelFields form={form} />
      <BandFields
        form={form}
        name="data.bands"
        label={i18n.t("By octave band, dB")}
        rows={[
          { key: "meanDb", label: i18n.t("Mean attenuation") },
          { key: "sdDb", label: i18n.t("Standard deviation") },
        ]}
        thirds="centre"
        note={i18n.t(
          "63 Hz may stay empty, the others not. Eight values can be pasted into any cell.",
        )}
      />
      <Disclosure
        title={i18n.t("US test data by third-octave")}
        stated={usLabel ? i18n.t("stated") : null}
        hasFault={faults?.usLabel !== undefined}
      >
        <BandFields
          form={form}
          name="data.usLabel"
          bandsHz={US_LABEL_HZ}
          label={i18n.t("At the label’s frequencies, dB")}
          rows={[
            { key: "meanDb", label: i18n.t("Mean attenuation") },
            { key: "sdDb", label: i18n.t("Standard deviation") },
          ]}
          thirds="centre"
          note={i18n.t(
            "All nine, with 3150 and 6300 Hz: without these two the US number can’t be recomputed.",
          )}
        />
      </Disclosure>
      <Disclosure
        title={i18n.t("Single test subjects")}
        stated={subjects ? i18n.t("stated") : null}
        hasFault={faults?.subjectsDb !== undefined}
      >
        <SubjectsField form={form} />
      </Disclosure>
      <LiveRatings form={form} />
      <ActiveFields form={form} />
      <Disclosure
        title={i18n.t("Sizes, what it goes with, replacement")}
        stated={usesStated ? i18n.t("stated") : null}
        hasFault={[
          faults?.sizes,
          faults?.worksWith,
          faults?.cushionsEveryDays,
          faults?.tipsEveryDays,
        ].some((fault) => fault !== undefined)}
      >
        <UseFields form={form} />
      </Disclosure>
      <DateField
        form={form}
        name="data.effectiveFrom"
        label={i18n.t("Holds from")}
        note={
          needsReason
            ? i18n.t("It may lie back: who wore it since then is judged again.")
            : undefined
        }
      />
      {needsReason && (
        <TextAreaField form={form} name="data.reason" label={i18n.t("Reason")} rows={2} />
      )}
    </>
  );
}
