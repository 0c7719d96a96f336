import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useQuery, useQueryClient } from "@tanstack/react-query";
import { useMemo, useState } from "react";
import { useParams } from "react-router-dom";
import { formatDate, formatInstant } from "../../shared/format/date";
import { formatBoundedDose } from "../../shared/format/dose";
import { formatDuration } from "../../shared/format/duration";
import { formatLevel } from "../../shared/format/level";
import { formatNumber } from "../../shared/format/number";
import { withinSentence } from "../../shared/format/words";
import type { Locale } from "../../shared/i18n";
import {
  type HistoryAnalysis,
  type HistoryStretch,
  type HistoryStretches,
  HistoryView,
} from "../../shared/schemas/history";
import type { ResultView } from "../../shared/schemas/result";
import { ConflictDialog, type ConflictField } from "../components/conflict-dialog";
import { Failed } from "../components/failed";
import { type Choice, showIssuesOn } from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead, Section } from "../components/page";
import { verdictWord } from "../components/verdict";
import { clockText, type HistoryClock } from "../features/histories/history-clock";
import {
  DrawingLanes,
  StretchList,
  useStretchEditing,
} from "../features/histories/history-drawing";
import { HistoryPicture } from "../features/histories/history-picture";
import { HistoryPrint } from "../features/histories/history-print";
import { historyQueries } from "../features/histories/history-queries";
import { toStretches } from "../features/histories/history-stretches";
import {
  CompareTable,
  Distribution,
  QuartersTable,
  TasksTable,
} from "../features/histories/history-tables";
import {
  boundWord,
  clockOf,
  criterionText,
  lengthText,
  rangeText,
  unaccountedText,
} from "../features/histories/history-words";
import { CHANNEL_SYMBOL } from "../features/histories/import-words";
import { type SaidOfLeftOut, useLeftOut } from "../features/histories/left-out-form";
import { useDrawing } from "../features/histories/use-drawing";
import { doubtSentence } from "../features/outings/doubt-words";
import { dayResultQuery } from "../features/results/queries";
import { ApiError, apiAddress } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { problemText } from "../lib/problem-text";
import { references } from "../lib/references";
import { type Conflict, useRevisedSave } from "../lib/revised-save";
import { paths } from "../paths";
import "uplot/dist/uPlot.min.css";
import "../styles/history.css";

export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const history = useQuery(historyQueries.one(id));
  if (history.data)
    return <History key={`${history.data.id}`} history={history.data} error={history.error} />;
  return (
    <PageBody>
      <PageHead
        way={<TextLink to={paths.runs}>{i18n.t("Runs")}</TextLink>}
        title={i18n.t("Time history")}
        lead={history.error ? undefined : <span className="loading-line" />}
      />
      {history.error ? (
        <Failed error={history.error} onRetry={() => void history.refetch()} />
      ) : (
        <div className="shift-room" />
      )}
    </PageBody>
  );
}

/** The two lines of a day's verdict, as far as a change of a history can alter them. */
const verdictsOf = ({ figures }: ResultView) => [figures.verdictAtEar, figures.verdictOutside];

interface VerdictChange {
  readonly before: ReturnType<typeof verdictsOf>;
  readonly after: ReturnType<typeof verdictsOf>;
}

/** What stands in a body of stretches, apart, so that each part can be chosen by itself. */
interface Parts {
  tasks: HistoryStretch[];
  leftOut: HistoryStretch[];
  how: HistoryView["leftOut"];
}
const partsOf = ({
  stretches,
  leftOut,
}: Pick<HistoryStretches, "stretches" | "leftOut">): Parts => ({
  tasks: stretches.filter(({ kind }) => kind === "task"),
  leftOut: stretches.filter(({ kind }) => kind === "left-out"),
  how: leftOut,
});

