import { useLingui } from "@lingui/react";
import { useState } from "react";
import { z } from "zod";
import { isWornInside, isWornOver } from "../../../shared/acoustics/protection/choose-protector";
import type { OctaveBandValues } from "../../../shared/acoustics/types";
import type { PlanChange, TrySubject } from "../../../shared/schemas/plan";
import { BandFields } from "../../components/band-fields";
import { Button } from "../../components/button";
import { FilterSelect } from "../../components/filter-row";
import {
  type Choice,
  DurationField,
  Form,
  FormActions,
  NumberField,
  SelectField,
  SubmitButton,
  useSchemaForm,
} from "../../components/form";
import { CHANGE_KINDS, changeKindWord } from "./change-words";

interface Props {
  subject: TrySubject;
  onAdd: (change: PlanChange) => void;
}

/** One more thing done otherwise. */
export function ChangeForm({ onLeave, ...props }: Props & { onLeave: () => void }) {
  const { i18n } = useLingui();
  const [kind, setKind] = useState<PlanChange["kind"]>("noise");
  const kinds = CHANGE_KINDS.filter(
    (one) => one !== "rotation" || props.subject.workers.length > 1,
  );
  return (
    <div className="change-form">
      <FilterSelect
        label={i18n.t("What changes")}
        value={kind}
        choices={kinds.map((value) => ({ value, label: changeKindWord(i18n, value) }))}
        onChange={(value) => setKind(value as PlanChange["kind"])}
      />
      {kind === "noise" && <NoiseForm {...props} onLeave={onLeave} />}
      {kind === "duration" && <DurationForm {...props} onLeave={onLeave} />}
      {kind === "rotation" && <RotationForm {...props} onLeave={onLeave} />}
      {kind === "protector" && <ProtectorForm {...props} onLeave={onLeave} />}
      {kind === "wearing" && <WearingForm {...props} onLeave={onLeave} />}
    </div>
  );
}

type PartProps = Props & { onLeave: () => void };

function Actions({ onLeave }: { onLeave: () => void }) {
  const { i18n } = useLingui();
  return (
    <FormActions>
      <SubmitButton>{i18n.t("Try it")}</SubmitButton>
      <Button onClick={onLeave}>{i18n.t("Leave it")}</Button>
    </FormActions>
  );
}

/** Tasks of the tried days, the loudest first; then every other of the site. */
function taskChoices({ tasks, workers }: TrySubject, isOwnOnly = true): Choice[] {
  const own = new Set(workers.flatMap((worker) => worker.tasks.map(({ taskId }) => taskId)));
  return tasks
    .filter(({ id }) => !isOwnOnly || own.has(id))
    .toSorted(
      (a, b) =>
        Number(own.has(b.id)) - Number(own.has(a.id)) ||
        (b.level?.levelDb ?? 0) - (a.level?.levelDb ?? 0),
    )
    .map(({ id, name }) => ({ value: id, label: name }));
}

const NoiseFields = z
  .object({
    taskId: z.uuid(),
    byDb: z.number().min(-20).max(60).nullable(),
    bandsDb: z.array(z.number().min(-20).max(60).nullable()).length(8).nullable(),
  })
  .check((context) => {
    const { byDb, bandsDb } = context.value;
    if ((byDb === null) === (bandsDb === null))
      context.issues.push({
        code: "custom",
        input: byDb,
        path: ["byDb"],
        params: { code: "flat-or-bands" },
      });
  });

