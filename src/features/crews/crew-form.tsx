import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { formatDuration } from "../../../shared/format/duration";
import { CrewDetail, CrewInput } from "../../../shared/schemas/crew";
import {
  CheckField,
  type Choice,
  DurationField,
  SelectField,
  TextField,
  TimeField,
} from "../../components/form";
import { RecordForm } from "../../components/record-form";
import { useLocale } from "../../lib/i18n";
import { crewQueries } from "./queries";

const toBody = ({
  siteId,
  name,
  usualStart,
  usualLengthMin,
  isArchived,
}: CrewDetail): CrewInput => ({
  siteId,
  name,
  usualStart,
  usualLengthMin,
  isArchived,
});

export function CrewForm({
  crew,
  siteId,
  sites,
  onSaved,
  onLeave,
}: {
  crew: CrewDetail | null;
  siteId: string;
  sites: readonly Choice[];
  onSaved: (crew: CrewDetail) => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  return (
    <RecordForm
      name={crew ? i18n.t("Change {name}", { name: crew.name }) : i18n.t("New crew")}
      schema={CrewInput}
      viewSchema={CrewDetail}
      path="/crews"
      record={crew}
      defaultValues={
        crew
          ? toBody(crew)
          : { siteId, name: "", usualStart: "06:00", usualLengthMin: 480, isArchived: false }
      }
      toBody={toBody}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        { key: "usualStart", label: i18n.t("Usual start"), show: ({ usualStart }) => usualStart },
        {
          key: "usualLengthMin",
          label: i18n.t("Usual length"),
          show: ({ usualLengthMin }) => formatDuration(usualLengthMin, locale),
        },
        {
          key: "isArchived",
          label: i18n.t("In use"),
          show: ({ isArchived }) => (isArchived ? i18n.t("no longer") : i18n.t("yes")),
        },
      ]}
      conflictTitle={i18n.t("Someone saved this crew before you")}
      onSaved={(view) => {
        client.setQueryData(crewQueries.one(view.id).queryKey, view);
        void client.invalidateQueries({ queryKey: crewQueries.all });
        onSaved(view);
      }}
      onLeave={onLeave}
    >
      {(form) => (
        <>
          {!crew && sites.length > 1 && (
            <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
          )}
          <TextField form={form} name="name" label={i18n.t("Name")} />
          <TimeField
            form={form}
            name="usualStart"
            label={i18n.t("Usual start")}
            note={i18n.t("As the site’s clock shows it.")}
          />
          <DurationField
            form={form}
            name="usualLengthMin"
            label={i18n.t("Usual length")}
            unit="min"
            note={i18n.t("450, 7:30 or 7.5h.")}
          />
          {crew && (
            <CheckField
              form={form}
              name="isArchived"
              label={i18n.t("In use")}
              text={i18n.t("No days are entered for it any more")}
            />
          )}
        </>
      )}
    </RecordForm>
  );
}
