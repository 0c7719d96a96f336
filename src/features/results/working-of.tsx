import { useLingui } from "@lingui/react";
import { type ReactNode, useMemo } from "react";
import type { DayEvaluation, DayInput, TimedTask } from "../../../shared/acoustics/types";
import { buildWorking, type WorkingRecord } from "../../../shared/acoustics/working";
import { formatDate } from "../../../shared/format/date";
import { isolate } from "../../../shared/i18n/isolate";
import { ruleSetVersion } from "../../../shared/rule-sets";
import type { ResultView } from "../../../shared/schemas/result";
import { Failed } from "../../components/failed";
import { TextButton, TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";
import { ResultFacts } from "./result-facts";
import { WearingCost } from "./wearing-cost";
import { workingCsv } from "./working-csv";
import { WorkingLines, WorkingStepView } from "./working-view";

/** Takes a result apart in the browser, by the engine that computed it. */
export function WorkingOf({
  result,
  input,
  evaluation,
  workingName,
  strip,
  seesMethods,
}: {
  result: ResultView;
  input: DayInput;
  evaluation: DayEvaluation;
  workingName: string;
  strip: ReactNode;
  /** The reader may open the protector's page, where every method stands beside the others. */
  seesMethods: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const governing = ruleSetVersion(result.governing.key, result.governing.version);
  const working = useMemo(() => {
    if (!governing) return null;
    const comparison = result.comparison.flatMap(
      ({ key, version }) => ruleSetVersion(key, version) ?? [],
    );
    return buildWorking(input, governing, comparison, evaluation);
  }, [result, input, evaluation, governing]);
  if (!working || !governing)
    return (
      <Failed>
        {i18n.t(
          "This version of the program does not know the rule set of this result. Its levels stand as they are.",
        )}
      </Failed>
    );

  function save() {
    if (!working) return;
    const file = new Blob(["\uFEFF", workingCsv(i18n, locale, working, result.id)], {
      type: "text/csv;charset=utf-8",
    });
    const link = document.createElement("a");
    link.href = URL.createObjectURL(file);
    link.download = `working-${workingName}.csv`;
    link.click();
    URL.revokeObjectURL(link.href);
  }

  return (
    <>
      <div className="working-top">
        <div>
          <WorkingLines working={working} />
          {strip}
          <WearingCost input={input} governing={governing} />
        </div>
        <ResultFacts
          result={result}
          workingName={workingName}
          csv={<TextButton onClick={save}>{i18n.t("CSV")}</TextButton>}
        />
      </div>
      {working.steps.map((step) => (
        <WorkingStepView key={step.number} step={step}>
          <Records records={step.records} result={result} input={input} seesMethods={seesMethods} />
        </WorkingStepView>
      ))}
    </>
  );
}

/** The records that a step rests on, as links to where they stand; those of one kind in one sentence. */
function Records({
  records,
  result,
  input,
  seesMethods,
}: {
  records: readonly WorkingRecord[];
  result: ResultView;
  input: DayInput;
  seesMethods: boolean;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const of = (kind: WorkingRecord["kind"]) => records.filter((record) => record.kind === kind);
  const tasks = input.shifts.flatMap((shift) => shift.tasks);
  const models = tasks.flatMap(({ protection }) =>
    protection ? [protection.inner, protection.outer] : [],
  );
  const levels = of("level-revision").flatMap(({ id }) => {
    const task = tasks.find(({ level }) => level?.revisionId === id);
    const source = result.sources[id];
    return task && source ? [{ id, to: paths.task(task.taskId), ...source }] : [];
  });
  const protectors = of("protector-revision").flatMap(({ id }) => {
    const model = models.find((data) => data?.revisionId === id);
    const source = result.sources[id];
    return model && source ? [{ id, to: paths.protector(model.modelId), ...source }] : [];
  });
  return (
    <>
      {of("shift-revision").map(({ id }) => {
        const shiftId = input.shifts.find(({ revisionId }) => revisionId === id)?.id;
        const shift = result.shifts.find((one) => one.id === shiftId);
        if (!shift) return null;
        return (
          <p key={id}>
            {i18n.t("Minutes:")}{" "}
            <TextLink to={paths.shift(shift.id)}>
              {i18n.t("shift {start}, revision {revision}", {
                start: shift.localStart,
                revision: shift.revision,
              })}
            </TextLink>
            {shift.authorName && ` ${i18n.t("by {name}", { name: shift.authorName })}`}
            {shift.reason && `, “${shift.reason}”`}.
          </p>
        );
      })}
      {levels.length > 0 && (
        <p>
          {i18n.t("Levels:")} <SourceLinks sources={levels} />
        </p>
      )}
      {protectors.length > 0 && (
        <p>
          {i18n.t("Protector’s data:")} <SourceLinks sources={protectors} />
        </p>
      )}
      {seesMethods && protectors.length > 0 && (
        <p>
          {i18n.t("Method by method, as it is today:")}{" "}
          <SourceLinks sources={methodsOf(tasks, result.worker.id)} />
        </p>
      )}
      {of("wearing-round").map(({ id }) => {
        const found = looksOf(tasks, id);
        const source = result.sources[id];
        if (!found || !source) return null;
        const date = formatDate(found.lastOn, locale);
        return (
          <p key={id}>
            {found.source === "own-report"
              ? i18n.t("Wearing: own report of {date}", { date })
              : source.label === ""
                ? i18n.t("Wearing: observation round of {date}", { date })
                : i18n.t("Wearing: observation round of {date} by {name}", {
                    date,
                    name: source.label,
                  })}
            {source.note && `, “${isolate(source.note)}”`}.
          </p>
        );
      })}
      {of("run").map(({ id }) => (
        <p key={id}>
          {i18n.t("Reading:")} <TextLink to={paths.run(id)}>{i18n.t("its run")}</TextLink>.
        </p>
      ))}
    </>
  );
}

const looksOf = (tasks: readonly TimedTask[], roundId: string) =>
  tasks
    .flatMap(({ wornFrom }) => (wornFrom?.how === "looks" ? wornFrom.looks : []))
    .find((looks) => looks.roundId === roundId);

/** Each task in which something is assigned, as a link to what is worn there by every method. */
function methodsOf(tasks: readonly TimedTask[], workerId: string) {
  const byTask = new Map(
    tasks.flatMap(({ taskId, name, protection }) =>
      protection
        ? [
            [
              taskId,
              {
                id: taskId,
                label: name,
                note: null,
                to: paths.atEar(protection.inner.modelId, {
                  taskId,
                  outerId: protection.outer?.modelId,
                  workerId,
                }),
              },
            ] as const,
          ]
        : [],
    ),
  );
  return [...byTask.values()];
}

/** Several records, and after them the note that they share. */
function SourceLinks({
  sources,
}: {
  sources: readonly { id: string; to: string; label: string; note: string | null }[];
}) {
  const notes = [...new Set(sources.flatMap(({ note }) => note ?? []))];
  return (
    <>
      {sources.map(({ id, to, label }, index) => (
        <span key={id}>
          {index > 0 && "; "}
          <TextLink to={to}>{label}</TextLink>
        </span>
      ))}
      {notes.length > 0 && `: ${notes.join("; ")}`}.
    </>
  );
}
