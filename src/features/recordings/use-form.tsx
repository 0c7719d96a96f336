import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { z } from "zod";
import { formatDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { InstrumentClassName } from "../../../shared/schemas/evaluation";
import { RecordingUse, RecordingView } from "../../../shared/schemas/recording";
import { instrumentClassWord } from "../../../shared/words/register-words";
import {
  DateField,
  Form,
  RadioGroup,
  SelectField,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { LookActions, ReviewedChange, useReviewedChange } from "../../components/reviewed-change";
import { useLocale } from "../../lib/i18n";
import { recordingQueries } from "./queries";
import { showRecordingIssuesOn } from "./recording-issues";

type Own = { readonly levelDb: number; readonly isLaeq: boolean } | null;

/** A select and radio buttons hold text. */
const Fields = RecordingUse.extend({ channel: z.enum(["1", "2"]) });

/**
 * A recording becomes its task's level, or the level that the task has gets its spectrum: filled in, looked at with who
 * changes verdict, then saved.
 */
export function UseForm({
  view,
  own,
  needsReason,
  today,
  onLeave,
  onSaved,
}: {
  view: RecordingView;
  /** The task's own level, in force today. */
  own: Own;
  /** The task has a level, if only from a later day on. */
  needsReason: boolean;
  today: string;
  onLeave: () => void;
  onSaved: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const channels = view.analysis?.channels ?? [];
  const usable = channels.flatMap((levels, index) =>
    levels.isSilent ? [] : [{ levels, value: `${index + 1}` as "1" | "2" }],
  );
  const hasLevel = usable.some(({ levels }) => levels.isAbsolute);
  const canShape = own?.isLaeq ?? false;
  const form = useSchemaForm(Fields, {
    mode: "onSubmit",
    defaultValues: {
      how: hasLevel ? "level" : "shape",
      channel: (usable.find(({ levels }) => levels.isAbsolute === hasLevel) ?? usable[0])?.value,
      effectiveFrom: today,
      instrument: null,
      reason: null,
    },
  });
  const change = useReviewedChange<RecordingUse, RecordingView>({
    path: `/recordings/${view.id}/adoption`,
    schema: RecordingView,
    onError: showRecordingIssuesOn(form, i18n),
    onSaved: (saved) => {
      client.setQueryData(recordingQueries.one(view.id).queryKey, saved);
      void client.invalidateQueries({ queryKey: ["tasks"] });
      onSaved();
    },
  });
  const look = form.handleSubmit(({ channel, ...body }) => {
    if (needsReason && body.reason === null) {
      form.setError(
        "reason",
        { message: i18n.t("A reason is needed: what is there already changes.") },
        { shouldFocus: true },
      );
      return;
    }
    change.look({ ...body, channel: Number(channel) });
  });
  const how = form.watch("how");
  const levelOf = (channel: number) => channels[channel - 1]?.laeqDb ?? null;
  return (
    <ReviewedChange
      change={change}
      what={(body) =>
        body.how === "level"
          ? i18n.t("{task}: {level} dB(A) from {date} on.", {
              task: view.taskName,
              level: formatLevel(levelOf(body.channel), locale),
              date: formatDate(body.effectiveFrom, locale),
            })
          : i18n.t("{task} keeps its level and gets this spectrum from {date} on.", {
              task: view.taskName,
              date: formatDate(body.effectiveFrom, locale),
            })
      }
    >
      <Form aria-label={i18n.t("Use for this task")} onSubmit={look}>
        <RadioGroup
          form={form}
          name="how"
          label={i18n.t("What is used")}
          choices={[
            ...(hasLevel
              ? [
                  {
                    value: "level",
                    label: i18n.t("Level and spectrum"),
                    note: i18n.t("LAeq, octave bands, LC − LA, LASmax and peak of the recording."),
                  },
                ]
              : []),
            ...(canShape && own
              ? [
                  {
                    value: "shape",
                    label: i18n.t("The spectrum, under the task’s own level"),
                    note: i18n.t(
                      "The level stays at {level} dB(A); every band moves by the same difference.",
                      { level: formatLevel(own.levelDb, locale) },
                    ),
                  },
                ]
              : []),
          ]}
        />
        {usable.length > 1 && (
          <SelectField
            form={form}
            name="channel"
            label={i18n.t("Channel")}
            choices={usable.map(({ levels, value }) => ({
              value,
              label: levels.isAbsolute
                ? i18n.t("{channel}: {level} dB(A)", {
                    channel: value,
                    level: formatLevel(levels.laeqDb, locale),
                  })
                : i18n.t("{channel}: relative", { channel: value }),
            }))}
          />
        )}
        {how === "level" && (
          <SelectField
            form={form}
            name="instrument"
            label={i18n.t("Measured with")}
            emptyLabel={i18n.t("Not stated")}
            isOptional
            note={i18n.t("Only where recorder and microphone meet that class.")}
            choices={InstrumentClassName.options.map((instrument) => ({
              value: instrument,
              label: instrumentClassWord(i18n, instrument),
            }))}
          />
        )}
        <DateField form={form} name="effectiveFrom" label={i18n.t("Holds from")} />
        {needsReason && (
          <TextAreaField form={form} name="reason" label={i18n.t("Reason")} rows={2} />
        )}
        <LookActions preview={change.preview} onLeave={onLeave} />
      </Form>
    </ReviewedChange>
  );
}
