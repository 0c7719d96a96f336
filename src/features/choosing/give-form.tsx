import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { z } from "zod";
import { type Bar, barToIssue } from "../../../shared/acoustics/protection/barred";
import { formatLevel } from "../../../shared/format/level";
import {
  GivingPreview,
  type ProtectorChoiceView,
  type Wearer,
} from "../../../shared/schemas/choice";
import type { Candidate } from "../../../shared/schemas/fit";
import type { ManyAssignmentsInput } from "../../../shared/schemas/worker";
import { barWord, ownFitWord } from "../../../shared/words/register-words";
import { useChangePreview } from "../../components/change-preview";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { DateField, Form, RadioGroup, showIssuesOn, useSchemaForm } from "../../components/form";
import { TextButton, TextLink } from "../../components/link";
import { LookActions } from "../../components/reviewed-change";
import { ApiError } from "../../lib/api";
import { useChangeKey } from "../../lib/change-key";
import { useLocale } from "../../lib/i18n";
import { useOneAtATime } from "../../lib/one-at-a-time";
import { references } from "../../lib/references";
import { paths } from "../../paths";
import { GiveReview } from "./give-review";
import { useAssignMany } from "./queries";

const GiveFields = z.object({
  use: z.enum(["subject", "area", "everywhere"]),
  fromDate: z.iso.date(),
  workerIds: z.array(z.uuid()).min(1),
});

