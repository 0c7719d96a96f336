import { useLingui } from "@lingui/react";
import { type Ref, useEffect, useImperativeHandle, useRef, useState } from "react";
import { z } from "zod";
import { barToTrial } from "../../../shared/acoustics/protection/barred";
import { formatLevelWithUnit } from "../../../shared/format/level";
import type { Candidate, FitTestView, FittingDesk } from "../../../shared/schemas/fit";
import { exclusionWord } from "../../../shared/words/register-words";
import {
  DateField,
  Form,
  FormActions,
  NumberField,
  SelectField,
  SubmitButton,
  TextAreaField,
  TextField,
  useSchemaForm,
} from "../../components/form";
import { FormProblem } from "../../components/form-problem";
import { protectorWordText } from "../../components/protector-word";
import { Status } from "../../components/status";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { DESK_METHODS, FitFields, factsOf, possibleTrials, trialsTyped } from "./fit-fields";
import { showFitIssuesOn } from "./fit-issues";
import { FitRatingLine } from "./fit-rating-line";
import { fitMethodWord, judgedBound, judgedDb } from "./fit-words";
import { METHOD_SD_DB } from "./method-sd";
import { useRecordFitTest } from "./queries";
import { TrialCells } from "./trial-cells";

const DeskFields = FitFields.extend({ modelId: z.uuid(), testedOn: z.iso.date() }).check(
  (context) => {
    possibleTrials(context);
    const { leftDb, rightDb } = context.value;
    if (leftDb.length + rightDb.length === 0)
      context.issues.push({
        code: "custom",
        input: leftDb,
        path: ["leftDb"],
        params: { code: "no-trial" },
      });
  },
);

export interface FitFormHandle {
  choose(modelId: string): void;
}

