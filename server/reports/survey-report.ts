import type { I18n } from "@lingui/core";
import { formatDate, formatShortDate } from "../../shared/format/date";
import { formatShare } from "../../shared/format/dose";
import { formatDuration } from "../../shared/format/duration";
import { formatLevel, formatLevelWithUnit, formatUncertainty } from "../../shared/format/level";
import { createI18n, isLocale, type Locale } from "../../shared/i18n";
import { isolate } from "../../shared/i18n/isolate";
import type { GroupBudgetView } from "../../shared/schemas/group";
import type { InstrumentView } from "../../shared/schemas/run";
import type { RunDoubtCode } from "../../shared/schemas/run-doubts";
import { RISK_FACTORS, type SurveyDetail, type SurveySample } from "../../shared/schemas/survey";
import {
  nextWords,
  noBudgetWords,
  notCountedWords,
  riskFactorTitle,
  samplesOfLength,
  sourceWord,
  stateTitle,
  strategyTitle,
} from "../../shared/surveys/words";
import { instrumentClassWord, instrumentKindWord } from "../../shared/words/register-words";
import { doubtWord } from "../../shared/words/run-words";
import { rows } from "../lib/db";
import { type Actor, findVisible } from "../lib/policy";
import { Job } from "../models/task";
import { programmePolicy } from "../policies";
import { groupView } from "../queries/group-statistics";
import { surveyDetail } from "../queries/surveys";
import type { Block, Report } from "./blocks";
import { frameOf, originOf } from "./frame";

interface UsedInstrument {
  name: string;
  kind: InstrumentView["kind"];
  class: string;
  serialNumber: string;
  calibratedOn: string | null;
  hasPassed: boolean | null;
  dueOn: string | null;
}

/** The instruments of a survey's runs, each with its laboratory calibration before the survey's last day. */
const usedInstruments = (survey: SurveyDetail) =>
  rows<UsedInstrument>(
    `SELECT i.name, i.kind, i.class, i.serial_number AS "serialNumber", c.done_on::text AS "calibratedOn", c.has_passed AS "hasPassed",
       coalesce(c.due_on, i.calibration_due_on)::text AS "dueOn"
     FROM instruments i LEFT JOIN LATERAL (SELECT x.* FROM instrument_calibrations x WHERE x.instrument_id = i.id AND x.done_on <= :toDate
       ORDER BY x.done_on DESC, x.created_at DESC LIMIT 1) c ON TRUE
     WHERE i.id IN (SELECT r.instrument_id FROM runs r WHERE r.survey_id = :id AND NOT r.is_void) ORDER BY i.serial_number`,
    { id: survey.id, toDate: survey.toDate },
  );

/**
 * A survey as a document, with what the standard asks of its report in the standard's order; what is not on record is said to
 * be missing, and listed again at the end.
 *
 * @source iso-9612-2009 15
 */
export async function surveyReport(actor: Actor, id: string): Promise<Report> {
  const locale = isLocale(actor.language) ? actor.language : "en";
  const i18n = await createI18n(locale);
  const survey = await surveyDetail(actor, id);
  const job = await findVisible(Job, programmePolicy, survey.jobId, actor);
  const group = await groupView(actor, job, null);
  const instruments = await usedInstruments(survey);
  const origin = await originOf(actor.organizationId, survey.siteId);
  const budget = group.budgets.find(({ surveyId }) => surveyId === id) ?? null;
  const missing: string[] = [];
  const orMissing = (text: string, what: string): string => {
    if (text.trim() !== "") return text;
    missing.push(what);
    return i18n.t("Not on record");
  };
  const blocks = [
    ...general(i18n, survey, origin, orMissing),
    ...workAnalysis(i18n, locale, survey, group.workersCount, orMissing),
    ...instrumentation(i18n, locale, instruments, orMissing),
    ...measurements(i18n, locale, survey, missing),
    ...resultsOf(i18n, locale, survey, budget, group.nominalDay, missing),
    ...beside(i18n, survey),
    ...whatIsMissing(i18n, missing),
  ];
  const result = budget?.budget;
  return {
    ...frameOf(i18n, locale, origin),
    title: i18n.t("Survey report: {name}", { name: survey.name }),
    lead: result
      ? i18n.t("{group}: LEX,8h {level} dB(A), expanded uncertainty {uncertainty} dB. {state}.", {
          group: survey.jobName,
          level: formatLevel(result.lexDb, locale),
          uncertainty: formatLevel(result.expandedDb, locale),
          state: stateTitle(i18n, survey.state),
        })
      : i18n.t("{group}: no daily exposure level yet. {state}.", {
          group: survey.jobName,
          state: stateTitle(i18n, survey.state),
        }),
    blocks,
  };
}

