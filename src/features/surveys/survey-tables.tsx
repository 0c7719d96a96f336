import { useLingui } from "@lingui/react";
import { formatDate, formatShortDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { formatLevel } from "../../../shared/format/level";
import { withoutStop } from "../../../shared/format/words";
import { RUN_DOUBTS } from "../../../shared/schemas/run-doubts";
import type { SurveyDetail, SurveySample, TargetResult } from "../../../shared/schemas/survey";
import { nextWords, notCountedWords } from "../../../shared/surveys/words";
import { doubtWord } from "../../../shared/words/run-words";
import { DataTable } from "../../components/data-table";
import { Empty } from "../../components/empty";
import { TextLink } from "../../components/link";
import { useLocale } from "../../lib/i18n";
import { paths } from "../../paths";

/** What is wanted against what is there, target by target, and what the standard asks for next. */
export function ResultsTable({ survey }: { survey: SurveyDetail }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const canSample = survey.can.change && survey.state === "measuring";
  return (
    <DataTable<TargetResult>
      caption={i18n.t("Results, target by target")}
      rows={survey.results}
      rowKey={({ position }) => String(position)}
      isTwoLine
      stacksOnPhone
      columns={[
        {
          id: "target",
          head: i18n.t("Sampled"),
          isRowHead: true,
          cell: ({ taskId, taskName }) =>
            taskId ? (
              <TextLink to={paths.task(taskId)}>{taskName}</TextLink>
            ) : (
              i18n.t("The whole of the work")
            ),
        },
        {
          id: "samples",
          head: i18n.t("Samples"),
          unit: i18n.t("there, of wanted"),
          kind: "figure",
          cell: ({ samplesCount, wantedCount }) => `${samplesCount} / ${wantedCount}`,
        },
        {
          id: "level",
          head: i18n.t("Level"),
          unit: "LAeq, dB",
          kind: "figure",
          cell: ({ levelDb }) => <b>{formatLevel(levelDb, locale)}</b>,
        },
        {
          id: "range",
          // By tasks the standard asks about the span of the samples, otherwise about their standard deviation.
          head: survey.strategy === "task" ? i18n.t("Spread") : i18n.t("Standard deviation"),
          unit: survey.strategy === "task" ? "dB" : "u1, dB",
          kind: "figure",
          cell: ({ rangeDb, scatterDb }) =>
            survey.strategy === "task" ? (
              formatLevel(rangeDb, locale)
            ) : (
              <span className="two-lines">
                {formatLevel(scatterDb, locale)}
                <span className="beneath">
                  {i18n.t("span {range}", { range: formatLevel(rangeDb, locale) })}
                </span>
              </span>
            ),
        },
        {
          id: "lc",
          head: "LC − LA",
          unit: "dB",
          kind: "figure",
          hidesOnPhone: true,
          cell: ({ lcMinusLaDb }) => formatLevel(lcMinusLaDb, locale),
        },
        {
          id: "next",
          head: i18n.t("Asked for next"),
          cell: (result) => (
            <span className="two-lines">
              <span className={result.asksFor === null ? undefined : "is-fault"}>
                {nextWords(i18n, result)}
              </span>
              {result.keptReasons.map((reason) => (
                <span key={reason} className="beneath">
                  {i18n.t("kept: {reason}. Not by the standard’s name any more.", {
                    reason: withoutStop(reason),
                  })}
                </span>
              ))}
            </span>
          ),
        },
        ...(canSample && survey.strategy === "task"
          ? [
              {
                id: "take",
                head: <span className="sr-only">{i18n.t("What can be done")}</span>,
                kind: "right" as const,
                cell: ({ taskId, taskName }: TargetResult) =>
                  taskId && (
                    <TextLink
                      to={`${paths.sample}?survey=${survey.id}&task=${taskId}&site=${survey.siteId}`}
                      aria-label={i18n.t("Take a sample of {task}", { task: taskName ?? "" })}
                    >
                      {i18n.t("Take a sample")}
                    </TextLink>
                  ),
              },
            ]
          : []),
      ]}
    />
  );
}

/** Every sample with its own run, what speaks against it, and whether it counts. */
export function SamplesTable({ survey }: { survey: SurveyDetail }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const targetName = ({ taskId, position }: SurveySample) => {
    const of = survey.results.find((result) => result.position === position);
    if (of) return of.taskName ?? i18n.t("The whole of the work");
    return (taskId && survey.taskNames[taskId]) || "–";
  };
  return (
    <DataTable<SurveySample>
      caption={i18n.t("Samples of this survey")}
      rows={survey.samples}
      rowKey={({ runId, fromS }) => `${runId} ${fromS ?? ""}`}
      isTwoLine
      stacksOnPhone
      empty={
        <Empty title={i18n.t("No sample yet.")}>
          {survey.state === "planned"
            ? i18n.t("Begin measuring, then take samples or send instruments out.")
            : i18n.t(
                "Samples taken by hand, runs that are back and brackets under their time histories stand here.",
              )}
        </Empty>
      }
      columns={[
        {
          id: "date",
          head: i18n.t("Day"),
          isRowHead: true,
          cell: (sample) => (
            <span className="two-lines">
              <TextLink
                to={paths.run(sample.runId)}
                aria-label={i18n.t("Run of {date}, {instrument}", {
                  date: formatDate(sample.date, locale),
                  instrument: sample.serialNumber,
                })}
              >
                {formatShortDate(sample.date, locale)}
              </TextLink>
              <span className="beneath">{sample.serialNumber}</span>
            </span>
          ),
        },
        {
          id: "what",
          head: i18n.t("Sampled"),
          cell: (sample) => (
            <span className="two-lines">
              <span>{targetName(sample)}</span>
              <span className="beneath">
                {[
                  sample.workerName,
                  sample.place,
                  sample.fromS === null ? null : i18n.t("bracket of a time history"),
                ]
                  .filter(Boolean)
                  .join(", ") || " "}
              </span>
            </span>
          ),
        },
        {
          id: "length",
          head: i18n.t("Length"),
          kind: "right",
          cell: ({ durationMin }) => formatDuration(durationMin, locale),
        },
        {
          id: "level",
          head: i18n.t("Level"),
          unit: "LAeq, dB",
          kind: "figure",
          cell: ({ laeqDb, notCounted }) => (
            <span className={notCounted === null ? undefined : "is-struck"}>
              {formatLevel(laeqDb, locale)}
            </span>
          ),
        },
        {
          id: "counts",
          head: i18n.t("Does it count?"),
          cell: ({ notCounted, doubts, keptReason, unusual }) => (
            <span className="two-lines">
              <span className={notCounted === null ? undefined : "is-fault"}>
                {notCounted === null
                  ? keptReason === null
                    ? i18n.t("counts")
                    : i18n.t("kept: {reason}", { reason: keptReason })
                  : notCountedWords(i18n, notCounted)}
              </span>
              <span className="beneath">
                {[
                  ...RUN_DOUBTS.filter((code) => doubts.includes(code)).map((code) =>
                    doubtWord(i18n, code),
                  ),
                  unusual,
                ]
                  .filter(Boolean)
                  .join("; ")}
              </span>
            </span>
          ),
        },
      ]}
    />
  );
}