function History({ history, error }: { history: HistoryView; error: unknown }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const client = useQueryClient();
  const { id, workerId, date } = history;
  const clock = useMemo(() => clockOf(history), [history]);
  const envelope = useQuery(historyQueries.envelope(id, null));
  const analysis = useQuery(historyQueries.analysis(id));
  const canChange = history.can.change === true && !history.isVoid;
  const siteTasks = useQuery({ ...references.tasks(history.siteId), enabled: canChange });
  const dayQuery = dayResultQuery(workerId ?? "", date);
  // A history can come before its day does: then there is no result, and nothing is wrong.
  const day = useQuery({
    ...dayQuery,
    enabled: workerId !== null,
    retry: false,
    throwOnError: false,
  });
  const [verdictChange, setVerdictChange] = useState<VerdictChange | null>(null);

  const drawing = useDrawing(history);
  const taskNames = useMemo(
    () => ({
      ...Object.fromEntries((siteTasks.data?.rows ?? []).map((task) => [task.id, task.name])),
      ...history.taskNames,
      ...Object.fromEntries(history.tasks.map((task) => [task.id, task.name])),
    }),
    [siteTasks.data, history],
  );
  const editing = useStretchEditing({ history, clock, drawing, taskNames });
  const said = useLeftOut(history, drawing);
  const tasks = useMemo((): Choice[] => {
    const ofShift = history.tasks.map(({ id: value, name }) => ({ value, label: name }));
    const known = new Set(ofShift.map(({ value }) => value));
    const others = (siteTasks.data?.rows ?? [])
      .filter((task) => !known.has(task.id))
      .map((task) => ({ value: task.id, label: task.name }));
    return [...ofShift, ...others];
  }, [history.tasks, siteTasks.data]);

  async function onSaved(view: HistoryView) {
    const before = day.data;
    client.setQueryData(historyQueries.one(id).queryKey, view);
    drawing.reset(view);
    void client.invalidateQueries({ queryKey: historyQueries.analysis(id).queryKey });
    void client.invalidateQueries({ queryKey: ["runs"] });
    if (!before) return;
    const after = await client.fetchQuery({ ...dayQuery, staleTime: 0, retry: false });
    const change = { before: verdictsOf(before), after: verdictsOf(after) };
    setVerdictChange(change.before.join() === change.after.join() ? null : change);
  }

  const save = useRevisedSave<HistoryStretches, HistoryView>({
    path: () => `/histories/${id}/stretches`,
    schema: HistoryView,
    toBody: ({ stretches, leftOut }) => ({ stretches, leftOut }),
    onSaved: (view) => void onSaved(view),
    onError: (error) => {
      const asked =
        error instanceof ApiError && error.issues.find(({ path }) => path === "keptReason");
      said.ask(asked ? doubtSentence(i18n, asked.code, asked.params, locale) : null);
      if (!asked) showIssuesOn(said.form, i18n)(error);
    },
  });
  const sent = (
    stretches: readonly HistoryStretch[],
    { leftOut: how, keptReason }: SaidOfLeftOut,
  ): HistoryStretches => ({ stretches: [...stretches], leftOut: how, keptReason, reason: null });
  const conflict: Conflict<HistoryStretches, HistoryView> | null =
    save.conflict ??
    (drawing.overtaken && canChange
      ? {
          mine: sent(drawing.overtaken.stretches, { leftOut: history.leftOut, keptReason: null }),
          saved: history,
        }
      : null);

  const leftOut = drawing.drawn.filter(({ kind }) => kind === "left-out");
  const interval = intervalText(i18n, history.intervalMs, locale);
  return (
    <>
      <PageBody>
        <PageHead
          way={
            <>
              <TextLink to={paths.runs}>{i18n.t("Runs")}</TextLink>
              {" / "}
              <TextLink to={paths.run(history.runId)}>{i18n.t("Its run")}</TextLink>
              {workerId && (
                <>
                  {" / "}
                  <TextLink to={paths.worker(workerId)}>{history.workerName}</TextLink>
                </>
              )}
            </>
          }
          title={i18n.t("{worker}, {date}", {
            worker: history.workerName ?? history.instrumentName,
            date: formatDate(date, locale),
          })}
          lead={
            <>
              {analysis.data ? (
                <b>{headText(i18n, history, analysis.data, locale)}</b>
              ) : (
                <span className="loading-line" />
              )}{" "}
              <span className="shift-facts">
                {i18n.t("{instrument}, {serial}: {count} values, {interval}, of {channels}.", {
                  instrument: history.instrumentName,
                  serial: history.serialNumber,
                  count: formatNumber(history.valuesCount, 0, locale),
                  interval,
                  channels: history.channels.map((channel) => CHANNEL_SYMBOL[channel]).join(", "),
                })}
              </span>
            </>
          }
          actions={
            <>
              {workerId && day.data && (
                <TextLink to={paths.result(workerId, date)}>{i18n.t("The day’s result")}</TextLink>
              )}
              <a className="link" href={apiAddress(`/histories/${id}/levels.csv`)} download>
                {i18n.t("Levels, CSV")}
              </a>
              <a className="link" href={apiAddress(`/files/${history.fileId}`)} download>
                {i18n.t("The file as it came")}
              </a>
            </>
          }
        />
        {history.isVoid && (
          <p className="notice-line">
            <b>{i18n.t("Its run is struck: it counts for nothing.")}</b>
          </p>
        )}
        {history.keptReason && (
          <p className="notice-line">
            {i18n.t("Kept, because: {reason}", { reason: history.keptReason })}{" "}
            {i18n.t("No result made of it bears the standard’s name.")}
          </p>
        )}
        {verdictChange && workerId && (
          <p className="notice-line" role="status">
            <b>{i18n.t("The day has another verdict now.")}</b> {verdictText(i18n, verdictChange)}{" "}
            <TextLink to={paths.result(workerId, date)}>{i18n.t("Open the day")}</TextLink>
          </p>
        )}
        {error != null && <Failed error={error} />}
        {envelope.error ? (
          <Failed error={envelope.error} onRetry={() => void envelope.refetch()} />
        ) : (
          <HistoryPicture
            history={history}
            envelope={envelope.data}
            analysis={analysis.data}
            leftOut={leftOut}
            summary={summaryText(i18n, history, clock, analysis.data, leftOut, locale)}
            tableLink={
              <a className="link" href="#quarters">
                {i18n.t("The same as a table")}
              </a>
            }
            lanes={(place) => (
              <DrawingLanes
                history={history}
                clock={clock}
                drawing={drawing}
                editing={editing}
                taskNames={taskNames}
                {...place}
              />
            )}
          />
        )}
        {envelope.data && analysis.data && (
          <HistoryPrint
            envelope={envelope.data}
            analysis={analysis.data}
            clock={clock}
            channels={history.channels}
            drawn={drawing.drawn}
            taskNames={taskNames}
          />
        )}
        <Section id="brackets" title={i18n.t("Tasks, and what is left out")}>
          <StretchList
            history={history}
            clock={clock}
            drawing={drawing}
            editing={editing}
            tasks={tasks}
            taskNames={taskNames}
            leftOut={said}
            isSaving={save.isSaving}
            onSave={() => {
              setVerdictChange(null);
              said.read((answer) =>
                save.save(sent(toStretches(drawing.drawn), answer), drawing.revision),
              );
            }}
          />
          {!canChange && history.leftOut && history.covers !== "part" && (
            <p className="field-note">
              {i18n.t("The time left out was: {how}.", {
                how: unaccountedText(i18n, history.leftOut, locale),
              })}
            </p>
          )}
          {/* Once a conflict is settled nothing is left of it to be said. */}
          {(drawing.isChanged || said.isChanged) && said.doubt === null && (
            <FormProblem error={save.error} />
          )}
        </Section>
        {analysis.error && !analysis.data && (
          <Failed onRetry={() => void analysis.refetch()}>
            {problemText(i18n, analysis.error)} {i18n.t("The picture of the levels is complete.")}
          </Failed>
        )}
        {analysis.data && (
          <div aria-busy={analysis.isFetching}>
            <div className="shift-columns">
              <Section id="tasks" title={i18n.t("By task")}>
                <TasksTable history={history} analysis={analysis.data} />
              </Section>
              <Section id="distribution" title={i18n.t("How the levels spread")}>
                <Distribution analysis={analysis.data} />
              </Section>
            </div>
            <Section id="results" title={i18n.t("What it comes to")}>
              <CompareTable analysis={analysis.data} />
            </Section>
            <Section id="quarters" title={i18n.t("Quarter by quarter")}>
              <QuartersTable analysis={analysis.data} clock={clock} />
            </Section>
          </div>
        )}
      </PageBody>
      <Folio>
        {i18n.t(
          "From the levels as recorded, revision {number}. A bound holds whatever happened between the values.",
          {
            number: history.revision,
          },
        )}
      </Folio>
      {conflict && (
        <ConflictDialog<Parts, HistoryView>
          title={i18n.t("Someone saved these brackets before you")}
          conflict={{ mine: partsOf(conflict.mine), saved: conflict.saved }}
          toBody={partsOf}
          savedBy={({ authorName, savedAt, timeZone }) =>
            [authorName, formatInstant(savedAt, timeZone, locale)].filter(Boolean).join(", ")
          }
          fields={conflictFields(
            i18n,
            clock,
            { ...taskNames, ...conflict.saved.taskNames },
            locale,
          )}
          isSaving={save.isSaving}
          onSave={({ tasks: chosen, leftOut: without, how }, revision) =>
            save.save(
              sent([...chosen, ...without], {
                leftOut: without.length > 0 ? (how ?? { how: "unknown" }) : null,
                keptReason: conflict.mine.keptReason,
              }),
              revision,
            )
          }
          onKeepSaved={(saved) => {
            save.leaveConflict();
            client.setQueryData(historyQueries.one(id).queryKey, saved);
            void client.invalidateQueries({ queryKey: historyQueries.analysis(id).queryKey });
            drawing.reset(saved);
          }}
          onClose={save.leaveConflict}
        />
      )}
    </>
  );
}

