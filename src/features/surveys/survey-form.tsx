import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useEffect, useRef, useState } from "react";
import type { UseFormReturn } from "react-hook-form";
import type { z } from "zod";
import { type NoisePattern, planTaskSampling } from "../../../shared/acoustics/survey-plan";
import { formatShortDate } from "../../../shared/format/date";
import { formatDuration, formatMinutes } from "../../../shared/format/duration";
import {
  RISK_FACTORS,
  type RiskFactors,
  type Strategy,
  SurveyDetail,
  SurveyInput,
  type SurveyPlan,
} from "../../../shared/schemas/survey";
import {
  NOISE_PATTERNS,
  noisePatternWord,
  patternWords,
  planReason,
  riskFactorTitle,
  samplesOfLength,
  strategyNote,
  strategyTitle,
} from "../../../shared/surveys/words";
import { DateField, Field, SelectField, TextAreaField, TextField } from "../../components/form";
import { TextButton } from "../../components/link";
import { NumberInput, type Typed } from "../../components/number-input";
import { RecordForm } from "../../components/record-form";
import { useLocale } from "../../lib/i18n";
import { isOffNominal } from "../../lib/nominal-check";
import { problemText } from "../../lib/problem-text";
import { messageUnder } from "./form-message";
import { surveyQueries } from "./queries";
import { Reservations } from "./reservations-field";

type Input = z.input<typeof SurveyInput>;
export type SurveyFormState = UseFormReturn<Input, unknown, SurveyInput>;
type Planned = Pick<SurveyPlan, "targets" | "people" | "seed" | "groupSize">;

const NO_ANSWER = { answer: null, note: "" };
const noAnswers: RiskFactors = {
  impulse: NO_ANSWER,
  vibration: NO_ANSWER,
  "ototoxic-substances": NO_ANSWER,
  "warning-signals": NO_ANSWER,
};

const toBody = (view: SurveyDetail): SurveyInput => SurveyInput.parse(view);

const toTarget = ({
  taskId,
  samplesCount,
  sampleMin,
  pattern,
  cycleMin,
}: SurveyPlan["targets"][number]) => ({ taskId, samplesCount, sampleMin, pattern, cycleMin });

/** What the plan proposes, as the form's values. */
const proposed = ({ targets, people, seed }: Planned) => ({
  drawSeed: seed,
  targets: targets.map(toTarget),
  people: people.map(({ workerId, part }) => ({ workerId, part })),
});