function NoiseForm({ subject, onAdd, onLeave }: PartProps) {
  const { i18n } = useLingui();
  const tasks = taskChoices(subject);
  const form = useSchemaForm(NoiseFields, {
    keepAs: "noise",
    defaultValues: { taskId: tasks[0]?.value ?? "", byDb: null, bandsDb: null },
  });
  const chosen = form.watch("taskId");
  const hasBands = subject.tasks.find(({ id }) => id === chosen)?.level?.octaveBandsDb != null;
  return (
    <Form
      aria-label={i18n.t("Less noise at a source")}
      onSubmit={form.handleSubmit(({ taskId, byDb, bandsDb }) =>
        onAdd({
          kind: "noise",
          taskId,
          byDb,
          bandsDb: bandsDb && (bandsDb.map((band) => band ?? 0) as unknown as OctaveBandValues),
        }),
      )}
    >
      <SelectField form={form} name="taskId" label={i18n.t("Task")} choices={tasks} />
      <NumberField
        form={form}
        name="byDb"
        label={i18n.t("Quieter by")}
        unit="dB"
        note={i18n.t(
          "Peaks stay as they were measured: what this does to blows shows only when it is measured.",
        )}
      />
      {hasBands && (
        <BandFields
          form={form}
          name="bandsDb"
          label={i18n.t("or by octave band, dB")}
          rows={[{ label: i18n.t("Quieter by") }]}
          thirds="refuse"
        />
      )}
      <Actions onLeave={onLeave} />
    </Form>
  );
}

const DurationFields = z
  .object({
    taskId: z.uuid(),
    durationMin: z.number().min(0).max(1440),
    otherTaskId: z.uuid(),
  })
  .check(otherTask);

function otherTask(context: z.core.ParsePayload<{ taskId: string; otherTaskId: string }>): void {
  if (context.value.taskId === context.value.otherTaskId)
    context.issues.push({
      code: "custom",
      input: context.value.otherTaskId,
      path: ["otherTaskId"],
      params: { code: "task-twice" },
    });
}

function DurationForm({ subject, onAdd, onLeave }: PartProps) {
  const { i18n } = useLingui();
  const tasks = taskChoices(subject);
  const form = useSchemaForm(DurationFields, {
    keepAs: "duration",
    defaultValues: {
      taskId: tasks[0]?.value ?? "",
      otherTaskId: tasks.at(-1)?.value ?? "",
    },
  });
  return (
    <Form
      aria-label={i18n.t("A shorter or longer task")}
      onSubmit={form.handleSubmit((fields) => onAdd({ kind: "duration", ...fields }))}
    >
      <SelectField form={form} name="taskId" label={i18n.t("Task")} choices={tasks} />
      <DurationField
        form={form}
        name="durationMin"
        label={i18n.t("From now on")}
        unit={i18n.t("min a shift")}
      />
      <SelectField
        form={form}
        name="otherTaskId"
        label={i18n.t("The difference goes to")}
        choices={taskChoices(subject, false)}
      />
      <Actions onLeave={onLeave} />
    </Form>
  );
}

const RotationFields = z
  .object({
    workerId: z.uuid(),
    taskId: z.uuid(),
    minutes: z.number().min(1).max(1440),
    otherWorkerId: z.uuid(),
    otherTaskId: z.uuid(),
  })
  .check(otherTask)
  .check((context) => {
    if (context.value.workerId === context.value.otherWorkerId)
      context.issues.push({
        code: "custom",
        input: context.value.otherWorkerId,
        path: ["otherWorkerId"],
        params: { code: "worker-twice" },
      });
  });

function RotationForm({ subject, onAdd, onLeave }: PartProps) {
  const { i18n } = useLingui();
  const tasks = taskChoices(subject);
  const workers = subject.workers.map(({ id, name }) => ({ value: id, label: name }));
  const form = useSchemaForm(RotationFields, {
    keepAs: "rotation",
    defaultValues: {
      workerId: workers[0]?.value ?? "",
      taskId: tasks[0]?.value ?? "",
      otherWorkerId: workers[1]?.value ?? "",
      otherTaskId: tasks.at(-1)?.value ?? "",
    },
  });
  return (
    <Form
      aria-label={i18n.t("Two people share tasks")}
      onSubmit={form.handleSubmit((fields) => onAdd({ kind: "rotation", ...fields }))}
    >
      <SelectField form={form} name="workerId" label={i18n.t("Who gives")} choices={workers} />
      <DurationField form={form} name="minutes" label={i18n.t("How long")} unit={i18n.t("min")} />
      <SelectField form={form} name="taskId" label={i18n.t("of the task")} choices={tasks} />
      <SelectField form={form} name="otherWorkerId" label={i18n.t("to whom")} choices={workers} />
      <SelectField
        form={form}
        name="otherTaskId"
        label={i18n.t("and takes as much of")}
        choices={taskChoices(subject)}
      />
      <Actions onLeave={onLeave} />
    </Form>
  );
}

