import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { get, type UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import { formatDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { GradeName, InstrumentClassName } from "../../../shared/schemas/evaluation";
import { findLevelDoubts } from "../../../shared/schemas/level-doubts";
import { TaskDetail, TaskLevelInput, type TaskLevelView } from "../../../shared/schemas/task";
import { gradeWord, instrumentClassWord } from "../../../shared/words/register-words";
import {
  DateField,
  Field,
  Form,
  NumberField,
  SelectField,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import {
  COMMON_SETTINGS,
  SettingsInput,
  type TypedSettings,
} from "../../components/meter-settings";
import { NumberInput } from "../../components/number-input";
import { LookActions, ReviewedChange, useReviewedChange } from "../../components/reviewed-change";
import { SpectrumField, useSpectrumCheck } from "../../components/spectrum-field";
import { useLocale } from "../../lib/i18n";
import { IMPULSE_TYPES, impulseTypeWord } from "./impulse-words";
import { taskQueries } from "./queries";
import { SamplesField, useSamplesCheck } from "./samples-field";

type Detail = z.infer<typeof TaskDetail>;
type Level = z.infer<typeof TaskLevelView>;
type Input = z.input<typeof TaskLevelInput>;
export type TaskLevelForm = UseFormReturn<Input, unknown, TaskLevelInput>;

const messageAt = (form: TaskLevelForm, path: string): string | undefined => {
  const found = get(form.formState.errors, path) as Record<string, unknown> | undefined;
  if (typeof found?.message === "string") return found.message;
  for (const child of Object.values(found ?? {}))
    if (typeof (child as { message?: unknown } | null)?.message === "string")
      return String((child as { message: string }).message);
  return undefined;
};

function startFrom(level: Level | null, effectiveFrom: string): Input {
  if (!level)
    return {
      metric: { kind: "laeq" },
      levelDb: null as unknown as number,
      lcMinusLaDb: null,
      octaveBandsDb: null,
      lasMaxDb: null,
      peak: null,
      impulseType: null,
      samplesDb: [],
      instrument: null,
      grade: "measured-group",
      effectiveFrom,
      sourceNote: "",
      reason: null,
      acceptedDoubts: [],
    };
  const { id: _, number: __, authorName: ___, createdAt: ____, ...facts } = level;
  return { ...facts, effectiveFrom, reason: null, acceptedDoubts: [] };
}

function MetricField({ form }: { form: TaskLevelForm }) {
  const { i18n } = useLingui();
  const metric = form.watch("metric");
  const choices = [
    {
      kind: "laeq",
      label: i18n.t("LAeq, the energy mean"),
      note: i18n.t("Under a 5 dB rule it can only prove Under."),
    },
    {
      kind: "lavg",
      label: i18n.t("LAVG, a mean under settings"),
      note: i18n.t("Under a 3 dB rule it can only prove Over."),
    },
    {
      kind: "steady",
      label: i18n.t("Steady, read on slow"),
      note: i18n.t("It hardly moves, and serves every rule."),
    },
  ] as const;
  const put = (value: unknown) =>
    form.setValue("metric", value as Input["metric"], { shouldDirty: true });
  return (
    <>
      <Field
        label={i18n.t("Metric")}
        error={metric.kind === "lavg" ? undefined : messageAt(form, "metric")}
        isGroup
      >
        {() =>
          choices.map(({ kind, label, note }) => (
            <label key={kind} className="choice">
              <input
                type="radio"
                name="metric"
                checked={metric.kind === kind}
                onChange={() =>
                  put(kind === "lavg" ? { kind, settings: COMMON_SETTINGS[0] } : { kind })
                }
              />
              <span>
                {label}
                <span className="beneath block">{note}</span>
              </span>
            </label>
          ))
        }
      </Field>
      {metric.kind === "lavg" && (
        <Field label={i18n.t("Settings")} error={messageAt(form, "metric.settings")}>
          {(wires) => (
            <SettingsInput
              id={wires.id}
              describedBy={wires["aria-describedby"]}
              value={metric.settings as TypedSettings}
              onValue={(settings) => put({ kind: "lavg", settings })}
            />
          )}
        </Field>
      )}
    </>
  );
}

function PeakField({ form }: { form: TaskLevelForm }) {
  const { i18n } = useLingui();
  const peak = form.watch("peak") ?? null;
  const put = (value: unknown) =>
    form.setValue("peak", value as Input["peak"], {
      shouldDirty: true,
      shouldValidate: form.formState.isSubmitted,
    });
  return (
    <Field label={i18n.t("Peak")} unit="dB" isOptional error={messageAt(form, "peak")}>
      {(wires) => (
        <>
          <NumberInput
            id={wires.id}
            aria-describedby={wires["aria-describedby"]}
            aria-invalid={wires["aria-invalid"]}
            value={peak?.levelDb ?? null}
            onValue={(levelDb) =>
              put(levelDb === null ? null : { levelDb, weighting: peak?.weighting ?? "C" })
            }
          />
          <select
            className="input"
            aria-label={i18n.t("Weighting of the peak")}
            disabled={peak === null}
            value={peak?.weighting ?? "C"}
            onChange={(event) => put({ ...peak, weighting: event.target.value })}
          >
            {["C", "Z", "A"].map((weighting) => (
              <option key={weighting}>{weighting}</option>
            ))}
          </select>
        </>
      )}
    </Field>
  );
}

function ImpulseField({ form }: { form: TaskLevelForm }) {
  const { i18n } = useLingui();
  const type = form.watch("impulseType");
  return (
    <Field
      label={i18n.t("Kind of impulse")}
      isOptional
      note={i18n.t("Of bangs and blows, by EN 458. Without it a peak at the ear is not assessed.")}
      error={messageAt(form, "impulseType")}
    >
      {({ readOnly: _, ...wires }) => (
        <select
          {...wires}
          className="input"
          value={type ?? ""}
          onChange={(event) =>
            form.setValue(
              "impulseType",
              IMPULSE_TYPES.find((one) => String(one) === event.target.value) ?? null,
              { shouldDirty: true, shouldValidate: form.formState.isSubmitted },
            )
          }
        >
          <option value="">{i18n.t("Not stated")}</option>
          {IMPULSE_TYPES.map((one) => (
            <option key={one} value={one}>
              {impulseTypeWord(i18n, one)}
            </option>
          ))}
        </select>
      )}
    </Field>
  );
}

/**
 * A task's noise from a date on, or the correction of what stood from that date: filled in, looked at with who changes
 * verdict, then saved once for all the shifts it reaches.
 */
export function LevelForm({
  task,
  from,
  effectiveFrom,
  onLeave,
  onSaved,
}: {
  task: Detail;
  /** The level whose values the form starts with. */
  from: Level | null;
  effectiveFrom: string;
  onLeave: () => void;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const form = useSchemaForm(TaskLevelInput, { defaultValues: startFrom(from, effectiveFrom) });
  const isFirst = task.levels.length === 0;
  const change = useReviewedChange<TaskLevelInput, Detail>({
    path: `/tasks/${task.id}/levels`,
    schema: TaskDetail,
    onError: showIssuesOn(form, i18n),
    onSaved: (view) => {
      client.setQueryData(taskQueries.one(view.id).queryKey, view);
      void client.invalidateQueries({ queryKey: taskQueries.all });
      onSaved();
    },
  });
  const [metric, levelDb, octaveBandsDb, samplesDb] = form.watch([
    "metric",
    "levelDb",
    "octaveBandsDb",
    "samplesDb",
  ]);
  const doubts = findLevelDoubts({ metric, levelDb, octaveBandsDb, samplesDb });
  // A mean at another exchange rate is not what the bands add up to.
  const spectrum = useSpectrumCheck(octaveBandsDb, metric.kind === "lavg" ? null : levelDb);
  const samples = useSamplesCheck(
    doubts.find(({ code }) => code === "level-off-samples"),
    levelDb,
    samplesDb,
  );
  const look = form.handleSubmit((body) => {
    if (!isFirst && body.reason === null) {
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
    if (spectrum.isSettled() && samples.isSettled())
      change.look({ ...body, acceptedDoubts: doubts.map(({ code }) => code) });
  });
  return (
    <ReviewedChange
      change={change}
      what={(body) =>
        i18n.t("{task}: {level} dB(A) from {date} on.", {
          task: task.name,
          level: formatLevel(body.levelDb, locale),
          date: formatDate(body.effectiveFrom, locale),
        })
      }
    >
      <Form aria-label={i18n.t("Level")} onSubmit={look}>
        <MetricField form={form} />
        <NumberField
          form={form}
          name="levelDb"
          label={i18n.t("Level")}
          unit="dB(A)"
          note={i18n.t("20 to 160.")}
        />
        <SelectField
          form={form}
          name="grade"
          label={i18n.t("Grade")}
          choices={GradeName.options
            .filter((grade) => grade !== "measured-worker")
            .map((grade) => ({ value: grade, label: gradeWord(i18n, grade) }))}
        />
        <NumberField
          form={form}
          name="lcMinusLaDb"
          label={i18n.t("LC − LA")}
          unit="dB"
          isOptional
          note={i18n.t("Where there is no spectrum; SNR and HML need it.")}
        />
        <SpectrumField
          form={form}
          name="octaveBandsDb"
          label={i18n.t("Octave bands, dB")}
          check={spectrum}
          onTakeLevel={(foundDb) =>
            form.setValue("levelDb", foundDb, { shouldDirty: true, shouldValidate: true })
          }
          note={i18n.t(
            "Unweighted. 63 Hz may stay empty. Eight values can be pasted into any cell.",
          )}
        />
        <NumberField
          form={form}
          name="lasMaxDb"
          label={i18n.t("Slow maximum, LASmax")}
          unit="dB(A)"
          isOptional
        />
        <PeakField form={form} />
        <ImpulseField form={form} />
        <SamplesField form={form} check={samples} />
        <SelectField
          form={form}
          name="instrument"
          label={i18n.t("Measured with")}
          emptyLabel={i18n.t("Not stated")}
          isOptional
          choices={InstrumentClassName.options.map((instrument) => ({
            value: instrument,
            label: instrumentClassWord(i18n, instrument),
          }))}
        />
        <TextAreaField
          form={form}
          name="sourceNote"
          label={i18n.t("Where it comes from")}
          rows={2}
          isOptional
        />
        <DateField
          form={form}
          name="effectiveFrom"
          label={i18n.t("Holds from")}
          note={i18n.t(
            "The date of a level that is there corrects that one; all its days are judged again.",
          )}
        />
        {!isFirst && <TextAreaField form={form} name="reason" label={i18n.t("Reason")} rows={2} />}
        <LookActions preview={change.preview} onLeave={onLeave} />
      </Form>
    </ReviewedChange>
  );
}