function intervalText(i18n: I18n, intervalMs: number, locale: Locale): string {
  if (intervalMs === 1000) return i18n.t("one a second");
  if (intervalMs < 1000)
    return i18n.t("{count} a second", { count: formatNumber(1000 / intervalMs, 0, locale) });
  return i18n.t("one every {seconds} s", { seconds: formatNumber(intervalMs / 1000, 0, locale) });
}

/** What matters of it, in one sentence. */
function headText(
  i18n: I18n,
  { leftOut, covers }: HistoryView,
  { counted, everything }: HistoryAnalysis,
  locale: Locale,
): string {
  const parts: string[] = [];
  const duration = formatDuration(counted.durationS / 60, locale);
  parts.push(
    counted.laeqDb === null
      ? i18n.t("{duration} counted", { duration })
      : i18n.t("LAeq {level} dB over {duration}", {
          level: formatLevel(counted.laeqDb, locale),
          duration,
        }),
  );
  const outS = everything.durationS - counted.durationS;
  const [governing] = counted.readings;
  if (governing) {
    const values = {
      dose: formatBoundedDose(governing.dosePct, governing.bound, locale),
      criterion: withinSentence(criterionText(i18n, governing, locale), locale),
      bound: boundWord(i18n, governing.bound),
    };
    parts.push(
      outS > 0
        ? i18n.t("dose of what is counted {dose} against {criterion}, {bound}", values)
        : i18n.t("dose {dose} against {criterion}, {bound}", values),
    );
  }
  const out = { duration: lengthText(i18n, outS, locale) };
  if (outS > 0)
    parts.push(
      leftOut?.how === "unknown" && covers !== "part"
        ? i18n.t("{duration} left out, and how that time was is not known", out)
        : i18n.t("{duration} left out", out),
    );
  return `${parts.join("; ")}.`;
}