type OrMissing = (text: string, what: string) => string;

function general(
  i18n: I18n,
  survey: SurveyDetail,
  { organization, site }: { organization: string; site: string },
  orMissing: OrMissing,
): Block[] {
  return [
    { kind: "heading", text: i18n.t("General information") },
    {
      kind: "facts",
      rows: [
        [i18n.t("Organization"), isolate(organization)],
        [i18n.t("Site"), isolate(site)],
        [
          i18n.t("Measured by"),
          orMissing(survey.observers.map(isolate).join(", "), i18n.t("who measured")),
        ],
        [i18n.t("Planned by"), orMissing(survey.authorName ?? "", i18n.t("who planned it"))],
        [i18n.t("Purpose"), orMissing(survey.purpose, i18n.t("the purpose"))],
        [
          i18n.t("Standard"),
          i18n.t("ISO 9612:2009, engineering method. {strategy}.", {
            strategy: strategyTitle(i18n, survey.strategy),
          }),
        ],
        [i18n.t("Id of the survey"), survey.id],
      ],
    },
  ];
}

function workAnalysis(
  i18n: I18n,
  locale: Locale,
  survey: SurveyDetail,
  workersCount: number,
  orMissing: OrMissing,
): Block[] {
  const people = survey.people.flatMap(({ workerId, part }) => {
    const person = survey.peopleNames[workerId];
    return person && part !== "reserve"
      ? [`${isolate(person.name)} (${person.employeeNumber})`]
      : [];
  });
  return [
    { kind: "heading", text: i18n.t("Work analysis") },
    {
      kind: "facts",
      rows: [
        [
          i18n.t("Group of like exposure"),
          i18n.t("{group}, {count, plural, one {# worker} other {# workers}}", {
            group: survey.jobName,
            count: workersCount,
          }),
        ],
        [
          i18n.t("From, to"),
          i18n.t("{from} to {to}", {
            from: formatDate(survey.fromDate, locale),
            to: formatDate(survey.toDate, locale),
          }),
        ],
        [i18n.t("Drawn by seed"), survey.drawSeed],
        [i18n.t("Whom to measure"), orMissing(people.join("\n"), i18n.t("whom to measure"))],
      ],
    },
    {
      kind: "table",
      summary: i18n.t("Nominal day"),
      empty: orMissing(
        survey.nominalDay.length > 0 ? i18n.t("Nominal day") : "",
        i18n.t("the tasks of the nominal day"),
      ),
      columns: [
        { head: i18n.t("Task of the nominal day"), width: 70 },
        { head: i18n.t("Length"), width: 30, isFigure: true },
      ],
      rows: survey.nominalDay.map(({ taskName, durationMin }) => [
        isolate(taskName),
        formatDuration(durationMin, locale),
      ]),
    },
  ];
}

function instrumentation(
  i18n: I18n,
  locale: Locale,
  instruments: readonly UsedInstrument[],
  orMissing: OrMissing,
): Block[] {
  return [
    { kind: "heading", text: i18n.t("Instruments") },
    {
      kind: "table",
      summary: i18n.t("Instruments"),
      empty: orMissing(
        instruments.length > 0 ? i18n.t("Instruments") : "",
        i18n.t("the instruments used"),
      ),
      columns: [
        { head: i18n.t("Instrument"), width: 34 },
        { head: i18n.t("Kind, class"), width: 26 },
        { head: i18n.t("Serial number"), width: 16 },
        { head: i18n.t("Laboratory calibration"), width: 24 },
      ],
      rows: instruments.map(
        ({ name, kind, class: meterClass, serialNumber, calibratedOn, hasPassed, dueOn }) => [
          isolate(name),
          `${instrumentKindWord(i18n, kind)}, ${meterClass}`,
          serialNumber,
          [
            calibratedOn
              ? hasPassed === false
                ? i18n.t("failed on {date}", { date: formatShortDate(calibratedOn, locale) })
                : i18n.t("on {date}", { date: formatShortDate(calibratedOn, locale) })
              : orMissing("", i18n.t("the calibration of {serial}", { serial: serialNumber })),
            ...(dueOn ? [i18n.t("due {date}", { date: formatShortDate(dueOn, locale) })] : []),
          ].join("\n"),
        ],
      ),
    },
  ];
}

