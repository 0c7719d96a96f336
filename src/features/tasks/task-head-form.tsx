import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import type { z } from "zod";
import { TaskDetail, TaskInput } from "../../../shared/schemas/task";
import { gearWords } from "../../../shared/words/register-words";
import { CheckField, type Choice, SelectField, TextField } from "../../components/form";
import { GearField } from "../../components/gear-field";
import { RecordForm } from "../../components/record-form";
import { taskQueries } from "./queries";

type Detail = z.infer<typeof TaskDetail>;

/** A task's name and place. Its noise is a record of its own, with a date. */
export function TaskHeadForm({
  task,
  siteId,
  sites,
  areasOf,
  onSaved,
  onLeave,
}: {
  task: Detail | null;
  siteId: string;
  sites: readonly Choice[];
  areasOf: (siteId: string) => readonly Choice[];
  onSaved: (task: Detail) => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const client = useQueryClient();
  return (
    <RecordForm
      name={task ? i18n.t("Name and area") : i18n.t("New task")}
      schema={TaskInput}
      viewSchema={TaskDetail}
      path="/tasks"
      record={task}
      defaultValues={
        task
          ? {
              siteId: task.siteId,
              areaId: task.areaId,
              name: task.name,
              requiredGear: task.requiredGear,
              isArchived: task.isArchived,
            }
          : { siteId, areaId: null, name: "", requiredGear: [], isArchived: false }
      }
      toBody={({ siteId: site, areaId, name, requiredGear, isArchived }) => ({
        siteId: site,
        areaId,
        name,
        requiredGear,
        isArchived,
      })}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        {
          key: "areaId",
          label: i18n.t("Area"),
          show: (body) =>
            areasOf(body.siteId).find(({ value }) => value === body.areaId)?.label ??
            i18n.t("none"),
        },
        {
          key: "requiredGear",
          label: i18n.t("Asked for beside a protector"),
          show: ({ requiredGear }) => gearWords(i18n, requiredGear) ?? i18n.t("none"),
        },
        {
          key: "isArchived",
          label: i18n.t("In use"),
          show: ({ isArchived }) => (isArchived ? i18n.t("no longer") : i18n.t("yes")),
        },
      ]}
      conflictTitle={i18n.t("Someone saved this task before you")}
      onSaved={(view) => {
        client.setQueryData(taskQueries.one(view.id).queryKey, view);
        void client.invalidateQueries({ queryKey: taskQueries.all });
        onSaved(view);
      }}
      onLeave={onLeave}
    >
      {(form) => (
        <>
          {!task && sites.length > 1 && (
            <SelectField form={form} name="siteId" label={i18n.t("Site")} choices={sites} />
          )}
          <TextField form={form} name="name" label={i18n.t("Name")} />
          <SelectField
            form={form}
            name="areaId"
            label={i18n.t("Area")}
            choices={areasOf(form.watch("siteId"))}
            emptyLabel={i18n.t("None")}
            isOptional
          />
          <GearField
            form={form}
            name="requiredGear"
            label={i18n.t("Asked for beside a protector")}
            note={i18n.t("Protectors that don’t go with it are not offered for this task.")}
          />
          {task && (
            <CheckField
              form={form}
              name="isArchived"
              label={i18n.t("In use")}
              text={i18n.t("No longer offered when days are entered")}
            />
          )}
        </>
      )}
    </RecordForm>
  );
}
