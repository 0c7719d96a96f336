import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import { AreaInput, AreaView } from "../../../shared/schemas/site";
import { zoneWord } from "../../../shared/words/register-words";
import { CheckField, type Choice, RadioGroup, SelectField, TextField } from "../../components/form";
import { RecordForm } from "../../components/record-form";
import { areaQueries } from "./queries";

type View = z.infer<typeof AreaView>;

const toBody = ({ siteId, name, zone, isArchived }: View) => ({ siteId, name, zone, isArchived });

export function AreaForm({
  area,
  siteId,
  sites,
  onDone,
}: {
  area: View | null;
  siteId: string;
  sites: readonly Choice[];
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const zones = ["none", "single", "double"] as const;
  return (
    <RecordForm
      name={area ? i18n.t("Change {name}", { name: area.name }) : i18n.t("New area")}
      schema={AreaInput}
      viewSchema={AreaView}
      path="/areas"
      record={area}
      defaultValues={area ? toBody(area) : { siteId, name: "", zone: "none", isArchived: false }}
      toBody={toBody}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        { key: "zone", label: i18n.t("Protection zone"), show: ({ zone }) => zoneWord(i18n, zone) },
        {
          key: "isArchived",
          label: i18n.t("In use"),
          show: ({ isArchived }) => (isArchived ? i18n.t("no longer") : i18n.t("yes")),
        },
      ]}
      conflictTitle={i18n.t("Someone saved this area before you")}
      onSaved={() => {
        void client.invalidateQueries({ queryKey: areaQueries.all });
        onDone();
      }}
      onLeave={onDone}
    >
      {(form) => (
        <>
          {!area && sites.length > 1 && (
            <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
          )}
          <TextField form={form} name="name" label={i18n.t("Name")} />
          <RadioGroup
            form={form}
            name="zone"
            label={i18n.t("Protection zone")}
            choices={zones.map((zone) => ({ value: zone, label: zoneWord(i18n, zone) }))}
            note={i18n.t("In a zone a protector counts as worn whatever the level.")}
          />
          {area && (
            <CheckField
              form={form}
              name="isArchived"
              label={i18n.t("In use")}
              text={i18n.t("No longer offered for tasks")}
            />
          )}
        </>
      )}
    </RecordForm>
  );
}