const clock = (seconds: number, locale: Locale) => formatDuration(seconds / 60, locale);

function measurements(
  i18n: I18n,
  locale: Locale,
  survey: SurveyDetail,
  missing: string[],
): Block[] {
  const counted = survey.samples.filter(({ notCounted }) => notCounted === null);
  if (
    counted.some(
      ({ checkBeforeDb, checkAfterDb }) => checkBeforeDb === null || checkAfterDb === null,
    )
  )
    missing.push(i18n.t("field checks before and after of each sample"));
  if (counted.some(({ peakDb }) => peakDb === null))
    missing.push(i18n.t("the peak level of each sample"));
  const check = (levelDb: number | null) => formatLevel(levelDb, locale);
  const facts = (sample: SurveySample): string =>
    [
      sample.notCounted ? notCountedWords(i18n, sample.notCounted) : i18n.t("Counted"),
      ...sample.doubts.map((code) => doubtWord(i18n, code as RunDoubtCode)),
      sample.keptReason && i18n.t("Kept: {reason}", { reason: sample.keptReason }),
      sample.unusual && i18n.t("Unusual: {what}", { what: sample.unusual }),
    ]
      .filter(Boolean)
      .join("\n");
  return [
    { kind: "heading", text: i18n.t("Measurements") },
    {
      kind: "table",
      summary: i18n.t("Measurements"),
      empty: i18n.t("No sample was taken."),
      columns: [
        { head: i18n.t("Date, length"), width: 15 },
        { head: i18n.t("On whom or where, task"), width: 21 },
        { head: i18n.t("LAeq, dB"), width: 9, isFigure: true },
        { head: i18n.t("Peak, dB"), width: 11, isFigure: true },
        { head: i18n.t("Instrument, field checks, dB"), width: 17 },
        { head: i18n.t("What was unusual"), width: 20 },
        { head: i18n.t("Run"), width: 20, isId: true },
      ],
      rows: survey.samples.map((sample) => [
        [
          formatShortDate(sample.date, locale),
          sample.durationMin === null ? "" : formatDuration(sample.durationMin, locale),
          sample.fromS === null ? "" : i18n.t("from {time}", { time: clock(sample.fromS, locale) }),
        ]
          .filter(Boolean)
          .join("\n"),
        [
          sample.workerName ? isolate(sample.workerName) : (sample.place ?? ""),
          sample.taskId ? (survey.taskNames[sample.taskId] ?? "") : "",
        ]
          .filter(Boolean)
          .join("\n"),
        formatLevel(sample.laeqDb, locale),
        sample.peakDb === null
          ? formatLevel(null, locale)
          : `${formatLevel(sample.peakDb, locale)} (${sample.peakWeighting ?? "?"})`,
        `${sample.serialNumber}, ${instrumentClassWord(i18n, sample.instrument)}\n${check(sample.checkBeforeDb)} / ${check(sample.checkAfterDb)}`,
        facts(sample),
        sample.runRevisionId,
      ]),
    },
    {
      kind: "text",
      isQuiet: true,
      text: i18n.t(
        "Not kept by this program, to be added by hand where it matters: position and orientation of the microphone, wind and weather, sources left in or out.",
      ),
    },
  ];
}

