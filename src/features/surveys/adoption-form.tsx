import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { formatDate } from "../../../shared/format/date";
import { formatLevel } from "../../../shared/format/level";
import { SurveyAdoption, SurveyDetail } from "../../../shared/schemas/survey";
import { nextWords } from "../../../shared/surveys/words";
import {
  DateField,
  Field,
  Form,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../../components/form";
import { LookActions, ReviewedChange, useReviewedChange } from "../../components/reviewed-change";
import { useLocale } from "../../lib/i18n";
import { messageUnder } from "./form-message";
import { surveyQueries } from "./queries";

/** A survey's results become the levels of its tasks: chosen, looked at with who changes verdict, then saved. */
export function AdoptionForm({
  survey,
  today,
  onSaved,
  onLeave,
}: {
  survey: SurveyDetail;
  today: string;
  onSaved: () => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const measured = survey.results.filter(({ levelDb }) => levelDb !== null);
  const form = useSchemaForm(SurveyAdoption, {
    defaultValues: {
      effectiveFrom: today,
      reason: "",
      keepsSpectrum: measured.some(({ octaveBandsDb }) => octaveBandsDb === null),
      targets: measured.flatMap(({ position, taskId }) =>
        taskId === null ? [] : [{ position, taskId }],
      ),
    },
  });
  const change = useReviewedChange<SurveyAdoption, SurveyDetail>({
    path: `/surveys/${survey.id}/adoption`,
    schema: SurveyDetail,
    onError: showIssuesOn(form, i18n),
    onSaved: (view) => {
      client.setQueryData(surveyQueries.one(view.id).queryKey, view);
      void client.invalidateQueries({ queryKey: ["tasks"] });
      void client.invalidateQueries({ queryKey: ["measuring-needs"] });
      onSaved();
    },
  });
  const targets = form.watch("targets");
  const keepsSpectrum = form.watch("keepsSpectrum");
  const put = (next: typeof targets) =>
    form.setValue("targets", next, {
      shouldDirty: true,
      shouldValidate: form.formState.isSubmitted,
    });
  const without = (position: number) => targets.filter((one) => one.position !== position);
  return (
    <ReviewedChange
      change={change}
      what={(body) =>
        i18n.t(
          "{survey}: {count, plural, one {# task gets its level} other {# tasks get their levels}} from {date} on.",
          {
            survey: survey.name,
            count: body.targets.length,
            date: formatDate(body.effectiveFrom, locale),
          },
        )
      }
    >
      <Form
        aria-label={i18n.t("Adopt the results")}
        onSubmit={form.handleSubmit((body) => {
          const { reason: _, ...asked } = body;
          change.look(body, asked);
        })}
      >
        <Field
          label={i18n.t("Becomes the level of")}
          isGroup
          error={messageUnder(form.formState.errors, "targets")}
        >
          {() =>
            measured.map((result) => {
              const { position, taskId, taskName } = result;
              const chosen = targets.find((one) => one.position === position);
              const facts = [
                `${formatLevel(result.levelDb, locale)} dB(A)`,
                result.asksFor === null ? null : nextWords(i18n, result),
                result.octaveBandsDb === null
                  ? keepsSpectrum
                    ? i18n.t("no octave bands: those of its present level are kept, shifted")
                    : i18n.t("no octave bands: methods that need them are not assessed")
                  : null,
              ]
                .filter(Boolean)
                .join("; ");
              if (taskId !== null)
                return (
                  <label key={position} className="choice">
                    <input
                      type="checkbox"
                      checked={chosen !== undefined}
                      onChange={(event) =>
                        put(
                          event.target.checked
                            ? [...without(position), { position, taskId }]
                            : without(position),
                        )
                      }
                    />
                    <span>
                      {taskName}
                      <span className="beneath block">{facts}</span>
                    </span>
                  </label>
                );
              return (
                <span key={position} className="two-lines">
                  <select
                    className="input"
                    aria-label={i18n.t("Task that it stands for")}
                    value={chosen?.taskId ?? ""}
                    onChange={(event) =>
                      put(
                        event.target.value === ""
                          ? without(position)
                          : [...without(position), { position, taskId: event.target.value }],
                      )
                    }
                  >
                    <option value="">{i18n.t("Choose a task")}</option>
                    {survey.nominalDay.map((task) => (
                      <option key={task.taskId} value={task.taskId}>
                        {task.taskName}
                      </option>
                    ))}
                  </select>
                  <span className="beneath">
                    {facts}.{" "}
                    {i18n.t(
                      "The task stands for the whole of the day: give the group a nominal day of this task alone.",
                    )}
                  </span>
                </span>
              );
            })
          }
        </Field>
        {measured.some(({ octaveBandsDb }) => octaveBandsDb === null) && (
          <label className="choice">
            <input type="checkbox" {...form.register("keepsSpectrum")} />
            <span>
              {i18n.t("Keep the present octave bands where none were measured")}
              <span className="beneath block">
                {i18n.t(
                  "Raised or lowered as a whole to the new level. Right where the same machine makes the noise.",
                )}
              </span>
            </span>
          </label>
        )}
        <DateField
          form={form}
          name="effectiveFrom"
          label={i18n.t("Holds from")}
          note={i18n.t("Days from this date on are judged anew. Both judgements are kept.")}
        />
        <TextAreaField
          form={form}
          name="reason"
          label={i18n.t("Reason")}
          rows={2}
          note={
            measured.some(({ missingCount }) => missingCount > 0)
              ? i18n.t(
                  "There are fewer samples than the standard asks for: say why they are enough. The reason goes with the numbers.",
                )
              : undefined
          }
        />
        <LookActions preview={change.preview} onLeave={onLeave} />
      </Form>
    </ReviewedChange>
  );
}