function summaryText(
  i18n: I18n,
  history: HistoryView,
  clock: HistoryClock,
  analysis: HistoryAnalysis | undefined,
  leftOut: readonly { fromS: number; toS: number }[],
  locale: Locale,
): string {
  const from = clockText(clock, 0);
  const to = clockText(clock, clock.lengthS);
  if (!analysis) return i18n.t("Levels of the shift from {from} to {to}.", { from, to });
  const { counted, quarters } = analysis;
  const loudest = quarters.reduce<(typeof quarters)[number] | null>(
    (most, one) =>
      one.laeq && (most?.laeq?.levelDb ?? Number.NEGATIVE_INFINITY) < one.laeq.levelDb ? one : most,
    null,
  );
  const sentences = [
    i18n.t("Levels of the shift from {from} to {to}.", { from, to }),
    headText(i18n, history, analysis, locale),
    counted.percentilesDb["10"] !== undefined && counted.percentilesDb["90"] !== undefined
      ? i18n.t("For most of the time between {low} and {high} dB.", {
          low: formatLevel(counted.percentilesDb["90"], locale),
          high: formatLevel(counted.percentilesDb["10"], locale),
        })
      : "",
    loudest?.laeq
      ? i18n.t("Loudest quarter of an hour {range}, {level} dB.", {
          range: rangeText(clock, loudest),
          level: formatLevel(loudest.laeq.levelDb, locale, loudest.laeq.bound),
        })
      : "",
    ...analysis.runningDose.map((dose) =>
      i18n.t("Dose at the end against {criterion}: {dose}.", {
        criterion: withinSentence(criterionText(i18n, dose, locale), locale),
        dose: formatBoundedDose(dose.dosePct.at(-1) ?? null, dose.bound, locale),
      }),
    ),
    ...leftOut.map((one) => i18n.t("Left out: {range}.", { range: rangeText(clock, one) })),
  ];
  return sentences.filter(Boolean).join(" ");
}

