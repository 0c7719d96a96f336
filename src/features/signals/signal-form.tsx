import { useLingui } from "@lingui/react";
import { useQuery, useQueryClient } from "@tanstack/react-query";
import type { UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import { A_WEIGHTING_DB, weightedSumDb } from "../../../shared/acoustics/protection/octave-band";
import { formatLevel } from "../../../shared/format/level";
import { isSpectrum } from "../../../shared/schemas/level-doubts";
import { WarningSignalDetail, WarningSignalInput } from "../../../shared/schemas/warning-signal";
import { BandFields } from "../../components/band-fields";
import {
  CheckField,
  type Choice,
  SelectField,
  TextAreaField,
  TextField,
} from "../../components/form";
import { RecordForm } from "../../components/record-form";
import { useLocale } from "../../lib/i18n";
import { references } from "../../lib/references";
import { signalQueries } from "./queries";

type View = z.infer<typeof WarningSignalDetail>;

const toBody = (view: View): WarningSignalInput => ({
  siteId: view.siteId,
  areaId: view.areaId,
  name: view.name,
  meaning: view.meaning,
  octaveBandsDb: view.octaveBandsDb,
  isArchived: view.isArchived,
});

/** A signal, new or changed: what it says, where it sounds, and how loud it is by octave band at the worker's place. */
export function SignalForm({
  signal,
  sites,
  siteId,
  onSaved,
  onLeave,
}: {
  signal: View | null;
  sites: readonly Choice[];
  siteId: string;
  onSaved: (id: string) => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const bands = (values: readonly (number | null)[]) =>
    values.map((db) => formatLevel(db, locale)).join("  ");
  return (
    <RecordForm
      name={signal ? i18n.t("Change {name}", { name: signal.name }) : i18n.t("New signal")}
      schema={WarningSignalInput}
      viewSchema={WarningSignalDetail}
      path="/warning-signals"
      record={signal}
      defaultValues={
        signal ? toBody(signal) : { siteId, areaId: null, name: "", meaning: "", isArchived: false }
      }
      toBody={toBody}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        { key: "meaning", label: i18n.t("What it means"), show: ({ meaning }) => meaning },
        {
          key: "octaveBandsDb",
          label: i18n.t("Octave band level"),
          show: ({ octaveBandsDb }) => bands(octaveBandsDb),
        },
        {
          key: "isArchived",
          label: i18n.t("In use"),
          show: ({ isArchived }) => (isArchived ? i18n.t("no longer") : i18n.t("yes")),
        },
      ]}
      conflictTitle={i18n.t("Someone saved this signal before you")}
      onSaved={(view) => {
        client.setQueryData(signalQueries.one(view.id).queryKey, view);
        void client.invalidateQueries({ queryKey: signalQueries.all });
        onSaved(view.id);
      }}
      onLeave={onLeave}
    >
      {(form) => <SignalFields form={form} isNew={signal === null} sites={sites} />}
    </RecordForm>
  );
}

function SignalFields({
  form,
  isNew,
  sites,
}: {
  form: UseFormReturn<z.input<typeof WarningSignalInput>, unknown, WarningSignalInput>;
  isNew: boolean;
  sites: readonly Choice[];
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const areas = useQuery(references.areas(form.watch("siteId")));
  const chosen = form.watch("areaId");
  const spectrum: unknown = form.watch("octaveBandsDb");
  return (
    <>
      {isNew && sites.length > 1 && (
        <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
      )}
      <TextField form={form} name="name" label={i18n.t("Name")} />
      <TextAreaField
        form={form}
        name="meaning"
        label={i18n.t("What it means")}
        note={i18n.t("What somebody who hears it has to do.")}
        rows={2}
        isOptional
      />
      <SelectField
        form={form}
        name="areaId"
        label={i18n.t("Area")}
        emptyLabel={i18n.t("The whole site")}
        isOptional
        choices={(areas.data?.rows ?? [])
          .filter(({ id, isArchived }) => !isArchived || id === chosen)
          .map(({ id, name }) => ({ value: id, label: name }))}
      />
      <BandFields
        form={form}
        name="octaveBandsDb"
        label={i18n.t("Level by octave band")}
        rows={[{ label: i18n.t("Octave band level") }]}
        thirds="sum"
        isOptional={false}
        note={
          isSpectrum(spectrum)
            ? i18n.t("Unweighted, dB, at the worker’s place. A-weighted sum {sum} dB(A).", {
                sum: formatLevel(weightedSumDb(spectrum, A_WEIGHTING_DB), locale),
              })
            : i18n.t(
                "Unweighted, dB, at the worker’s place. Eight values can be pasted into any field.",
              )
        }
      />
      {!isNew && (
        <CheckField
          form={form}
          name="isArchived"
          label={i18n.t("In use")}
          text={i18n.t("No longer sounded here")}
        />
      )}
    </>
  );
}
