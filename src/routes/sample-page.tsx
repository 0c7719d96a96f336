import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useEffect, useRef, useState } from "react";
import { useSearchParams } from "react-router-dom";
import { formatDay, formatDayMonth, formatTime } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { formatLevel } from "../../shared/format/level";
import type { FileView } from "../../shared/schemas/outing";
import type { RunView } from "../../shared/schemas/run";
import { findRunDoubts, LEAST_SAMPLE_MIN } from "../../shared/schemas/run-doubts";
import { leastSampleMin } from "../../shared/schemas/survey";
import { localDate } from "../../shared/time/zone";
import { Button, ButtonLink } from "../components/button";
import { ComboboxField } from "../components/combobox-field";
import { Failed } from "../components/failed";
import { FileInput } from "../components/file-input";
import {
  CheckField,
  DateField,
  DurationField,
  Form,
  NumberField,
  SelectField,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  TextField,
  TimeField,
  useSchemaForm,
} from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextButton, TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { SpectrumField, useSpectrumCheck } from "../components/spectrum-field";
import { instrumentQueries } from "../features/instruments/queries";
import { doubtSentence } from "../features/outings/doubt-words";
import { type Overlap, overlapOf } from "../features/outings/overlap";
import { outingQueries, useRecordSample } from "../features/outings/queries";
import {
  createSampleDraftStore,
  elapsedMin,
  elapsedS,
  nextOf,
  type SampleDraft,
  timerText,
  toSend,
} from "../features/outings/sample-draft";
import {
  emptySample,
  hasFigures,
  SampleFields,
  type SampleValues,
  startOf,
  toSampleInput,
} from "../features/outings/sample-fields";
import { useUser } from "../features/session/session";
import { ApiError, newChangeKey } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { references, searchWorkers } from "../lib/references";
import { paths } from "../paths";
import "../styles/register.css";
import "../styles/sample.css";