function verdictText(i18n: I18n, { before, after }: VerdictChange): string {
  const lines = [i18n.t("At the ear"), i18n.t("Without protection")];
  return lines
    .flatMap((line, place) => {
      const [was, is] = [before[place], after[place]];
      return was === undefined || is === undefined || was === is
        ? []
        : [
            i18n.t("{line}: {before}, now {after}.", {
              line,
              before: verdictWord(i18n, was),
              after: verdictWord(i18n, is),
            }),
          ];
    })
    .join(" ");
}

function conflictFields(
  i18n: I18n,
  clock: HistoryClock,
  taskNames: Readonly<Record<string, string>>,
  locale: Locale,
): ConflictField<Parts>[] {
  const list = (stretches: readonly HistoryStretch[]) =>
    stretches.length === 0 ? (
      i18n.t("none")
    ) : (
      <ul className="conflict-list">
        {stretches
          .toSorted((a, b) => a.fromS - b.fromS)
          .map((one) => (
            <li key={`${one.kind} ${one.fromS}`}>
              <span className="mono">{rangeText(clock, one)}</span>{" "}
              {one.kind === "task" ? taskNames[one.taskId] : one.reason}
            </li>
          ))}
      </ul>
    );
  return [
    { key: "tasks", label: i18n.t("Tasks"), show: ({ tasks }) => list(tasks) },
    { key: "leftOut", label: i18n.t("Left out"), show: ({ leftOut }) => list(leftOut) },
    {
      key: "how",
      label: i18n.t("The time left out was"),
      show: ({ how }) => (how ? unaccountedText(i18n, how, locale) : i18n.t("none")),
    },
  ];
}