/** Device and size, the trials of both ears, and what they come to: sent with Enter, kept as tried. */
export function FitForm({
  desk,
  today,
  sizesOf,
  onChoose,
  onRecorded,
  ref,
}: {
  desk: FittingDesk;
  today: string;
  sizesOf: (modelId: string) => readonly string[];
  /** Another device is meant. */
  onChoose: (modelId: string) => void;
  onRecorded: (test: FitTestView) => void;
  ref: Ref<FitFormHandle>;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const record = useRecordFitTest(desk.worker.id);
  const changeKey = useChangeKey();
  const { begin, end } = useOneAtATime();
  const { needDb } = desk.need;
  const { confidencePct } = desk.policy;
  const triable = desk.candidates.filter((candidate) => barToTrial(candidate) === null);
  const form = useSchemaForm(DeskFields, {
    mode: "onSubmit",
    keepAs: "fit",
    defaultValues: {
      modelId: triable[0]?.modelId ?? "",
      size: null,
      testedOn: today,
      method: "psychophysical",
      methodSdDb: METHOD_SD_DB.psychophysical,
      leftDb: [],
      rightDb: [],
      note: "",
    },
  });
  const values = form.watch();
  const [misfit, setMisfit] = useState<FitTestView | null>(null);
  // What does not fit is put on anew, or another is tried. The cells are there again only once the form was emptied.
  useEffect(() => {
    if (misfit) form.setFocus("leftDb");
  }, [misfit, form.setFocus]);
  const { modelId: chosenId, method: chosenMethod } = values;
  const sizes = sizesOf(chosenId);
  const isOwnFigure = values.methodSdDb !== METHOD_SD_DB[chosenMethod];

  // biome-ignore lint/correctness/useExhaustiveDependencies: what follows from another device, whoever chose it
  useEffect(() => {
    const size = form.getValues("size");
    if (size !== null && sizes.length > 0 && !sizes.includes(size)) form.setValue("size", null);
    onChoose(chosenId);
  }, [chosenId, sizes.length]);

  const filledIn = useRef(chosenMethod);
  // biome-ignore lint/correctness/useExhaustiveDependencies: another method brings its own figure, unless one was typed
  useEffect(() => {
    if (form.getValues("methodSdDb") === METHOD_SD_DB[filledIn.current])
      form.setValue("methodSdDb", METHOD_SD_DB[chosenMethod]);
    filledIn.current = chosenMethod;
  }, [chosenMethod]);

  useImperativeHandle(ref, () => ({
    choose(modelId) {
      form.setValue("modelId", modelId, { shouldDirty: true });
      form.setFocus("leftDb");
    },
  }));

  const label = (candidate: Candidate, place: number) =>
    [
      `${place + 1}. ${candidate.name}`,
      candidate.excludedBy
        ? exclusionWord(i18n, candidate.excludedBy)
        : candidate.word && protectorWordText(i18n, candidate.word),
      judgedDb(candidate) !== null &&
        formatLevelWithUnit(judgedDb(candidate), locale, judgedBound(candidate)),
    ]
      .filter(Boolean)
      .join(", ");

  const submit = form.handleSubmit((filled) => {
    if (!begin()) return;
    const { modelId, size, testedOn, method, note } = filled;
    const body = {
      modelId,
      size,
      method,
      note,
      testedOn,
      facts: factsOf(filled),
      confidencePct,
      needDb,
    };
    record.mutate(
      { body, key: changeKey.keyFor(body) },
      {
        onSuccess: (test) => {
          changeKey.forget();
          form.reset({ ...form.getValues(), leftDb: [], rightDb: [], note: "" });
          setMisfit(test.hasPassed === false ? test : null);
          onRecorded(test);
        },
        onError: showFitIssuesOn(form, i18n),
        onSettled: end,
      },
    );
  });

  return (
    <Form className="fit-form" aria-label={i18n.t("Test the fit")} onSubmit={submit}>
      <SelectField
        form={form}
        name="modelId"
        label={i18n.t("Device")}
        choices={triable.map((candidate, place) => ({
          value: candidate.modelId,
          label: label(candidate, place),
        }))}
      />
      {sizes.length > 0 ? (
        <SelectField
          form={form}
          name="size"
          label={i18n.t("Size")}
          choices={sizes.map((size) => ({ value: size, label: size }))}
          emptyLabel={i18n.t("not said")}
        />
      ) : (
        <TextField form={form} name="size" label={i18n.t("Size")} isOptional />
      )}
      <DateField form={form} name="testedOn" label={i18n.t("Tested on")} />
      <SelectField
        form={form}
        name="method"
        label={i18n.t("Tested by")}
        choices={DESK_METHODS.map((method) => ({
          value: method,
          label: fitMethodWord(i18n, method),
        }))}
      />
      <NumberField
        form={form}
        name="methodSdDb"
        label={i18n.t("Its own uncertainty")}
        unit="dB"
        note={
          isOwnFigure
            ? i18n.t("One standard deviation, as its maker states it.")
            : i18n.t(
                "One standard deviation: common practice, no source. Type the maker’s where it is known.",
              )
        }
      />
      <p className="desk-said">
        <Status>
          {misfit &&
            i18n.t("{device} does not fit: kept as tried. Put it on anew, or try another.", {
              device: misfit.modelName,
            })}
        </Status>
      </p>
      <TrialCells
        form={form}
        name="leftDb"
        ear="left"
        label={i18n.t("Left ear")}
        onLeave={() => form.setFocus("rightDb")}
      />
      <TrialCells
        form={form}
        name="rightDb"
        ear="right"
        label={i18n.t("Right ear")}
        note={i18n.t("Each trial with the device put on anew. Enter goes on; twice records.")}
        onLeave={() => void submit()}
      />
      <FitRatingLine
        {...trialsTyped(values.leftDb, values.rightDb)}
        methodSdDb={typeof values.methodSdDb === "number" ? values.methodSdDb : 0}
        confidencePct={confidencePct}
        needDb={needDb}
        labelLess7Db={
          desk.candidates.find(({ modelId }) => modelId === chosenId)?.labelLess7Db ?? null
        }
      />
      <TextAreaField form={form} name="note" label={i18n.t("Note")} rows={2} isOptional />
      <FormProblem error={record.error} />
      <FormActions>
        <SubmitButton isBusy={record.isPending}>{i18n.t("Record the fit")}</SubmitButton>
      </FormActions>
    </Form>
  );
}