/** A sample by hand, on a phone and with gloves on: one column, large targets, kept on the phone until it is saved. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const [search] = useSearchParams();
  const surveyId = search.get("survey");
  const survey = useQuery({ ...outingQueries.surveyTasks(surveyId ?? ""), enabled: !!surveyId });
  const [siteId, setSiteId] = useState(search.get("site") ?? user.sites[0]?.id ?? "");
  const site = user.sites.find(({ id }) => id === (survey.data?.siteId ?? siteId)) ?? user.sites[0];
  const tasks = useQuery(references.tasks(site?.id ?? ""));
  const instruments = useQuery(instrumentQueries.list());
  const [store] = useState(() => createSampleDraftStore(localStorage, user.id));
  const [kept] = useState(() => store.read());
  // What was measured of one task is not handed on to another.
  const waits =
    kept !== null &&
    (kept.timerStartedAt !== null || hasFigures({ ...emptySample, ...kept.values }));
  const [isDiscarding, setDiscarding] = useState(false);
  const [isMoreOpen, setMoreOpen] = useState(kept?.values.takenOn != null);
  const [files, setFiles] = useState<readonly FileView[]>(kept?.files ?? []);
  const [timerStartedAt, setTimerStartedAt] = useState(kept?.timerStartedAt ?? null);
  const pending = useRef<SampleDraft["pending"]>(kept?.pending ?? null);
  const [saved, setSaved] = useState<RunView | null>(null);
  const [serverDoubts, setServerDoubts] = useState<ApiError["issues"]>([]);
  const record = useRecordSample();
  const form = useSchemaForm(SampleFields, {
    mode: "onSubmit",
    keepAs: null,
    defaultValues: {
      ...emptySample,
      ...kept?.values,
      ...(search.get("task") && !waits ? { taskId: search.get("task") } : {}),
    },
  });
  const values = form.watch() as SampleValues;
  const now = useNow(timerStartedAt !== null);
  const spectrum = useSpectrumCheck(values.octaveBandsDb, values.levelDb);

  useEffect(() => {
    if (saved) return;
    store.write({ values, files, timerStartedAt, pending: pending.current });
  });

  const usable = (instruments.data?.rows ?? [])
    .filter((one) => one.siteId === site?.id && !one.isArchived && one.kind !== "calibrator")
    .toSorted((a, b) => b.kind.localeCompare(a.kind) || a.name.localeCompare(b.name));
  const instrument = usable.find(({ id }) => id === values.instrumentId);
  const targets = survey.data?.targets.filter(({ taskId }) => taskId !== null) ?? [];
  const offered = (tasks.data?.rows ?? []).filter(
    ({ id, isArchived }) =>
      !isArchived && (targets.length === 0 || targets.some(({ taskId }) => taskId === id)),
  );
  const task = offered.find(({ id }) => id === values.taskId);
  const target = targets.find(({ taskId }) => taskId === values.taskId);
  const nominal = survey.data?.nominalDay.filter(({ taskId }) => taskId === values.taskId) ?? [];
  const leastMin = target
    ? leastSampleMin(
        "task",
        target,
        nominal.length === 0
          ? null
          : nominal.reduce((sum, { durationMin }) => sum + durationMin, 0),
        1,
      )
    : LEAST_SAMPLE_MIN;
  const asFigure = (value: unknown) => (typeof value === "number" ? value : null);
  const timeZone = site?.timeZone ?? "UTC";
  const start = startOf(values, now, timeZone);
  const startsAt = start?.kind === "at" ? start.instant : null;
  const doubts = findRunDoubts({
    checkBeforeDb: asFigure(values.checkBeforeDb),
    checkAfterDb: asFigure(values.checkAfterDb),
    date: localDate(startsAt === null ? now : new Date(startsAt), timeZone),
    calibration: {
      dueOn: instrument?.calibrationDueOn ?? null,
      failedOn: instrument?.calibrationFailedOn ?? null,
    },
    durationMin: asFigure(values.durationMin),
    leastMin,
    needsChecks: true,
    covers: "part",
    shift: null,
    shown: [
      ...(values.isClipped ? (["clipped"] as const) : []),
      ...(values.isUnderRange ? (["under-range"] as const) : []),
    ],
  });
  // What only the server knows, as a calibration that failed, stands beside what the phone finds by itself.
  const asked = [
    ...doubts,
    ...serverDoubts.filter(({ code }) => !doubts.some((found) => found.code === code)),
  ];

  function toggleTimer() {
    if (timerStartedAt === null) {
      setTimerStartedAt(new Date().toISOString());
      form.setValue("durationMin", null);
      return;
    }
    form.setValue("startedAt", timerStartedAt);
    form.setValue("takenOn", null);
    form.setValue("takenFrom", null);
    form.setValue("durationMin", elapsedMin(timerStartedAt, new Date()), { shouldDirty: true });
    form.clearErrors("durationMin");
    setTimerStartedAt(null);
  }

  function save(filled: SampleValues) {
    if (asked.length > 0 && (filled.keptReason ?? "").trim().length < 3) {
      form.setError(
        "keptReason",
        { message: i18n.t("A reason is needed, in a few words.") },
        { shouldFocus: true },
      );
      return;
    }
    if (!spectrum.isSettled()) return;
    const begun = startOf(filled, new Date(), timeZone);
    if (begun?.kind !== "at") {
      setMoreOpen(true);
      form.setError(
        "takenFrom",
        {
          message:
            begun?.kind === "twice"
              ? i18n.t("The clock was set back: this time came twice. Choose another one.")
              : i18n.t("The clock was set forward: this time never came that day."),
        },
        { shouldFocus: true },
      );
      return;
    }
    const given = toSampleInput(filled, {
      startedAt: begun.instant,
      surveyId,
      timeZone,
      fileIds: files.map(({ id }) => id),
      isDoubtful: asked.length > 0,
    });
    const isDerived = filled.startedAt === null && filled.takenFrom === null;
    const sent = toSend(given, isDerived, pending.current, newChangeKey);
    pending.current = sent.pending;
    store.write({ values: filled, files, timerStartedAt, pending: pending.current });
    record.mutate(
      { body: sent.body, key: sent.pending.key },
      {
        onSuccess: (run) => {
          pending.current = null;
          store.write(null);
          setSaved(run);
          setServerDoubts([]);
        },
        onError: (error) => {
          if (error instanceof ApiError) {
            // Refused, and not lost on the way: it is another sample when it is sent again.
            if (error.status < 500) pending.current = null;
            setServerDoubts(error.issues.filter(({ path }) => path === "keptReason"));
          }
          showIssuesOn(form, i18n)(error);
        },
      },
    );
  }

  function goOn(next: SampleValues) {
    setSaved(null);
    setFiles([]);
    setServerDoubts([]);
    setTimerStartedAt(null);
    setDiscarding(false);
    pending.current = null;
    record.reset();
    form.reset(next);
    window.scrollTo(0, 0);
  }

  const wantedTask = (tasks.data?.rows ?? []).find(({ id }) => id === search.get("task")) ?? null;
  const isUnsaved = timerStartedAt !== null || hasFigures(values);
  function startEmpty() {
    store.write(null);
    goOn({ ...emptySample, taskId: wantedTask?.id ?? null, instrumentId: values.instrumentId });
  }
  const overlap = overlapOf(record.error);
  const overlapTimes = ({ from, to }: Overlap) => {
    const at = (instant: string) =>
      `${formatDayMonth(localDate(new Date(instant), timeZone), locale)}, ${formatTime(instant, timeZone)}`;
    return { from: at(from), to: to === null ? i18n.t("now") : at(to) };
  };

  if (saved) {
    const [reading] = saved.readings;
    return (
      <PageBody>
        <div className="sample-page">
          <PageHead
            title={i18n.t("Saved")}
            lead={i18n.t("{task}: {level} dB.", {
              task: saved.taskName ?? "",
              level: formatLevel(reading?.averageDb ?? null, locale),
            })}
          />
          <div className="sample-next">
            <Button size="worker" kind="primary" autoFocus onClick={() => goOn(nextOf(values))}>
              {i18n.t("Next sample of {task}", { task: saved.taskName ?? "" })}
            </Button>
            <Button size="worker" onClick={() => goOn({ ...nextOf(values), taskId: null })}>
              {i18n.t("Another task")}
            </Button>
            <ButtonLink size="worker" to={paths.run(saved.id)}>
              {i18n.t("Look at this run")}
            </ButtonLink>
            {surveyId && (
              <ButtonLink size="worker" to={paths.survey(surveyId)}>
                {i18n.t("Back to the survey")}
              </ButtonLink>
            )}
          </div>
        </div>
      </PageBody>
    );
  }

  return (
    <>
      <PageBody>
        <div className="sample-page">
          <PageHead
            way={
              surveyId && survey.data ? (
                <TextLink to={paths.survey(surveyId)}>{survey.data.name}</TextLink>
              ) : (
                <TextLink to={paths.outAndBack}>{i18n.t("Out and back")}</TextLink>
              )
            }
            title={i18n.t("Sample by hand")}
            lead={kept ? i18n.t("Kept on this phone until it is saved.") : undefined}
          />
          {isUnsaved && (
            <div className="sample-draft">
              {wantedTask !== null && wantedTask.id !== values.taskId && (
                <p>
                  {i18n.t("A sample of {task} waits here and is not saved.", {
                    task: task?.name ?? i18n.t("another task"),
                  })}
                </p>
              )}
              {isDiscarding ? (
                <>
                  <Button size="worker" autoFocus onClick={() => startEmpty()}>
                    {i18n.t("Discard what is typed")}
                  </Button>
                  <Button size="worker" onClick={() => setDiscarding(false)}>
                    {i18n.t("Keep what is typed")}
                  </Button>
                </>
              ) : (
                <TextButton onClick={() => setDiscarding(true)}>
                  {wantedTask !== null && wantedTask.id !== values.taskId
                    ? i18n.t("Start empty, with {task}", { task: wantedTask.name })
                    : i18n.t("Discard this draft")}
                </TextButton>
              )}
            </div>
          )}
          {tasks.error && <Failed error={tasks.error} onRetry={() => void tasks.refetch()} />}
          <Form
            labels="above"
            className="sample-form"
            aria-label={i18n.t("Sample by hand")}
            onSubmit={form.handleSubmit(save, ({ takenOn, takenFrom }) => {
              if (takenOn || takenFrom) setMoreOpen(true);
            })}
          >
            {user.sites.length > 1 && !surveyId && (
              <div className="field">
                <label className="field-label" htmlFor="sample-site">
                  {i18n.t("Site")}
                </label>
                <select
                  id="sample-site"
                  className="input"
                  value={site?.id ?? ""}
                  onChange={(event) => {
                    setSiteId(event.target.value);
                    form.setValue("taskId", null);
                    form.setValue("instrumentId", null);
                  }}
                >
                  {user.sites.map(({ id, name }) => (
                    <option key={id} value={id}>
                      {name}
                    </option>
                  ))}
                </select>
              </div>
            )}
            <SelectField
              form={form}
              name="taskId"
              label={i18n.t("Task")}
              emptyLabel={i18n.t("Choose one")}
              choices={offered.map(({ id, name }) => ({ value: id, label: name }))}
            />
            <SelectField
              form={form}
              name="instrumentId"
              label={i18n.t("Instrument")}
              emptyLabel={i18n.t("Choose one")}
              choices={usable.map(({ id, name, serialNumber }) => ({
                value: id,
                label: `${name}, ${serialNumber}`,
              }))}
            />
            <NumberField form={form} name="levelDb" label={i18n.t("Level, LAeq")} unit="dB" />
            <div className="sample-timer">
              <Button size="worker" kind="big" onClick={toggleTimer}>
                {timerStartedAt === null
                  ? i18n.t("Start the timer")
                  : i18n.t("Stop at {time}", { time: timerText(elapsedS(timerStartedAt, now)) })}
              </Button>
              {timerStartedAt === null && (
                <DurationField
                  form={form}
                  name="durationMin"
                  label={i18n.t("or minutes")}
                  unit="min"
                  note={
                    task &&
                    i18n.t("At least {least} are wanted.", {
                      least: formatDuration(leastMin, locale),
                    })
                  }
                />
              )}
            </div>
            {timerStartedAt === null && startsAt !== null && (
              <p className="sample-span">
                {i18n.t("From {from} to {to}, {day}.", {
                  from: formatTime(startsAt, timeZone),
                  to: formatTime(
                    new Date(
                      Date.parse(startsAt) + (asFigure(values.durationMin) ?? 0) * 60_000,
                    ).toISOString(),
                    timeZone,
                  ),
                  day: formatDay(localDate(new Date(startsAt), timeZone), locale),
                })}
              </p>
            )}
            <TextField
              form={form}
              name="place"
              label={i18n.t("Place")}
              isOptional
              inputProps={{ autoComplete: "off" }}
            />
            <FileInput
              label={i18n.t("Photo")}
              accept="image/*"
              atMost={6}
              isCamera
              files={files}
              onFiles={setFiles}
            />
            <TextAreaField
              form={form}
              name="unusual"
              label={i18n.t("What was unusual")}
              rows={2}
              isOptional
            />
            <NumberField
              form={form}
              name="checkBeforeDb"
              label={i18n.t("Field check before")}
              unit="dB"
              isOptional
            />
            <NumberField
              form={form}
              name="checkAfterDb"
              label={i18n.t("Field check after")}
              unit="dB"
              isOptional
            />
            <details
              className="sample-more"
              open={isMoreOpen}
              onToggle={(event) => setMoreOpen(event.currentTarget.open)}
            >
              <summary>{i18n.t("More: when, C, peak, octave bands, worker")}</summary>
              <div className="sample-form">
                <DateField
                  form={form}
                  name="takenOn"
                  label={i18n.t("Taken on")}
                  note={i18n.t("Of a sample that is typed in later. Empty: today.")}
                  isOptional
                />
                <TimeField
                  form={form}
                  name="takenFrom"
                  label={i18n.t("Taken from")}
                  note={i18n.t("The time at which it began. Empty: it ended just now.")}
                  isOptional
                />
                <ComboboxField
                  form={form}
                  name="workerId"
                  label={i18n.t("Worker")}
                  isOptional
                  search={searchWorkers}
                />
                <NumberField
                  form={form}
                  name="lceqDb"
                  label={i18n.t("LCeq")}
                  unit="dB"
                  isOptional
                />
                <NumberField
                  form={form}
                  name="lasMaxDb"
                  label={i18n.t("LASmax")}
                  unit="dB"
                  isOptional
                />
                <NumberField
                  form={form}
                  name="peakDb"
                  label={i18n.t("Peak, C")}
                  unit="dB"
                  isOptional
                />
                <SpectrumField
                  form={form}
                  name="octaveBandsDb"
                  label={i18n.t("Octave bands")}
                  check={spectrum}
                />
                <CheckField
                  form={form}
                  name="isClipped"
                  label={i18n.t("Overload")}
                  text={i18n.t("It showed overload")}
                />
                <CheckField
                  form={form}
                  name="isUnderRange"
                  label={i18n.t("Range")}
                  text={i18n.t("It showed levels under its range")}
                />
              </div>
            </details>
            {asked.length > 0 && (
              <div className="sample-doubts">
                <ul>
                  {asked.map(({ code, params }) => (
                    <li key={code}>{doubtSentence(i18n, code, params, locale)}</li>
                  ))}
                </ul>
                <TextAreaField
                  form={form}
                  name="keptReason"
                  label={i18n.t("Keep it, because…")}
                  rows={2}
                  note={i18n.t("Whatever uses this run then loses the standard’s name.")}
                />
              </div>
            )}
            {overlap ? (
              <p className="field-error" role="alert">
                {i18n.t(
                  "The instrument has another run from {from} to {to}. Give the time of this sample under More, or choose another instrument.",
                  overlapTimes(overlap),
                )}{" "}
                {overlap.runId && (
                  <TextLink to={paths.run(overlap.runId)}>{i18n.t("Look at that run")}</TextLink>
                )}
              </p>
            ) : (
              <FormProblem error={record.error} />
            )}
            <SubmitButton size="worker" isBusy={record.isPending}>
              {i18n.t("Save the sample")}
            </SubmitButton>
          </Form>
        </div>
      </PageBody>
      <Folio>
        {i18n.t("A sample speaks for its task, and not for the day of whoever did it.")}
      </Folio>
    </>
  );
}

/** The present moment: to the second while somebody watches it, else as often as a minute may turn. */
function useNow(isRunning: boolean): Date {
  const [now, setNow] = useState(() => new Date());
  useEffect(() => {
    setNow(new Date());
    const timer = setInterval(() => setNow(new Date()), isRunning ? 1000 : 15_000);
    return () => clearInterval(timer);
  }, [isRunning]);
  return now;
}