/** Who gets what was picked, for which use, from when; looked at with who changes verdict, then given to all or none. */
export function GiveForm({
  choice,
  candidate,
  onGiven,
  onLeave,
}: {
  choice: ProtectorChoiceView;
  candidate: Candidate;
  onGiven: (workerIds: readonly string[], fromDate: string) => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { subject, wearers, date } = choice;
  const assign = useAssignMany();
  const { begin, end } = useOneAtATime();
  const changeKey = useChangeKey();
  const [reviewed, setReviewed] = useState<{
    body: ManyAssignmentsInput;
    preview: GivingPreview;
  } | null>(null);
  /** In the order in which the server names them. */
  const [sent, setSent] = useState<readonly string[]>([]);
  const barTo = useBar(choice, candidate);
  const form = useSchemaForm(GiveFields, {
    keepAs: `${candidate.modelId} ${candidate.outerModelId ?? ""}`,
    defaultValues: {
      use: subject.kind === "task" ? "subject" : "everywhere",
      fromDate: date,
      workerIds: [],
    },
  });
  const [use, fromDate] = form.watch(["use", "fromDate"]);
  const hasIt = ({ holds }: Wearer) =>
    holds.some(
      (one) =>
        one.use === use &&
        one.modelId === candidate.modelId &&
        one.outerModelId === candidate.outerModelId &&
        one.fromDate <= fromDate,
    );
  const holders = new Set(wearers.filter(hasIt).map(({ id }) => id));
  const chosen = form.watch("workerIds").filter((id) => !holders.has(id));
  const choose = (workerIds: string[]) =>
    form.setValue("workerIds", workerIds, { shouldDirty: true, shouldValidate: chosen.length > 0 });
  const free = wearers.filter((wearer) => barTo(wearer) === null && !holders.has(wearer.id));
  const { errors } = form.formState;
  const issueOf = (workerId: string): string | undefined => {
    const index = sent.indexOf(workerId);
    return index < 0
      ? undefined
      : (errors.workerIds as { message?: string }[] | undefined)?.[index]?.message;
  };

  const showIssues = showIssuesOn(
    {
      setError: (path, issue, options) =>
        form.setError(path.replace(/^assignment\./, "") as "fromDate", issue, options),
    },
    i18n,
  );
  const preview = useChangePreview("/assignments/many/preview", GivingPreview, showIssues);
  function give(body: ManyAssignmentsInput) {
    if (!begin()) return;
    assign.mutate(
      { body, key: changeKey.keyFor(body) },
      {
        onSuccess: () => {
          changeKey.forget();
          onGiven(body.workerIds, body.assignment.fromDate);
        },
        onError: (error) => {
          // What is wrong stands at its worker or field: back to the form.
          if (error instanceof ApiError && error.issues.length > 0) setReviewed(null);
          showIssues(error);
        },
        onSettled: end,
      },
    );
  }

  const filledIn = (
    <Form
      aria-label={i18n.t("Give {protector}", { protector: candidate.name })}
      onSubmit={form.handleSubmit((filled) => {
        if (preview.isPending) return;
        // Chosen before the date or the use was changed to one for which they have it.
        const workerIds = filled.workerIds.filter((id) => !holders.has(id));
        if (workerIds.length === 0) {
          form.setError("workerIds", { type: "custom", message: "too_small" });
          return;
        }
        const body = {
          workerIds,
          assignment: {
            taskId: filled.use === "subject" && subject.kind === "task" ? subject.id : null,
            areaId: filled.use === "area" ? (subject.area?.id ?? null) : null,
            innerModelId: candidate.modelId,
            outerModelId: candidate.outerModelId,
            fromDate: filled.fromDate,
            toDate: null,
            size: null,
            audioDb: null,
          },
        };
        setSent(workerIds);
        preview.mutate(body, { onSuccess: (found) => setReviewed({ body, preview: found }) });
      })}
    >
      {subject.kind === "task" && (
        <RadioGroup
          form={form}
          name="use"
          label={i18n.t("Worn")}
          choices={[
            { value: "subject", label: i18n.t("in the task {name}", { name: subject.name }) },
            ...(subject.area
              ? [
                  {
                    value: "area",
                    label: i18n.t("in the area {name}", { name: subject.area.name }),
                  },
                ]
              : []),
            { value: "everywhere", label: i18n.t("everywhere in noise") },
          ]}
        />
      )}
      <DateField
        form={form}
        name="fromDate"
        label={i18n.t("From")}
        note={i18n.t("An open assignment of the same use ends the day before.")}
      />
      <p className="give-who">
        <b>
          {i18n.t(
            "{count, plural, =0 {Nobody is chosen} one {# person is chosen} other {# people are chosen}}",
            { count: chosen.length },
          )}
        </b>{" "}
        {holders.size > 0 && (
          <span className="beneath">
            {i18n.t(
              "{count, plural, one {# has it already and is left as it is} other {# have it already and are left as they are}}",
              { count: holders.size },
            )}
          </span>
        )}{" "}
        {free.length > 0 && (
          <>
            <TextButton onClick={() => choose(free.map(({ id }) => id))}>
              {i18n.t("Choose all {count}", { count: free.length })}
            </TextButton>{" "}
            <TextButton
              onClick={() =>
                choose(free.filter(({ currentName }) => currentName === null).map(({ id }) => id))
              }
            >
              {i18n.t("Choose who has none")}
            </TextButton>{" "}
            {chosen.length > 0 && (
              <TextButton onClick={() => choose([])}>{i18n.t("Choose nobody")}</TextButton>
            )}
          </>
        )}
      </p>
      {errors.workerIds?.message && (
        <p className="field-error" role="alert">
          {i18n.t("Choose whom to give it to.")}
        </p>
      )}
      <DataTable<Wearer>
        caption={i18n.t("Who would wear it")}
        rows={wearers}
        rowKey={({ id }) => id}
        isTwoLine
        isSelected={({ id }) => chosen.includes(id)}
        empty={
          <Empty title={i18n.t("Nobody has this work on the nominal day of a job.")}>
            {i18n.t("Give it to a worker on the worker’s own page.")}
          </Empty>
        }
        columns={[
          {
            id: "worker",
            head: i18n.t("Worker"),
            isRowHead: true,
            sortValue: ({ name }) => name,
            cell: (wearer) => {
              const bar = barTo(wearer);
              return (
                <label className="choice">
                  <input
                    type="checkbox"
                    checked={chosen.includes(wearer.id)}
                    disabled={bar !== null || holders.has(wearer.id)}
                    onChange={(event) =>
                      choose(
                        event.target.checked
                          ? [...chosen, wearer.id]
                          : chosen.filter((id) => id !== wearer.id),
                      )
                    }
                  />
                  <span className="two-lines">
                    {wearer.name}
                    <span className="beneath">
                      {holders.has(wearer.id)
                        ? i18n.t("has it already")
                        : bar === null
                          ? [wearer.employeeNumber, wearer.crewName].filter(Boolean).join(", ")
                          : barWord(i18n, bar)}
                    </span>
                    {issueOf(wearer.id) && (
                      <span className="field-error">{issueOf(wearer.id)}</span>
                    )}
                  </span>
                </label>
              );
            },
          },
          {
            id: "now",
            head: i18n.t("Has now"),
            cell: ({ currentName }) => currentName ?? <b>{i18n.t("No protector")}</b>,
          },
          {
            id: "fit",
            head: i18n.t("Own fit"),
            hidesOnPhone: true,
            cell: ({ id, fits, checkedModelIds }) => {
              const fit = fits.find(({ modelId }) => modelId === candidate.modelId);
              if (candidate.outerModelId !== null) return "–";
              return fit ? (
                <span className="two-lines">
                  <span className="mono">{formatLevel(fit.parDb, locale)}</span>
                  <span className={fit.hasPassed === false ? "is-fault" : "beneath"}>
                    {ownFitWord(i18n, fit, candidate.isActiveCredited)}
                  </span>
                  {checkedModelIds.includes(candidate.modelId) && (
                    <span className="beneath">{i18n.t("active part passed")}</span>
                  )}
                </span>
              ) : (
                <TextLink to={paths.fittingOf(id)}>{i18n.t("Test the fit")}</TextLink>
              );
            },
          },
        ]}
      />
      {choice.hasMoreWearers && (
        <p className="beneath">
          {i18n.t("The first {count} by name; the others on their own pages.", {
            count: wearers.length,
          })}
        </p>
      )}
      <LookActions preview={preview} onLeave={onLeave} />
    </Form>
  );
  return (
    <>
      {/* Kept as it is filled in while what it would do stands in its place. */}
      <div hidden={reviewed !== null}>{filledIn}</div>
      {reviewed && (
        <GiveReview
          preview={reviewed.preview}
          protector={candidate.name}
          count={reviewed.body.workerIds.length}
          fromDate={reviewed.body.assignment.fromDate}
          isSaving={assign.isPending}
          error={assign.error}
          onGive={() => give(reviewed.body)}
          onBack={() => setReviewed(null)}
        />
      )}
    </>
  );
}

/** Why a worker can't be given the device: it isn't to be worn with what they wear, or nothing is known of it in this noise. */
function useBar(
  { singles, pairs }: ProtectorChoiceView,
  candidate: Candidate,
): (wearer: Wearer) => Bar | null {
  const { modelId, outerModelId } = candidate;
  const protectors = useQuery(references.protectors());
  const worksWith = (protectors.data?.rows ?? [])
    .filter(({ id }) => id === modelId || id === outerModelId)
    .map(({ data }) => data.worksWith);
  const all = [...singles, ...pairs];
  return ({ wornGear, fits }) => {
    const gear = wornGear.find((worn) => worksWith.some((works) => works[worn] === false));
    if (gear) return { code: "gear", gear };
    const fit = outerModelId === null ? fits.find((one) => one.modelId === modelId) : undefined;
    const lastFit = fit ? { ...fit, testedOn: "" } : null;
    return barToIssue({ ...candidate, lastFit }, all);
  };
}
