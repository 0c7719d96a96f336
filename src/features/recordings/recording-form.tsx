import { useLingui } from "@lingui/react";
import { useState } from "react";
import { z } from "zod";
import { formatLevel } from "../../../shared/format/level";
import { formatNumber } from "../../../shared/format/number";
import { issueText } from "../../../shared/problems/issue-text";
import { recordingText } from "../../../shared/recordings/recording-text";
import { IsoDate } from "../../../shared/schemas/common";
import {
  RECORDING_LIMIT_BYTES,
  type RecordingView,
  TONE_LIMIT_BYTES,
} from "../../../shared/schemas/recording";
import { Button } from "../../components/button";
import {
  CheckField,
  type Choice,
  DateField,
  Field,
  Form,
  FormActions,
  NumberField,
  RadioGroup,
  SelectField,
  SubmitButton,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { Status } from "../../components/status";
import { ApiError } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import { useMeasuredTone } from "../../lib/measured-tone";
import { measureTone, type NewRecording, useSendRecording } from "./queries";
import { showRecordingIssuesOn } from "./recording-issues";
import { fullScaleSineDb, megabytes, toneText } from "./recording-words";

const Fields = z
  .object({
    taskId: z.string().nullable(),
    calibration: z.enum(["tone", "sensitivity", "none"]),
    pascalPerFullScale: z.number().positive().max(1e6).nullable(),
    toneDb: z.number().min(70).max(130).nullable(),
    frequencyHz: z.number().min(100).max(4000).nullable(),
    isKept: z.boolean(),
    keepReason: z.string().trim(),
    deleteOn: IsoDate.nullable(),
  })
  .check(({ value, issues }) => {
    const need = (path: keyof typeof value) =>
      issues.push({ code: "custom", input: value, path: [path], params: { code: "required" } });
    if (!value.taskId) need("taskId");
    if (value.calibration === "sensitivity" && value.pascalPerFullScale === null)
      need("pascalPerFullScale");
    if (value.isKept && value.keepReason.length < 3) need("keepReason");
    if (value.isKept && value.deleteOn === null) need("deleteOn");
  });

const ToneFacts = z.object({
  taskId: z.string().min(1),
  toneDb: z.number().min(70).max(130),
  frequencyHz: z.number().min(100).max(4000),
});

const accept = ".wav,audio/wav,audio/x-wav";

/** What the server says of a form's file. */
const fileIssue = (error: unknown) =>
  error instanceof ApiError ? error.issues.find(({ path }) => path === "file") : undefined;

/** A recording of a task is sent in: whose noise it is, what gives it its level, and whether its sound is kept. */
export function RecordingForm({
  tasks,
  taskId,
  onSent,
}: {
  tasks: readonly Choice[];
  /** Filled in, from the task's own page. */
  taskId: string | null;
  onSent: (view: RecordingView) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const form = useSchemaForm(Fields, {
    mode: "onSubmit",
    defaultValues: {
      taskId,
      calibration: "tone",
      pascalPerFullScale: null,
      toneDb: 94,
      frequencyHz: 1000,
      isKept: false,
      keepReason: "",
      deleteOn: null,
    },
  });
  const values = form.watch();
  const [file, setFile] = useState<File | null>(null);
  const [fileError, setFileError] = useState<string | null>(null);
  const [toneFile, setToneFile] = useState<File | null>(null);
  const [isToneMissing, setToneMissing] = useState(false);
  const { send, progressPct, cancel } = useSendRecording();
  const { taskId: task, toneDb, frequencyHz } = values;
  const toneFault = toneFile && sizeFault(toneFile, TONE_LIMIT_BYTES);
  const facts = ToneFacts.safeParse({ taskId: task, toneDb, frequencyHz });
  const measured = useMeasuredTone(
    toneFault ? null : toneFile,
    facts.success ? facts.data : null,
    measureTone,
  );
  const { tone } = measured;

  function sizeFault(chosen: File, limitBytes: number): string | null {
    return chosen.size > limitBytes
      ? i18n.t("This file has {size} MB; at most {limit} MB are taken.", {
          size: megabytes(chosen.size, locale),
          limit: megabytes(limitBytes, locale),
        })
      : null;
  }

  /** Why there is no tone to be sent. */
  function toneWord(): string | null {
    if (toneFault) return toneFault;
    if (toneFile && !task) return i18n.t("Choose the task first, then the tone.");
    const issue = fileIssue(measured.error);
    if (issue) return recordingText(i18n, issue.code, issue.params) ?? issueText(i18n, issue);
    if (!isToneMissing || tone) return null;
    return measured.isPending
      ? i18n.t("The tone is still being measured: send again when its figure stands here.")
      : i18n.t("Measure the tone first.");
  }

  const submit = form.handleSubmit((filled) => {
    const fault = file ? sizeFault(file, RECORDING_LIMIT_BYTES) : i18n.t("Choose a file first.");
    setFileError(fault);
    const needsTone = filled.calibration === "tone" && !tone;
    setToneMissing(needsTone);
    if (!file || fault || needsTone || !filled.taskId) return;
    const calibration: NewRecording["calibration"] =
      filled.calibration === "tone" && tone
        ? { kind: "tone", toneId: tone.id }
        : filled.calibration === "sensitivity" && filled.pascalPerFullScale !== null
          ? { kind: "sensitivity", pascalPerFullScale: filled.pascalPerFullScale }
          : { kind: "none" };
    send.mutate(
      {
        file,
        taskId: filled.taskId,
        calibration,
        keepReason: filled.isKept ? filled.keepReason : null,
        deleteOn: filled.isKept ? filled.deleteOn : null,
      },
      {
        onSuccess: onSent,
        onError: (error) => {
          const issue = fileIssue(error);
          if (issue)
            setFileError(recordingText(i18n, issue.code, issue.params) ?? issueText(i18n, issue));
          showRecordingIssuesOn(form, i18n)(error);
        },
      },
    );
  });
  const isAborted = send.error instanceof DOMException && send.error.name === "AbortError";
  const pascal = values.pascalPerFullScale;
  return (
    <Form aria-label={i18n.t("Recording to send in")} onSubmit={submit}>
      <SelectField
        form={form}
        name="taskId"
        label={i18n.t("Task")}
        emptyLabel={i18n.t("Choose one")}
        choices={tasks}
      />
      <RadioGroup
        form={form}
        name="calibration"
        label={i18n.t("Calibration")}
        choices={[
          {
            value: "tone",
            label: i18n.t("A calibrator’s tone, recorded with the same settings"),
          },
          { value: "sensitivity", label: i18n.t("A known sensitivity") },
          {
            value: "none",
            label: i18n.t("No calibration"),
            note: i18n.t(
              "Levels are then relative: the spectrum’s shape can be used, and no level.",
            ),
          },
        ]}
      />
      {values.calibration === "sensitivity" && (
        <NumberField
          form={form}
          name="pascalPerFullScale"
          label={i18n.t("Sound pressure at full scale")}
          unit="Pa"
          note={
            typeof pascal === "number" && pascal > 0
              ? i18n.t("A sine at full scale is then {level} dB.", {
                  level: formatLevel(fullScaleSineDb(pascal), locale),
                })
              : i18n.t("From the recorder’s gain and the microphone’s certificate.")
          }
        />
      )}
      {values.calibration === "tone" && (
        <>
          <NumberField form={form} name="toneDb" label={i18n.t("The calibrator gives")} unit="dB" />
          <NumberField form={form} name="frequencyHz" label={i18n.t("Frequency")} unit="Hz" />
          <Field
            label={i18n.t("Tone")}
            error={toneWord() ?? undefined}
            note={
              tone
                ? toneText(i18n, tone, locale)
                : i18n.t("A WAV file of a few seconds. It is measured at once and not kept.")
            }
          >
            {(wires) => (
              <input
                {...wires}
                className="file-input"
                type="file"
                accept={accept}
                onChange={(event) => setToneFile(event.target.files?.[0] ?? null)}
              />
            )}
          </Field>
          {measured.isPending && (
            <p className="form-word">
              <Status>{i18n.t("The tone is being measured.")}</Status>
            </p>
          )}
          {!fileIssue(measured.error) && <FormProblem error={measured.error} />}
        </>
      )}
      <Field
        label={i18n.t("Recording")}
        error={fileError ?? undefined}
        note={i18n.t("WAV, one or two channels, 44.1 to 192 kHz, up to 4 GB.")}
      >
        {(wires) => (
          <input
            {...wires}
            className="file-input"
            type="file"
            accept={accept}
            onChange={(event) => {
              setFile(event.target.files?.[0] ?? null);
              setFileError(null);
              send.reset();
            }}
          />
        )}
      </Field>
      <CheckField
        form={form}
        name="isKept"
        label={i18n.t("The sound")}
        text={i18n.t("Keep the sound as well, for a reason and until a day")}
      />
      {values.isKept && (
        <>
          <TextAreaField form={form} name="keepReason" label={i18n.t("Why it is kept")} rows={2} />
          <DateField form={form} name="deleteOn" label={i18n.t("Deleted on")} />
        </>
      )}
      {!isAborted && !fileIssue(send.error) && <FormProblem error={send.error} />}
      <FormActions>
        <SubmitButton isBusy={send.isPending}>{i18n.t("Send the recording in")}</SubmitButton>
        {send.isPending && <Button onClick={cancel}>{i18n.t("Cancel")}</Button>}
      </FormActions>
      {send.isPending && (
        <div className="import-progress">
          <progress max={100} value={progressPct} aria-label={i18n.t("Sent")} />
          <Status>
            {i18n.t("{share} % sent", { share: formatNumber(progressPct, 0, locale) })}
          </Status>
        </div>
      )}
    </Form>
  );
}
