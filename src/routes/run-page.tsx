import { useLingui } from "@lingui/react";
import { useMutation, useQuery } from "@tanstack/react-query";
import { type ReactNode, useState } from "react";
import { useNavigate, useParams, useSearchParams } from "react-router-dom";
import { formatDate, formatInstant } from "../../shared/format/date";
import { formatDose } from "../../shared/format/dose";
import { formatDuration } from "../../shared/format/duration";
import { formatLevel } from "../../shared/format/level";
import { type InstrumentView, type RunCorrection, RunView } from "../../shared/schemas/run";
import { localDate } from "../../shared/time/zone";
import { settingsWords } from "../../shared/words/register-words";
import { doubtWord } from "../../shared/words/run-words";
import { Button, ButtonLink } from "../components/button";
import { ConflictDialog, type ConflictField } from "../components/conflict-dialog";
import { type DataColumn, DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import {
  Form,
  FormActions,
  SubmitButton,
  showIssuesOn,
  TextAreaField,
  useSchemaForm,
} from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { COMMON_SETTINGS } from "../components/meter-settings";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { unaccountedText } from "../features/histories/history-words";
import { instrumentQueries } from "../features/instruments/queries";
import { runQueries, useRecordRun, useRunSaved } from "../features/runs/queries";
import {
  CorrectRunFields,
  driftDb,
  emptyReading,
  isDriftTooLarge,
  NewRunFields,
  type RunFormValues,
  StrikeFields,
  toRunCorrection,
  toRunInput,
  valuesOfRun,
} from "../features/runs/run-fields";
import { isCalibrationOut, RunFactsFields, RunHeadFields } from "../features/runs/run-form";
import { useUser } from "../features/session/session";
import { api } from "../lib/api";
import { useChangeKey } from "../lib/change-key";
import { useLocale } from "../lib/i18n";
import { useRevisedSave } from "../lib/revised-save";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/register.css";
import "../styles/runs.css";

type Reading = RunView["readings"][number];

export function Component() {
  const { i18n } = useLingui();
  const { id } = useParams();
  const run = useQuery({ ...runQueries.one(id ?? ""), enabled: id !== undefined });
  const instruments = useQuery(instrumentQueries.list());
  if (id === undefined) {
    return instruments.data ? (
      <NewRun instruments={instruments.data.rows} />
    ) : (
      <PageBody>
        <PageHead title={i18n.t("New run")} />
        {instruments.error && (
          <Failed error={instruments.error} onRetry={() => void instruments.refetch()} />
        )}
      </PageBody>
    );
  }
  if (run.data)
    return <Run key={run.data.id} run={run.data} instruments={instruments.data?.rows ?? []} />;
  return (
    <PageBody>
      <PageHead
        title={i18n.t("Run")}
        lead={run.error ? undefined : <span className="loading-line" />}
      />
      {run.error && <Failed error={run.error} onRetry={() => void run.refetch()} />}
    </PageBody>
  );
}

const presetsOf = (instrument: InstrumentView | undefined) =>
  instrument && instrument.presets.length > 0 ? instrument.presets : COMMON_SETTINGS;

function NewRun({ instruments }: { instruments: readonly InstrumentView[] }) {
  const { i18n } = useLingui();
  const user = useUser();
  const navigate = useNavigate();
  const [search] = useSearchParams();
  const changeKey = useChangeKey();
  const record = useRecordRun();
  const [first = COMMON_SETTINGS[0]] = COMMON_SETTINGS;
  const form = useSchemaForm(NewRunFields, {
    defaultValues: {
      instrumentId: "",
      workerId: search.get("worker"),
      date: localDate(new Date(), user.sites[0]?.timeZone ?? "UTC"),
      durationMin: null,
      checkBeforeDb: null,
      checkAfterDb: null,
      covers: "shift",
      keptReason: null,
      unusual: null,
      readings: first ? [emptyReading(first as RunFormValues["readings"][number]["settings"])] : [],
      reason: null,
    },
  });
  const instrument = instruments.find(({ id }) => id === form.watch("instrumentId"));
  const [filledFor, setFilledFor] = useState<string | null>(null);
  // The instrument's own settings rows, as long as nothing is typed into the ones that stand there.
  if (instrument && filledFor !== instrument.id) {
    setFilledFor(instrument.id);
    const isUntouched = form
      .getValues("readings")
      .every(({ dosePct, averageDb, lceqDb, lasMaxDb, peakDb }) =>
        [dosePct, averageDb, lceqDb, lasMaxDb, peakDb].every((value) => value === null),
      );
    if (isUntouched)
      queueMicrotask(() =>
        form.setValue(
          "readings",
          presetsOf(instrument).map((settings) =>
            emptyReading(settings as RunFormValues["readings"][number]["settings"]),
          ),
        ),
      );
  }
  const needsKeptReason = isCalibrationOut(instrument, form.watch("date"));
  return (
    <>
      <PageBody>
        <PageHead
          way={<TextLink to={paths.runs}>{i18n.t("Runs")}</TextLink>}
          title={i18n.t("New run")}
          lead={i18n.t(
            "One instrument, from out to back. Leave a row’s figures empty only if you take the row out.",
          )}
        />
        <Form
          aria-label={i18n.t("New run")}
          onSubmit={form.handleSubmit((values) => {
            const body = toRunInput(values);
            record.mutate(
              { body, key: changeKey.keyFor(body) },
              {
                onSuccess: (run) => {
                  changeKey.forget();
                  void navigate(paths.run(run.id));
                },
                onError: showIssuesOn(form, i18n),
              },
            );
          })}
        >
          <RunHeadFields form={form} instruments={instruments} />
          <RunFactsFields
            form={form}
            presets={presetsOf(instrument)}
            needsKeptReason={needsKeptReason}
          />
          <FormProblem error={record.error} />
          <FormActions>
            <SubmitButton isBusy={record.isPending}>{i18n.t("Save the run")}</SubmitButton>
            <Button onClick={() => void navigate(paths.runs)}>{i18n.t("Leave it")}</Button>
          </FormActions>
        </Form>
      </PageBody>
      <Folio>{i18n.t("Field checks more than 0.5 dB apart: ISO 9612 discards the run.")}</Folio>
    </>
  );
}

function coversWords(
  i18n: ReturnType<typeof useLingui>["i18n"],
  covers: RunView["covers"],
): string {
  switch (covers) {
    case "shift":
      return i18n.t("covers the shift");
    case "projected":
      return i18n.t("covers a part; the rest was like it");
    case "part":
      return i18n.t("covers a part; only evidence");
  }
}

function Run({ run, instruments }: { run: RunView; instruments: readonly InstrumentView[] }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const [doing, setDoing] = useState<"correct" | "strike" | null>(null);
  const timeZone = user.sites.find(({ id }) => id === run.siteId)?.timeZone ?? "UTC";
  const drift = driftDb(run.checkBeforeDb, run.checkAfterDb);
  const figure = (levelDb: number | null) => formatLevel(levelDb, locale);
  const columns: DataColumn<Reading>[] = [
    {
      id: "settings",
      head: i18n.t("Settings"),
      isRowHead: true,
      cell: ({ settings }) => settingsWords(i18n, settings, locale),
    },
    {
      id: "dose",
      head: i18n.t("Dose"),
      kind: "figure",
      cell: ({ dosePct }) => formatDose(dosePct, locale),
    },
    {
      id: "average",
      head: i18n.t("Average"),
      unit: "dB",
      kind: "figure",
      cell: ({ averageDb }) => figure(averageDb),
    },
    {
      id: "lceq",
      head: i18n.t("LCeq"),
      unit: "dB",
      kind: "figure",
      cell: ({ lceqDb }) => figure(lceqDb),
    },
    {
      id: "max",
      head: i18n.t("LASmax"),
      unit: "dB",
      kind: "figure",
      cell: ({ lasMaxDb }) => figure(lasMaxDb),
    },
    {
      id: "peak",
      head: i18n.t("Peak"),
      unit: "dB",
      kind: "figure",
      cell: ({ peak }) => (peak ? `${figure(peak.levelDb)} ${peak.weighting}` : "–"),
    },
  ];
  return (
    <>
      <PageBody
        marginWidthPx={240}
        margin={
          <>
            <MarginNote title={i18n.t("Field checks")} isRuled>
              <p>
                {i18n.t("Before {before}, after {after} dB.", {
                  before: figure(run.checkBeforeDb),
                  after: figure(run.checkAfterDb),
                })}{" "}
                {drift !== null &&
                  (isDriftTooLarge(drift) ? (
                    <b>
                      {i18n.t("{drift} dB apart: outside the tolerance.", { drift: figure(drift) })}
                    </b>
                  ) : (
                    i18n.t("{drift} dB apart: within the tolerance.", { drift: figure(drift) })
                  ))}
              </p>
              {run.doubts.map((code) => (
                <p key={code}>
                  <b>{doubtWord(i18n, code)}</b>
                </p>
              ))}
              {run.keptReason && (
                <>
                  <p>{i18n.t("Kept, because: {reason}", { reason: run.keptReason })}</p>
                  <p>{i18n.t("No result made of it bears the standard’s name.")}</p>
                </>
              )}
            </MarginNote>
            {run.files.length > 0 && (
              <MarginNote title={i18n.t("Files")}>
                <ul>
                  {run.files.map(({ id, name }) => (
                    <li key={id}>
                      <a className="link" href={`/api/files/${id}`} download>
                        {name}
                      </a>
                    </li>
                  ))}
                </ul>
              </MarginNote>
            )}
            <MarginNote title={i18n.t("Revision {number}", { number: run.revision })}>
              <p>
                {[run.authorName, formatInstant(run.recordedAt, timeZone, locale)]
                  .filter(Boolean)
                  .join(", ")}
                .
              </p>
            </MarginNote>
            {run.unusual && (
              <MarginNote title={i18n.t("Unusual")}>
                <p>{run.unusual}</p>
              </MarginNote>
            )}
          </>
        }
      >
        <PageHead
          way={
            <>
              <TextLink to={paths.runs}>{i18n.t("Runs")}</TextLink>
              {" / "}
              <TextLink to={paths.instrument(run.instrumentId)}>{run.serialNumber}</TextLink>
              {run.workerId && (
                <>
                  {" "}
                  / <TextLink to={paths.worker(run.workerId)}>{run.workerName}</TextLink>
                </>
              )}
            </>
          }
          title={i18n.t("{instrument}, {date}", {
            instrument: run.instrumentName,
            date: formatDate(run.date, locale),
          })}
          lead={
            <>
              {run.isVoid ? (
                <b>{i18n.t("Struck: it counts for nothing.")}</b>
              ) : run.isOut ? (
                <b>
                  {i18n.t("Out since {time}: it has neither length nor readings yet.", {
                    time: run.outAt ? formatInstant(run.outAt, timeZone, locale) : "–",
                  })}
                </b>
              ) : (
                i18n.t("{duration}, {covers}.", {
                  duration: formatDuration(run.durationMin, locale),
                  covers:
                    run.taskId === null
                      ? coversWords(i18n, run.covers)
                      : i18n.t("a sample of its task"),
                })
              )}{" "}
              {run.leftOut &&
                i18n.t("{duration} of its history are left out: {how}.", {
                  duration: formatDuration(run.leftOut.minutes, locale),
                  how: unaccountedText(i18n, run.leftOut, locale),
                })}{" "}
              {[
                run.taskName,
                run.place ?? run.areaName,
                run.surveyName && i18n.t("survey {name}", { name: run.surveyName }),
              ]
                .filter(Boolean)
                .join(", ")}
            </>
          }
          actions={
            run.can.correct &&
            !run.isVoid &&
            doing === null &&
            (run.isOut ? (
              <ButtonLink to={`${paths.outAndBack}?site=${run.siteId}`}>
                {i18n.t("Out and back")}
              </ButtonLink>
            ) : (
              <>
                <Button onClick={() => setDoing("correct")}>{i18n.t("Correct")}</Button>
                <Button onClick={() => setDoing("strike")}>{i18n.t("Strike")}</Button>
              </>
            ))
          }
        />
        <div className="figures-frame">
          <DataTable
            stacksOnPhone
            caption={i18n.t("Readings of this run")}
            columns={columns}
            rows={run.readings}
            rowKey={({ settings }) => JSON.stringify(settings)}
            empty={<Empty title={i18n.t("No reading was typed for this run.")} />}
          />
        </div>
        <p className="after-table">
          {run.workerId && !run.isVoid && !run.isOut && run.taskId === null && (
            <TextLink to={paths.result(run.workerId, run.date)}>
              {i18n.t("The day it belongs to")}
            </TextLink>
          )}
          {run.taskId && <TextLink to={paths.task(run.taskId)}>{i18n.t("Its task")}</TextLink>}
          {run.surveyId && (
            <>
              {" · "}
              <TextLink to={paths.survey(run.surveyId)}>{i18n.t("Its survey")}</TextLink>
            </>
          )}
          {run.historyId && (
            <>
              {" · "}
              <TextLink to={paths.history(run.historyId)}>{i18n.t("Its time history")}</TextLink>
            </>
          )}
          {run.shiftId && (
            <>
              {" · "}
              <TextLink to={paths.shift(run.shiftId)}>{i18n.t("Its shift")}</TextLink>
            </>
          )}
        </p>
        {doing === "correct" && (
          <Section title={i18n.t("Correct this run")} id="correct">
            <CorrectRun
              run={run}
              instrument={instruments.find(({ id }) => id === run.instrumentId)}
              onDone={() => setDoing(null)}
            />
          </Section>
        )}
        {doing === "strike" && (
          <Section title={i18n.t("Strike this run")} id="strike">
            <StrikeRun run={run} onDone={() => setDoing(null)} />
          </Section>
        )}
      </PageBody>
      <Folio>
        {i18n.t("What was recorded stays; a correction is the next revision, with its reason.")}
      </Folio>
    </>
  );
}

const bodyOf = (run: RunView): RunCorrection => ({
  // Only what is back is corrected.
  durationMin: run.durationMin as number,
  checkBeforeDb: run.checkBeforeDb,
  checkAfterDb: run.checkAfterDb,
  covers: run.covers,
  keptReason: run.keptReason,
  unusual: run.unusual,
  readings: run.readings,
  reason: "",
  isVoid: run.isVoid,
});

function useRunConflictFields(): ConflictField<RunCorrection>[] {
  const { i18n } = useLingui();
  const locale = useLocale();
  const level = (levelDb: number | null): ReactNode => formatLevel(levelDb, locale);
  return [
    {
      key: "durationMin",
      label: i18n.t("Run time"),
      show: ({ durationMin }) => formatDuration(durationMin, locale),
    },
    { key: "covers", label: i18n.t("It covers"), show: ({ covers }) => coversWords(i18n, covers) },
    {
      key: "checkBeforeDb",
      label: i18n.t("Field check before"),
      show: ({ checkBeforeDb }) => level(checkBeforeDb),
    },
    {
      key: "checkAfterDb",
      label: i18n.t("Field check after"),
      show: ({ checkAfterDb }) => level(checkAfterDb),
    },
    {
      key: "keptReason",
      label: i18n.t("Why it is kept"),
      show: ({ keptReason }) => keptReason ?? "–",
    },
    {
      key: "readings",
      label: i18n.t("Readings"),
      show: ({ readings }) =>
        readings
          .map(({ averageDb, dosePct }) =>
            averageDb === null ? formatDose(dosePct, locale) : formatLevel(averageDb, locale),
          )
          .join(", "),
    },
    { key: "unusual", label: i18n.t("Anything unusual"), show: ({ unusual }) => unusual ?? "–" },
    {
      key: "isVoid",
      label: i18n.t("Struck"),
      show: ({ isVoid }) => (isVoid ? i18n.t("yes") : i18n.t("no")),
    },
  ];
}

function CorrectRun({
  run,
  instrument,
  onDone,
}: {
  run: RunView;
  instrument: InstrumentView | undefined;
  onDone: () => void;
}) {
  const { i18n } = useLingui();
  const saved = useRunSaved();
  const fields = useRunConflictFields();
  const form = useSchemaForm(CorrectRunFields, { defaultValues: valuesOfRun(run) });
  const change = useRevisedSave<RunCorrection, RunView>({
    path: () => `/runs/${run.id}`,
    schema: RunView,
    toBody: (stored) => {
      const { reason: _, ...facts } = bodyOf(stored);
      return facts;
    },
    onSaved: (next) => {
      saved(next);
      onDone();
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <>
      <Form
        aria-label={i18n.t("Correct this run")}
        onSubmit={form.handleSubmit((values) => change.save(toRunCorrection(values), run.revision))}
      >
        <RunFactsFields
          form={form}
          presets={presetsOf(instrument)}
          needsKeptReason={isCalibrationOut(instrument, run.date) || run.doubts.length > 0}
        />
        <TextAreaField form={form} name="reason" label={i18n.t("Why it is corrected")} rows={2} />
        <FormProblem error={change.error} />
        <FormActions>
          <SubmitButton isBusy={change.isSaving}>
            {i18n.t("Save revision {number}", { number: run.revision + 1 })}
          </SubmitButton>
          <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
        </FormActions>
      </Form>
      {change.conflict && (
        <ConflictDialog
          title={i18n.t("Someone saved this run before you")}
          conflict={change.conflict}
          toBody={bodyOf}
          fields={fields}
          isSaving={change.isSaving}
          onSave={change.save}
          onKeepSaved={(current) => {
            saved(current);
            onDone();
          }}
          onClose={change.leaveConflict}
        />
      )}
    </>
  );
}

function StrikeRun({ run, onDone }: { run: RunView; onDone: () => void }) {
  const { i18n } = useLingui();
  const saved = useRunSaved();
  const form = useSchemaForm(StrikeFields, { defaultValues: { reason: "" } });
  const strike = useMutation({
    mutationFn: (reason: string) =>
      api.put(`/runs/${run.id}`, {
        body: { ...bodyOf(run), reason, isVoid: true },
        schema: RunView,
        ifMatch: String(run.revision),
      }),
    onSuccess: (next) => {
      saved(next);
      onDone();
    },
    onError: showIssuesOn(form, i18n),
  });
  return (
    <Form
      aria-label={i18n.t("Strike this run")}
      onSubmit={form.handleSubmit(({ reason }) => strike.mutate(reason))}
    >
      <TextAreaField
        form={form}
        name="reason"
        label={i18n.t("Why it is struck")}
        rows={2}
        note={i18n.t("It stays on record and counts for nothing; its day is worked out anew.")}
      />
      <FormProblem error={strike.error} />
      <FormActions>
        <SubmitButton isBusy={strike.isPending}>{i18n.t("Strike it")}</SubmitButton>
        <Button onClick={onDone}>{i18n.t("Leave as it was")}</Button>
      </FormActions>
    </Form>
  );
}