/** A survey's plan: filled in from what the standard asks, and changed where an officer knows better. */
export function SurveyForm({
  survey,
  plan: firstPlan,
  jobName,
  siteId,
  jobId,
  today,
  purpose,
  taskIds,
  onDirty,
  onSaved,
  onLeave,
}: {
  /** Why it is planned, in words; and the tasks that are to be sampled, where the reason names some. Of a new one. */
  purpose?: string;
  taskIds?: readonly string[];
  onDirty?: (isDirty: boolean) => void;
  /** Null: a new one. */
  survey: SurveyDetail | null;
  plan: SurveyPlan;
  jobName: string;
  siteId: string;
  jobId: string;
  today: string;
  onSaved: (view: SurveyDetail) => void;
  onLeave: () => void;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const [plan, setPlan] = useState(firstPlan);
  const [problem, setProblem] = useState<unknown>(null);

  async function planAnew(
    form: SurveyFormState,
    asked: { strategy: Strategy; seed?: string },
    which: "all" | "people",
  ) {
    setProblem(null);
    try {
      const next = await client.fetchQuery(surveyQueries.plan({ siteId, jobId, ...asked }));
      setPlan(next);
      const { targets, people, drawSeed } = proposed(next);
      const named = (form.getValues("people") ?? []).filter(({ part }) => part === "named");
      const isNamed = new Set(named.map(({ workerId }) => workerId));
      form.setValue("drawSeed", drawSeed);
      form.setValue("people", [
        ...people.filter(({ workerId }) => !isNamed.has(workerId)),
        ...named,
      ]);
      if (which === "all") form.setValue("targets", targets, { shouldDirty: true });
      form.clearErrors(["targets", "people"]);
    } catch (error) {
      setProblem(error);
    }
  }

  return (
    <RecordForm
      name={survey ? i18n.t("Change a survey") : i18n.t("New survey")}
      schema={SurveyInput}
      viewSchema={SurveyDetail}
      path="/surveys"
      keepAs={jobId}
      record={survey}
      toBody={toBody}
      defaultValues={
        survey
          ? toBody(survey)
          : {
              siteId,
              jobId,
              name: i18n.t("{group}, {date}", {
                group: jobName,
                date: formatShortDate(today, locale),
              }),
              purpose: purpose ?? "",
              strategy: plan.strategy,
              fromDate: today,
              toDate: today,
              observers: [],
              riskFactors: noAnswers,
              reservations: [],
              ...proposed(narrowed(plan, taskIds ?? [])),
            }
      }
      conflictTitle={i18n.t("Someone saved this survey before you")}
      fields={[
        { key: "name", label: i18n.t("Name"), show: ({ name }) => name },
        { key: "purpose", label: i18n.t("Purpose"), show: ({ purpose }) => purpose || "–" },
        {
          key: "strategy",
          label: i18n.t("Strategy"),
          show: ({ strategy }) => strategyTitle(i18n, strategy),
        },
        {
          key: "fromDate",
          label: i18n.t("From"),
          show: ({ fromDate }) => formatShortDate(fromDate, locale),
        },
        {
          key: "toDate",
          label: i18n.t("To"),
          show: ({ toDate }) => formatShortDate(toDate, locale),
        },
        {
          key: "targets",
          label: i18n.t("Samples"),
          show: ({ targets }) =>
            targets.map((target) => samplesOfLength(i18n, target, locale)).join(", "),
        },
        { key: "people", label: i18n.t("People"), show: ({ people }) => people.length },
        {
          key: "reservations",
          label: i18n.t("Instruments"),
          show: ({ reservations }) => reservations.length,
        },
        {
          key: "observers",
          label: i18n.t("Who observes"),
          show: ({ observers }) => observers.join(", ") || "–",
        },
        {
          key: "riskFactors",
          label: i18n.t("Beside the level"),
          show: ({ riskFactors }) =>
            i18n.t("{count} answered", {
              count: Object.values(riskFactors).filter(({ answer }) => answer !== null).length,
            }),
        },
      ]}
      onSaved={(view) => {
        client.setQueryData(surveyQueries.one(view.id).queryKey, view);
        void client.invalidateQueries({ queryKey: surveyQueries.all });
        void client.invalidateQueries({ queryKey: ["measuring-needs"] });
        onSaved(view);
      }}
      onLeave={onLeave}
    >
      {(form) => (
        <>
          <KeptPlan
            form={form}
            plan={plan}
            onDirty={onDirty}
            onOther={(asked) =>
              void client
                .fetchQuery(surveyQueries.plan({ siteId, jobId, ...asked }))
                .then(setPlan, setProblem)
            }
          />
          <TextField form={form} name="name" label={i18n.t("Name")} />
          <TextAreaField form={form} name="purpose" label={i18n.t("Purpose")} rows={2} isOptional />
          <StrategyField
            form={form}
            plan={plan}
            onChoose={(strategy) =>
              void planAnew(form, { strategy, seed: form.getValues("drawSeed") }, "all")
            }
          />
          <DateField form={form} name="fromDate" label={i18n.t("From")} />
          <DateField form={form} name="toDate" label={i18n.t("To")} />
          <TargetsField form={form} plan={plan} survey={survey} />
          <PeopleField
            form={form}
            plan={plan}
            known={survey?.peopleNames ?? {}}
            onDrawAgain={() =>
              void planAnew(form, { strategy: form.getValues("strategy") }, "people")
            }
          />
          {problem !== null && <p className="field-error">{problemText(i18n, problem)}</p>}
          <Reservations form={form} instruments={plan.instruments} surveyId={survey?.id ?? null} />
          <ObserversField form={form} />
          <RiskField form={form} />
        </>
      )}
    </RecordForm>
  );
}

/** A plan of which only some tasks are to be sampled; of all of them where it has none of those. */
const narrowed = (plan: SurveyPlan, taskIds: readonly string[]): SurveyPlan => {
  const targets = plan.targets.filter(({ taskId }) => taskId !== null && taskIds.includes(taskId));
  return targets.length === 0 ? plan : { ...plan, targets };
};

/** What was typed before a reload rests on the plan that was drawn then: it is fetched again by its seed. */
function KeptPlan({
  form,
  plan,
  onDirty,
  onOther,
}: {
  form: SurveyFormState;
  plan: SurveyPlan;
  onDirty?: (isDirty: boolean) => void;
  onOther: (asked: { strategy: Strategy; seed: string }) => void;
}) {
  const [strategy, seed] = form.watch(["strategy", "drawSeed"]);
  const { isDirty } = form.formState;
  const isOther = plan.strategy !== strategy || plan.seed !== seed;
  const latest = useRef(onOther);
  latest.current = onOther;
  useEffect(() => {
    // A plan that is being asked for anew sets the form's values itself.
    const timer = setTimeout(() => isOther && latest.current({ strategy, seed }), 400);
    return () => clearTimeout(timer);
  }, [isOther, strategy, seed]);
  useEffect(() => onDirty?.(isDirty), [isDirty, onDirty]);
  return null;
}

type TypedTarget = Input["targets"][number];
const figure = (value: unknown) => (typeof value === "number" ? value : null);

/** What the standard asks for of a target, by the pattern of its noise that was chosen. */
function askedOf(
  plan: SurveyPlan,
  facts: SurveyPlan["targets"][number],
  { taskId, pattern = "steady", cycleMin = null }: TypedTarget,
): Pick<SurveyPlan["targets"][number], "samplesCount" | "sampleMin" | "reasons"> {
  if (taskId === null || plan.strategy !== "task" || facts.nominalMin === null) return facts;
  const { sampleCount, sampleMin, reasons } = planTaskSampling({
    durationMin: facts.nominalMin,
    pattern,
    cycleMin: figure(cycleMin),
    samplesDb: [],
  });
  // A third of a task is seldom a whole minute, and a plan is made in whole ones.
  const planned = pattern === "fluctuating" ? Math.ceil(sampleMin - 1e-9) : sampleMin;
  return { samplesCount: sampleCount, sampleMin: planned, reasons: [...reasons] };
}

/** Fewer samples than are asked for, or shorter ones. */
const belowAsked = (
  { samplesCount, sampleMin }: TypedTarget,
  asked: { samplesCount: number; sampleMin: number },
): boolean =>
  (figure(samplesCount) ?? asked.samplesCount) < asked.samplesCount ||
  (figure(sampleMin) ?? asked.sampleMin) < asked.sampleMin - 1e-9;

function StrategyField({
  form,
  plan,
  onChoose,
}: {
  form: SurveyFormState;
  plan: SurveyPlan;
  onChoose: (strategy: Strategy) => void;
}) {
  const { i18n } = useLingui();
  const strategy = form.watch("strategy");
  return (
    <Field
      label={i18n.t("Strategy")}
      isGroup
      error={messageUnder(form.formState.errors, "strategy")}
      note={i18n.t("{strategy} suits it: {reason}. ISO 9612:2009, {clause}.", {
        strategy: strategyTitle(i18n, plan.proposedStrategy),
        reason: patternWords(i18n, plan.strategyReason),
        clause: plan.strategyClause,
      })}
    >
      {() =>
        (["task", "job", "full-day"] as const).map((one) => (
          <label key={one} className="choice">
            <input
              type="radio"
              name="strategy"
              checked={strategy === one}
              onChange={() => {
                form.setValue("strategy", one, { shouldDirty: true });
                onChoose(one);
              }}
            />
            <span>
              {strategyTitle(i18n, one)}
              <span className="beneath block">{strategyNote(i18n, one)}</span>
            </span>
          </label>
        ))
      }
    </Field>
  );
}

function TargetsField({
  form,
  plan,
  survey,
}: {
  form: SurveyFormState;
  plan: SurveyPlan;
  survey: SurveyDetail | null;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const targets = form.watch("targets");
  const put = (next: unknown) =>
    form.setValue("targets", next as Input["targets"], {
      shouldDirty: true,
      shouldValidate: form.formState.isSubmitted,
    });
  const change = (index: number, part: Partial<Record<keyof TypedTarget, Typed | string>>) =>
    put(targets.map((target, at) => (at === index ? { ...target, ...part } : target)));
  /** Another pattern asks for another length; one that somebody typed stays. */
  const choosePattern = (index: number, part: { pattern: NoisePattern; cycleMin: Typed }) => {
    const target = targets[index]!;
    const facts = plan.targets.find(({ taskId }) => taskId === target.taskId);
    const before = facts && askedOf(plan, facts, target);
    const after = facts && askedOf(plan, facts, { ...target, ...part } as TypedTarget);
    const isAsAsked = before !== undefined && target.sampleMin === before.sampleMin;
    change(index, { ...part, ...(after && isAsAsked ? { sampleMin: after.sampleMin } : {}) });
  };
  const left = plan.targets.filter(
    ({ taskId }) => !targets.some((target) => target.taskId === taskId),
  );
  return (
    <Field
      label={i18n.t("What is sampled")}
      isGroup
      error={messageUnder(form.formState.errors, "targets")}
      note={i18n.t(
        "{count, plural, one {# worker} other {# workers}} in the group. Times beside the nominal ones are what the shifts of the last three months really had; those more than 15 % off are bold.",
        {
          count: plan.groupSize,
        },
      )}
    >
      {() => (
        <div className="survey-rows">
          <table className="survey-targets">
            <thead>
              <tr>
                <th scope="col">{i18n.t("Task")}</th>
                <th scope="col">{i18n.t("Nominal, and as worked")}</th>
                <th scope="col">{i18n.t("Samples")}</th>
                <th scope="col">{i18n.t("Minutes each")}</th>
                <th scope="col">
                  <span className="sr-only">{i18n.t("What can be done")}</span>
                </th>
              </tr>
            </thead>
            <tbody>
              {targets.map((target, index) => {
                const facts = plan.targets.find(({ taskId }) => taskId === target.taskId);
                const asked = facts && askedOf(plan, facts, target);
                const below = asked && belowAsked(target, asked);
                const name =
                  facts?.taskName ??
                  (target.taskId ? survey?.taskNames[target.taskId] : null) ??
                  i18n.t("The whole of the work");
                return (
                  <tr key={target.taskId ?? "whole"}>
                    <th scope="row">
                      {name}
                      {facts && (
                        <span className="beneath block">
                          {(asked?.reasons ?? facts.reasons)
                            .map(({ code, clause }) => `${planReason(i18n, code)} (${clause})`)
                            .join("; ")}
                        </span>
                      )}
                      {target.taskId !== null && (
                        <span className="survey-pattern">
                          <select
                            className="input"
                            aria-label={i18n.t("How the noise of {task} runs", { task: name })}
                            value={target.pattern ?? "steady"}
                            onChange={({ target: { value } }) =>
                              choosePattern(index, {
                                pattern: value as NoisePattern,
                                cycleMin: null,
                              })
                            }
                          >
                            {NOISE_PATTERNS.map((pattern) => (
                              <option key={pattern} value={pattern}>
                                {noisePatternWord(i18n, pattern)}
                              </option>
                            ))}
                          </select>
                          {target.pattern === "cyclic" && (
                            <span className="survey-cycle">
                              {i18n.t("Minutes of a cycle")}
                              <NumberInput
                                aria-label={i18n.t("Minutes of a cycle of {task}", { task: name })}
                                value={target.cycleMin ?? null}
                                onValue={(cycleMin) =>
                                  choosePattern(index, { pattern: "cyclic", cycleMin })
                                }
                              />
                            </span>
                          )}
                        </span>
                      )}
                      {below && asked && (
                        <span className="is-fault block">
                          {i18n.t(
                            "Below what the standard asks for: {samples}. Shorter samples are refused unless somebody says why they are kept.",
                            { samples: samplesOfLength(i18n, asked, locale) },
                          )}
                        </span>
                      )}
                    </th>
                    <td>
                      {facts?.nominalMin != null && formatDuration(facts.nominalMin, locale)}
                      {facts?.observed && (
                        <span
                          className={`block ${
                            isOffNominal(facts.nominalMin ?? 0, facts.observed.meanMin)
                              ? "is-fault"
                              : "beneath"
                          }`}
                        >
                          {facts.observed.sdMin === null
                            ? i18n.t("as worked {mean} min, in {count} of {all} shifts", {
                                mean: formatMinutes(facts.observed.meanMin, locale),
                                count: facts.observed.count,
                                all: facts.observed.shiftsCount,
                              })
                            : i18n.t("as worked {mean} ± {sd} min, in {count} of {all} shifts", {
                                mean: formatMinutes(facts.observed.meanMin, locale),
                                sd: formatMinutes(facts.observed.sdMin, locale),
                                count: facts.observed.count,
                                all: facts.observed.shiftsCount,
                              })}
                        </span>
                      )}
                    </td>
                    <td data-label={i18n.t("Samples")}>
                      <NumberInput
                        aria-label={i18n.t("Samples of {task}", { task: name })}
                        value={target.samplesCount}
                        onValue={(value) => change(index, { samplesCount: value })}
                      />
                    </td>
                    <td data-label={i18n.t("Minutes each")}>
                      <NumberInput
                        aria-label={i18n.t("Minutes of each sample of {task}", { task: name })}
                        value={target.sampleMin}
                        onValue={(value) => change(index, { sampleMin: value })}
                      />
                    </td>
                    <td>
                      {targets.length > 1 && (
                        <TextButton
                          aria-label={i18n.t("Leave {task} out", { task: name })}
                          onClick={() => put(targets.filter((_, at) => at !== index))}
                        >
                          {i18n.t("Leave out")}
                        </TextButton>
                      )}
                    </td>
                  </tr>
                );
              })}
            </tbody>
          </table>
          {left.length > 0 && (
            <p className="beneath">
              {i18n.t("Left out:")}{" "}
              {left.map((planned) => (
                <TextButton
                  key={planned.taskId ?? "whole"}
                  className="mr-4"
                  onClick={() => put([...targets, toTarget(planned)])}
                >
                  {i18n.t("sample {task} again", {
                    task: planned.taskName ?? i18n.t("The whole of the work"),
                  })}
                </TextButton>
              ))}
            </p>
          )}
        </div>
      )}
    </Field>
  );
}

function PeopleField({
  form,
  plan,
  known,
  onDrawAgain,
}: {
  form: SurveyFormState;
  plan: SurveyPlan;
  known: SurveyDetail["peopleNames"];
  onDrawAgain: () => void;
}) {
  const { i18n } = useLingui();
  const people = form.watch("people") ?? [];
  const nameOf = (workerId: string) =>
    plan.people.find((person) => person.workerId === workerId) ?? known[workerId];
  const words = {
    drawn: i18n.t("drawn"),
    reserve: i18n.t("in reserve"),
    named: i18n.t("named"),
  };
  return (
    <Field
      label={i18n.t("Whom to measure")}
      isGroup
      isOptional
      error={messageUnder(form.formState.errors, "people")}
      note={i18n.t(
        "Drawn by chance with the seed {seed}: with the same seed the same group gives the same draw.",
        { seed: form.watch("drawSeed") },
      )}
    >
      {() => (
        <div>
          <ol className="survey-people">
            {people.map(({ workerId, part }) => {
              const person = nameOf(workerId);
              const name = person?.name ?? i18n.t("Worker");
              return (
                <li key={workerId}>
                  <span>
                    {name} <span className="beneath">{person?.employeeNumber}</span>
                  </span>
                  <span className="beneath">{words[part]}</span>
                  <TextButton
                    aria-label={i18n.t("Leave {name} out", { name })}
                    onClick={() =>
                      form.setValue(
                        "people",
                        people.filter((other) => other.workerId !== workerId),
                        { shouldDirty: true },
                      )
                    }
                  >
                    {i18n.t("Leave out")}
                  </TextButton>
                </li>
              );
            })}
          </ol>
          {people.length === 0 && (
            <p className="beneath">{i18n.t("Nobody in the group to draw from.")}</p>
          )}
          <TextButton onClick={onDrawAgain}>{i18n.t("Draw again")}</TextButton>
        </div>
      )}
    </Field>
  );
}

/** Who watches while it is measured: one name a line. */
function ObserversField({ form }: { form: SurveyFormState }) {
  const { i18n } = useLingui();
  const observers = form.watch("observers") ?? [];
  const [typed, setTyped] = useState<string | null>(null);
  const text = typed ?? observers.join("\n");
  return (
    <Field
      label={i18n.t("Who observes")}
      isOptional
      error={messageUnder(form.formState.errors, "observers")}
      note={i18n.t("One name a line: who watches the work while it is measured.")}
    >
      {({ readOnly: _, ...wires }) => (
        <textarea
          className="input"
          rows={2}
          {...wires}
          value={text}
          onChange={(event) => {
            setTyped(event.target.value);
            form.setValue(
              "observers",
              event.target.value
                .split("\n")
                .map((name) => name.trim())
                .filter((name) => name !== ""),
              { shouldDirty: true },
            );
          }}
        />
      )}
    </Field>
  );
}

function RiskField({ form }: { form: SurveyFormState }) {
  const { i18n } = useLingui();
  return (
    <Field
      label={i18n.t("Beside the level")}
      isGroup
      isOptional
      error={messageUnder(form.formState.errors, "riskFactors")}
      note={i18n.t("Article 4(6) of Directive 2003/10/EC asks for these; they are asked once.")}
    >
      {() => (
        <div className="survey-risks">
          {RISK_FACTORS.map((factor) => (
            <div key={factor} className="survey-risk">
              <SelectField
                form={form}
                name={`riskFactors.${factor}.answer`}
                label={riskFactorTitle(i18n, factor)}
                emptyLabel={i18n.t("not asked yet")}
                isOptional
                choices={[
                  { value: "yes", label: i18n.t("yes") },
                  { value: "no", label: i18n.t("no") },
                ]}
              />
              <TextField
                form={form}
                name={`riskFactors.${factor}.note`}
                label={i18n.t("Note")}
                isOptional
                inputProps={{
                  "aria-label": i18n.t("Note on {factor}", {
                    factor: riskFactorTitle(i18n, factor),
                  }),
                }}
              />
            </div>
          ))}
        </div>
      )}
    </Field>
  );
}
