import { useLingui } from "@lingui/react";
import { useState } from "react";
import type { UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import { formatNumber } from "../../../shared/format/number";
import { issueText } from "../../../shared/problems/issue-text";
import { recordingText } from "../../../shared/recordings/recording-text";
import {
  CHECK_FILE_LIMIT_BYTES,
  type MicrophoneCheckView,
} from "../../../shared/schemas/microphone-check";
import { BandFields } from "../../components/band-fields";
import { Button } from "../../components/button";
import {
  type Choice,
  Form,
  FormActions,
  NumberField,
  RadioGroup,
  SelectField,
  SubmitButton,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { Status } from "../../components/status";
import { ApiError } from "../../lib/api";
import { useLocale } from "../../lib/i18n";
import {
  CheckFields,
  type ChosenFiles,
  calibrationOf,
  checkOf,
  emptyDraft,
  type FilePlace,
  filesThatCount,
  missingPlaces,
  noFiles,
  partsOf,
  placesOf,
  type Tones,
  typedOf,
} from "./check-draft";
import { FileFields } from "./file-fields";
import { useSendCheck, useTypeCheck } from "./queries";
import { ToneField } from "./tone-field";

type CheckForm = UseFormReturn<z.input<typeof CheckFields>, unknown, z.output<typeof CheckFields>>;

/** One ear of a worker under a protector: recordings from outside and inside the cup, or octave bands off a meter. */
export function MicrophoneCheckForm({
  workerId,
  siteId,
  models,
  modelId,
  ear,
  taskId,
  tasks,
  onSent,
}: {
  workerId: string;
  siteId: string;
  models: readonly (Choice & { readonly hasActivePart: boolean })[];
  /** Filled in: what the worker wears, and the ear that is next. */
  modelId: string | null;
  ear: MicrophoneCheckView["ear"];
  /** The one that asks most of a protector, where its octave bands are known: a rating in pink noise may not hold in it. */
  taskId: string | null;
  /** Tasks whose octave bands are known. */
  tasks: readonly Choice[];
  onSent: (view: MicrophoneCheckView) => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const form = useSchemaForm(CheckFields, {
    mode: "onSubmit",
    defaultValues: emptyDraft(modelId, ear, taskId),
  });
  const [files, setFiles] = useState<ChosenFiles>(noFiles);
  const [faults, setFaults] = useState<Partial<Record<FilePlace, string>>>({});
  const [tones, setTones] = useState<Tones>({ outside: null, inside: null });
  const [isToneMissing, setToneMissing] = useState(false);
  const { send, progressPct, cancel } = useSendCheck(workerId);
  const type = useTypeCheck(workerId);
  const { how, layout, calibration, correction, toneDb, modelId: chosenId } = form.watch();
  const hasActivePart = models.find(({ value }) => value === chosenId)?.hasActivePart ?? false;
  const places = placesOf(layout, hasActivePart);

  function choose(place: FilePlace, file: File | null) {
    setFiles((before) => ({ ...before, [place]: file }));
    setFaults((before) => ({
      ...before,
      [place]:
        file && file.size > CHECK_FILE_LIMIT_BYTES
          ? i18n.t("This file is too large: at most 128 MB are taken.")
          : undefined,
    }));
  }

  const submit = form.handleSubmit((draft) => {
    if (draft.modelId === null) return;
    if (draft.how === "typed") {
      const typed = { ...draft, on: hasActivePart ? draft.on : null };
      if (draft.off) type.mutate(typedOf(typed, draft.modelId, draft.off), { onSuccess: onSent });
      return;
    }
    const counted = filesThatCount(files, hasActivePart);
    const missing = missingPlaces(draft.layout, counted);
    const needed = Object.fromEntries(
      missing.map((place) => [place, i18n.t("Choose a file first.")]),
    );
    const calibrated = calibrationOf(draft, tones);
    setFaults((before) => ({ ...before, ...needed }));
    setToneMissing(calibrated === null);
    const hasFault = places.some((place) => faults[place] !== undefined && files[place] !== null);
    if (missing.length > 0 || hasFault || !calibrated) return;
    const { parts, files: sent } = partsOf(draft, counted);
    send.mutate(
      { check: checkOf(draft, draft.modelId, parts, calibrated), files: sent },
      {
        onSuccess: onSent,
        onError: (error) => {
          for (const issue of error instanceof ApiError ? error.issues : []) {
            const at = /^files\.(\d+)/.exec(issue.path);
            const place = at && places.filter((one) => files[one])[Number(at[1])];
            const text = recordingText(i18n, issue.code, issue.params) ?? issueText(i18n, issue);
            if (place) setFaults((before) => ({ ...before, [place]: text }));
          }
        },
      },
    );
  });
  const isAborted = send.error instanceof DOMException && send.error.name === "AbortError";
  const toneError = (tone: Tones["outside"]) =>
    !isToneMissing
      ? undefined
      : tone
        ? i18n.t("The tone is not in this microphone’s channel.")
        : i18n.t("Measure the tone first.");
  return (
    <Form aria-label={i18n.t("Two-microphone check")} onSubmit={submit}>
      <SelectField
        form={form}
        name="modelId"
        label={i18n.t("Protector")}
        emptyLabel={i18n.t("Choose one")}
        choices={models}
      />
      <RadioGroup
        form={form}
        name="ear"
        label={i18n.t("Ear")}
        choices={[
          { value: "left", label: i18n.t("Left ear") },
          { value: "right", label: i18n.t("Right ear") },
        ]}
      />
      <RadioGroup
        form={form}
        name="how"
        label={i18n.t("What there is")}
        choices={[
          { value: "recordings", label: i18n.t("Recordings of both microphones") },
          { value: "typed", label: i18n.t("Octave bands off a meter") },
        ]}
      />
      {how === "typed" ? (
        <TypedBands form={form} hasActivePart={hasActivePart} />
      ) : (
        <>
          <RadioGroup
            form={form}
            name="layout"
            label={i18n.t("Files")}
            choices={[
              { value: "stereo", label: i18n.t("Both microphones in one stereo file") },
              { value: "two-files", label: i18n.t("A file for each microphone") },
            ]}
          />
          {layout === "stereo" && (
            <RadioGroup
              form={form}
              name="outsideChannel"
              label={i18n.t("Outside the cup is")}
              choices={[
                { value: "1", label: i18n.t("channel 1 (left)") },
                { value: "2", label: i18n.t("channel 2 (right)") },
              ]}
            />
          )}
          <FileFields
            places={places}
            isStereo={layout === "stereo"}
            hasActivePart={hasActivePart}
            errors={faults}
            onChoose={choose}
          />
          <CalibrationChoice form={form} />
          {calibration === "tone" && (
            <>
              <NumberField
                form={form}
                name="toneDb"
                label={i18n.t("The calibrator gives")}
                unit="dB"
              />
              {(["outside", "inside"] as const).map((side) => (
                <ToneField
                  key={side}
                  label={
                    side === "outside"
                      ? i18n.t("Tone at the outside microphone")
                      : i18n.t("Tone at the inside microphone")
                  }
                  siteId={siteId}
                  toneDb={typeof toneDb === "number" ? toneDb : null}
                  tone={tones[side]}
                  error={toneError(tones[side])}
                  onTone={(tone) => setTones((before) => ({ ...before, [side]: tone }))}
                />
              ))}
            </>
          )}
          {calibration === "sensitivity" && (
            <>
              <NumberField
                form={form}
                name="outsidePa"
                label={i18n.t("Full scale outside")}
                unit="Pa"
              />
              <NumberField
                form={form}
                name="insidePa"
                label={i18n.t("Full scale inside")}
                unit="Pa"
              />
            </>
          )}
        </>
      )}
      <CorrectionChoice form={form} isOwn={correction === "own"} />
      <SelectField
        form={form}
        name="taskId"
        label={i18n.t("Rated in the noise of")}
        emptyLabel={i18n.t("the reference: pink noise")}
        note={i18n.t("Only tasks whose octave bands are known.")}
        choices={tasks}
        isOptional
      />
      {!isAborted && <FormProblem error={send.error ?? type.error} />}
      <FormActions>
        <SubmitButton isBusy={send.isPending || type.isPending}>
          {how === "typed" ? i18n.t("Work it out") : i18n.t("Send the recordings in")}
        </SubmitButton>
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

function TypedBands({ form, hasActivePart }: { form: CheckForm; hasActivePart: boolean }) {
  const { i18n } = useLingui();
  const outside = i18n.t("Outside");
  const inside = i18n.t("Inside");
  return (
    <>
      <BandFields
        form={form}
        name="off"
        label={hasActivePart ? i18n.t("Active part off") : i18n.t("Octave bands")}
        note={i18n.t("Unweighted levels, dB, of both microphones at the same time.")}
        isOptional={false}
        rows={[
          { key: "outsideOffDb", label: outside },
          { key: "insideOffDb", label: inside },
        ]}
        thirds="sum"
      />
      {hasActivePart && (
        <BandFields
          form={form}
          name="on"
          label={i18n.t("Active part on")}
          rows={[
            { key: "outsideOnDb", label: outside },
            { key: "insideOnDb", label: inside },
          ]}
          thirds="sum"
        />
      )}
    </>
  );
}

function CalibrationChoice({ form }: { form: CheckForm }) {
  const { i18n } = useLingui();
  return (
    <RadioGroup
      form={form}
      name="calibration"
      label={i18n.t("Calibration")}
      choices={[
        { value: "tone", label: i18n.t("A calibrator’s tone at each microphone") },
        { value: "sensitivity", label: i18n.t("Known sensitivities") },
        {
          value: "alike",
          label: i18n.t("Not calibrated, but equally sensitive"),
          note: i18n.t("Side by side in the same noise they showed the same level."),
        },
        {
          value: "none",
          label: i18n.t("No calibration"),
          note: i18n.t("No rating then; the active attenuation can still be checked."),
        },
      ]}
    />
  );
}

function CorrectionChoice({ form, isOwn }: { form: CheckForm; isOwn: boolean }) {
  const { i18n } = useLingui();
  return (
    <>
      <RadioGroup
        form={form}
        name="correction"
        label={i18n.t("Correction to the open ear")}
        choices={[
          {
            value: "none",
            label: i18n.t("No correction"),
            note: i18n.t("The noise reduction is taken for the attenuation."),
          },
          {
            value: "open-ear",
            label: i18n.t("Open ear in a diffuse field"),
            note: i18n.t(
              "ISO 11904-1, from memory. Only where the inside microphone is at the eardrum.",
            ),
          },
          { value: "own", label: i18n.t("Of one’s own, with its source") },
        ]}
      />
      {isOwn && (
        <>
          <BandFields
            form={form}
            name="ownDb"
            label={i18n.t("Added to the noise reduction")}
            isOptional={false}
            rows={[{ label: i18n.t("Correction") }]}
            thirds="refuse"
          />
          <TextField form={form} name="source" label={i18n.t("Source")} />
        </>
      )}
    </>
  );
}