const EVERYWHERE = "everywhere";
const EVERYBODY = "everybody";

const ProtectorFields = z.object({
  use: z.union([z.literal(EVERYWHERE), z.uuid()]),
  innerModelId: z.uuid(),
  outerModelId: z.uuid().nullable(),
  who: z.union([z.literal(EVERYBODY), z.uuid()]),
});

function ProtectorForm({ subject, onAdd, onLeave }: PartProps) {
  const { i18n } = useLingui();
  const named = ({ modelId, name }: TrySubject["models"][number]) => ({
    value: modelId,
    label: name,
  });
  const models = subject.models.toSorted((a, b) => a.name.localeCompare(b.name));
  const form = useSchemaForm(ProtectorFields, {
    keepAs: "protector",
    defaultValues: {
      use: EVERYWHERE,
      innerModelId: models[0]?.modelId ?? "",
      outerModelId: null,
      who: EVERYBODY,
    },
  });
  const inner = models.find(({ modelId }) => modelId === form.watch("innerModelId"));
  const mayTakeOuter = inner !== undefined && isWornInside(inner.kind);
  return (
    <Form
      aria-label={i18n.t("Another protector")}
      onSubmit={form.handleSubmit(({ use, who, innerModelId, outerModelId }) =>
        onAdd({
          kind: "protector",
          taskId: use === EVERYWHERE ? null : use,
          innerModelId,
          outerModelId: mayTakeOuter ? outerModelId : null,
          workerIds: who === EVERYBODY ? null : [who],
        }),
      )}
    >
      <SelectField
        form={form}
        name="innerModelId"
        label={i18n.t("Protector")}
        choices={models.map(named)}
      />
      {mayTakeOuter && (
        <SelectField
          form={form}
          name="outerModelId"
          label={i18n.t("with, over it")}
          emptyLabel={i18n.t("nothing")}
          choices={models.filter(({ kind }) => isWornOver(kind)).map(named)}
        />
      )}
      <SelectField
        form={form}
        name="use"
        label={i18n.t("Worn")}
        choices={[
          { value: EVERYWHERE, label: i18n.t("everywhere in noise") },
          ...taskChoices(subject),
        ]}
      />
      <SelectField
        form={form}
        name="who"
        label={i18n.t("Worn by")}
        choices={[
          { value: EVERYBODY, label: i18n.t("everybody") },
          ...subject.workers.map(({ id, name }) => ({ value: id, label: name })),
        ]}
      />
      <Actions onLeave={onLeave} />
    </Form>
  );
}

const WearingFields = z.object({
  use: z.union([z.literal(EVERYWHERE), z.uuid()]),
  wornPct: z.number().min(0).max(100),
});

function WearingForm({ subject, onAdd, onLeave }: PartProps) {
  const { i18n } = useLingui();
  const form = useSchemaForm(WearingFields, {
    keepAs: "wearing",
    defaultValues: { use: EVERYWHERE },
  });
  return (
    <Form
      aria-label={i18n.t("Worn more, or less")}
      onSubmit={form.handleSubmit(({ use, wornPct }) =>
        onAdd({ kind: "wearing", taskId: use === EVERYWHERE ? null : use, wornPct }),
      )}
    >
      <SelectField
        form={form}
        name="use"
        label={i18n.t("Worn in")}
        choices={[{ value: EVERYWHERE, label: i18n.t("every task") }, ...taskChoices(subject)]}
      />
      <NumberField form={form} name="wornPct" label={i18n.t("Worn for")} unit="%" />
      <Actions onLeave={onLeave} />
    </Form>
  );
}