function resultsOf(
  i18n: I18n,
  locale: Locale,
  survey: SurveyDetail,
  found: GroupBudgetView | null,
  nominalDay: readonly { taskId: string; taskName: string }[],
  missing: string[],
): Block[] {
  const taskName = (taskId: string | null) =>
    nominalDay.find((task) => task.taskId === taskId)?.taskName ?? survey.jobName;
  for (const result of survey.results)
    if (result.asksFor !== null)
      missing.push(
        i18n.t("{target}: {what}", {
          target: result.taskName ?? survey.jobName,
          what: nextWords(i18n, result),
        }),
      );
  const budget = found?.budget ?? null;
  const reason = found
    ? noBudgetWords(i18n, found.reason ?? "", found.lackingTaskIds.map(taskName).join(", "))
    : i18n.t("Nothing is measured yet, or five later surveys of the group stand before it.");
  if (!budget) missing.push(i18n.t("the daily exposure level with its uncertainty"));
  return [
    { kind: "heading", text: i18n.t("Results and conclusions") },
    {
      kind: "table",
      summary: i18n.t("Results by task or for the job"),
      empty: i18n.t("No sample was taken."),
      columns: [
        { head: i18n.t("Task or job"), width: 28 },
        { head: i18n.t("Samples"), width: 20 },
        { head: i18n.t("LAeq, dB"), width: 12, isFigure: true },
        { head: i18n.t("Range, dB"), width: 12, isFigure: true },
        { head: i18n.t("Highest peak, dB"), width: 14, isFigure: true },
        { head: i18n.t("Still asked for"), width: 24 },
      ],
      rows: survey.results.map((result) => {
        const target = survey.targets[result.position];
        return [
          result.taskName ?? survey.jobName,
          [
            i18n.t("{count} of {wanted}", {
              count: result.samplesCount,
              wanted: result.wantedCount,
            }),
            ...(target
              ? [i18n.t("planned {what}", { what: samplesOfLength(i18n, target, locale) })]
              : []),
          ].join("\n"),
          formatLevel(result.levelDb, locale),
          formatLevel(result.rangeDb, locale),
          result.peakDb === null
            ? formatLevel(null, locale)
            : `${formatLevel(result.peakDb, locale)} (${result.peakWeighting ?? "?"})`,
          nextWords(i18n, result),
        ];
      }),
    },
    ...(budget
      ? [
          {
            kind: "facts",
            rows: [
              [i18n.t("LEX,8h"), `${formatLevelWithUnit(budget.lexDb, locale)}(A)`],
              [
                i18n.t("Expanded uncertainty, one-sided 95 %, k = 1.65"),
                formatLevelWithUnit(budget.expandedDb, locale),
              ],
              [
                i18n.t("Combined standard uncertainty"),
                formatLevelWithUnit(budget.combinedDb, locale),
              ],
            ],
          } as const,
          {
            kind: "table",
            summary: i18n.t("Where the uncertainty comes from"),
            empty: "",
            columns: [
              { head: i18n.t("Where the uncertainty comes from"), width: 60 },
              { head: i18n.t("Contribution, dB"), width: 20, isFigure: true },
              { head: i18n.t("Share"), width: 20, isFigure: true },
            ],
            rows: budget.items.map(({ source, taskId, contributionDb, sharePct }) => [
              taskId === null
                ? sourceWord(i18n, source)
                : i18n.t("{source}, {task}", {
                    source: sourceWord(i18n, source),
                    task: taskName(taskId),
                  }),
              formatUncertainty(contributionDb, locale).slice(1),
              formatShare(sharePct, locale),
            ]),
          } as const,
        ]
      : [{ kind: "text", text: reason } as const]),
    ...(found && found.keptReasons.length > 0
      ? [
          {
            kind: "text",
            text: i18n.t(
              "It rests on a run kept outside its field check and so is no result by the standard: {reasons}.",
              { reasons: found.keptReasons.join("; ") },
            ),
          } as const,
        ]
      : []),
    ...(survey.adopted.length > 0
      ? [
          {
            kind: "table",
            summary: i18n.t("Levels that rest on it"),
            empty: "",
            columns: [
              { head: i18n.t("Levels that rest on it"), width: 60 },
              { head: i18n.t("Level, dB(A)"), width: 20, isFigure: true },
              { head: i18n.t("From"), width: 20 },
            ],
            rows: survey.adopted.map(({ taskName: name, levelDb, effectiveFrom }) => [
              name,
              formatLevel(levelDb, locale),
              formatShortDate(effectiveFrom, locale),
            ]),
          } as const,
        ]
      : []),
  ];
}

function beside(i18n: I18n, survey: SurveyDetail): Block[] {
  return [
    { kind: "heading", text: i18n.t("Beside the level") },
    {
      kind: "facts",
      rows: RISK_FACTORS.map((factor) => {
        const { answer, note } = survey.riskFactors[factor];
        const said =
          answer === null
            ? i18n.t("not asked yet")
            : answer === "yes"
              ? i18n.t("yes")
              : i18n.t("no");
        return [riskFactorTitle(i18n, factor), [said, note].filter(Boolean).join(". ")] as const;
      }),
    },
  ];
}

function whatIsMissing(i18n: I18n, missing: readonly string[]): Block[] {
  return [
    { kind: "heading", text: i18n.t("What is missing") },
    {
      kind: "text",
      text:
        missing.length === 0
          ? i18n.t("Nothing of what the program keeps for a report by the standard.")
          : [...new Set(missing)].map((what) => `– ${what}`).join("\n"),
    },
    {
      kind: "text",
      isQuiet: true,
      text: i18n.t(
        "What a report states follows clause 15 of ISO 9612:2009 from memory; the text of the standard was not at hand.",
      ),
    },
  ];
}
