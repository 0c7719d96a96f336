import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { get, type UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import { formatShortDate } from "../../../shared/format/date";
import { InstrumentInput, InstrumentView } from "../../../shared/schemas/run";
import { instrumentKindWord, settingsWords } from "../../../shared/words/register-words";
import { Button } from "../../components/button";
import {
  CheckField,
  type Choice,
  DateField,
  Field,
  SelectField,
  TextField,
} from "../../components/form";
import { TextButton } from "../../components/link";
import {
  COMMON_SETTINGS,
  isSameSettings,
  SettingsInput,
  type TypedSettings,
} from "../../components/meter-settings";
import { RecordForm } from "../../components/record-form";
import { useLocale } from "../../lib/i18n";
import { instrumentQueries } from "./queries";

type Input = z.input<typeof InstrumentInput>;
type Output = z.output<typeof InstrumentInput>;
type Form = UseFormReturn<Input, unknown, Output>;

const MOST = 8;

const toBody = ({ id: _, revision: __, can: ___, ...body }: InstrumentView): Output => body;

/** The settings under which this instrument's readings are usually taken: offered first where one is entered. */
function Presets({ form }: { form: Form }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const presets = (form.watch("presets") ?? []) as TypedSettings[];
  const put = (next: TypedSettings[]) =>
    form.setValue("presets", next as Input["presets"], {
      shouldDirty: true,
      shouldValidate: form.formState.isSubmitted,
    });
  const faults: unknown = get(form.formState.errors, "presets");
  const faultOf = (index: number): string | undefined => {
    const parts = Object.values((get(faults, String(index)) as object | undefined) ?? {});
    return parts.map((part) => (part as { message?: string })?.message).find(Boolean);
  };
  const unused = COMMON_SETTINGS.filter(
    (settings) => !presets.some((preset) => isSameSettings(settings, preset as typeof settings)),
  );
  return (
    <Field
      label={i18n.t("Settings presets")}
      isGroup
      isOptional
      error={
        typeof (faults as { message?: unknown })?.message === "string"
          ? String((faults as { message: string }).message)
          : undefined
      }
      note={i18n.t("A reading counts only for criteria with these settings.")}
    >
      {() => (
        <>
          <ul className="settings-list">
            {presets.map((settings, index) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: presets have no identity but their place
              <li key={index}>
                <SettingsInput
                  value={settings}
                  onValue={(value) =>
                    put(presets.map((before, at) => (at === index ? value : before)))
                  }
                />
                <TextButton
                  aria-label={i18n.t("Take preset {number} out", { number: index + 1 })}
                  onClick={() => put(presets.filter((_, at) => at !== index))}
                >
                  {i18n.t("Take out")}
                </TextButton>
                {faultOf(index) && <p className="field-error">{faultOf(index)}</p>}
              </li>
            ))}
          </ul>
          {presets.length < MOST && (
            <p className="mt-3 flex flex-wrap gap-x-4 gap-y-2">
              {unused.map((settings) => (
                <TextButton
                  key={settingsWords(i18n, settings, locale)}
                  onClick={() => put([...presets, settings])}
                >
                  {i18n.t("Add {settings}", { settings: settingsWords(i18n, settings, locale) })}
                </TextButton>
              ))}
              {unused.length === 0 && (
                <Button
                  onClick={() =>
                    put([
                      ...presets,
                      {
                        criterionLevelDb: null,
                        exchangeRateDb: 3,
                        thresholdDb: null,
                        weighting: "A",
                        response: "slow",
                      },
                    ])
                  }
                >
                  {i18n.t("Add other settings")}
                </Button>
              )}
            </p>
          )}
        </>
      )}
    </Field>
  );
}

export function InstrumentForm({
  instrument,
  siteId,
  sites,
  onDone,
}: {
  instrument: InstrumentView | null;
  siteId: string;
  sites: readonly Choice[];
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const kinds = InstrumentInput.shape.kind.options;
  return (
    <RecordForm
      name={
        instrument ? i18n.t("Change {name}", { name: instrument.name }) : i18n.t("New instrument")
      }
      schema={InstrumentInput}
      viewSchema={InstrumentView}
      path="/instruments"
      record={instrument}
      defaultValues={
        instrument
          ? toBody(instrument)
          : {
              siteId,
              kind: "dosimeter",
              class: "2",
              serialNumber: "",
              name: "",
              calibrationDueOn: null,
              presets: [],
              isArchived: false,
            }
      }
      toBody={toBody}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        { key: "kind", label: i18n.t("Kind"), show: ({ kind }) => instrumentKindWord(i18n, kind) },
        { key: "class", label: i18n.t("Class"), show: (body) => body.class },
        {
          key: "serialNumber",
          label: i18n.t("Serial number"),
          show: ({ serialNumber }) => serialNumber,
        },
        {
          key: "calibrationDueOn",
          label: i18n.t("Calibration due"),
          show: ({ calibrationDueOn }) =>
            calibrationDueOn ? formatShortDate(calibrationDueOn, locale) : i18n.t("not known"),
        },
        {
          key: "presets",
          label: i18n.t("Settings presets"),
          show: ({ presets }) =>
            presets.map((settings) => settingsWords(i18n, settings, locale)).join("; ") ||
            i18n.t("none"),
        },
        {
          key: "isArchived",
          label: i18n.t("In use"),
          show: ({ isArchived }) => (isArchived ? i18n.t("no longer") : i18n.t("yes")),
        },
      ]}
      conflictTitle={i18n.t("Someone saved this instrument before you")}
      onSaved={() => {
        void client.invalidateQueries({ queryKey: instrumentQueries.all });
        onDone();
      }}
      onLeave={onDone}
    >
      {(form) => (
        <>
          {sites.length > 1 && (
            <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
          )}
          <TextField form={form} name="name" label={i18n.t("Name")} />
          <SelectField
            form={form}
            name="kind"
            label={i18n.t("Kind")}
            choices={kinds.map((kind) => ({ value: kind, label: instrumentKindWord(i18n, kind) }))}
          />
          <SelectField
            form={form}
            name="class"
            label={i18n.t("Class")}
            choices={["1", "2"].map((value) => ({ value, label: value }))}
          />
          <TextField form={form} name="serialNumber" label={i18n.t("Serial number")} />
          <DateField
            form={form}
            name="calibrationDueOn"
            label={i18n.t("Calibration due")}
            isOptional
            note={i18n.t("In the laboratory. Empty: not known.")}
          />
          {form.watch("kind") !== "calibrator" && <Presets form={form} />}
          {instrument && (
            <CheckField
              form={form}
              name="isArchived"
              label={i18n.t("In use")}
              text={i18n.t("No longer offered for runs")}
            />
          )}
        </>
      )}
    </RecordForm>
  );
}
