import type { I18n } from "@lingui/core";
import { formatShortDate } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { createI18n, isLocale, type Locale } from "../../shared/i18n";
import { isolate } from "../../shared/i18n/isolate";
import { RISK_FACTORS, type SurveyDetail } from "../../shared/schemas/survey";
import { riskFactorTitle, strategyTitle } from "../../shared/surveys/words";
import type { Actor } from "../lib/policy";
import { surveyDetail } from "../queries/surveys";
import type { Block, Report, Sheet } from "./blocks";
import { frameOf, originOf } from "./frame";

interface Subject {
  /** Who or what the sheet is for. */
  readonly title: string;
  /** Samples to take on it, and how long each is at least. */
  readonly samplesCount: number;
  readonly sampleMin: number;
}

/** Of a survey by task each task; by job or full days each worker drawn. */
function subjectsOf(survey: SurveyDetail, whole: string): Subject[] {
  if (survey.strategy === "task")
    return survey.targets.map(({ taskId, samplesCount, sampleMin }) => ({
      title: (taskId && survey.taskNames[taskId]) || whole,
      samplesCount,
      sampleMin,
    }));
  const [target] = survey.targets;
  const measured = survey.people.filter(({ part }) => part !== "reserve");
  // The samples of a job are spread over those who are drawn.
  const each = Math.max(1, Math.ceil((target?.samplesCount ?? 1) / Math.max(1, measured.length)));
  return measured.map(({ workerId }) => {
    const person = survey.peopleNames[workerId];
    return {
      title: person ? `${isolate(person.name)} (${person.employeeNumber})` : whole,
      samplesCount: each,
      sampleMin: target?.sampleMin ?? 0,
    };
  });
}

/**
 * What is carried along when it is measured: for each task or worker what is to be sampled, with room to write.
 *
 * @source iso-9612-2009 15
 */
export async function fieldSheet(actor: Actor, id: string): Promise<Report> {
  const locale = isLocale(actor.language) ? actor.language : "en";
  const i18n = await createI18n(locale);
  const survey = await surveyDetail(actor, id);
  const origin = await originOf(actor.organizationId, survey.siteId);
  const frame = frameOf(i18n, locale, origin);
  const subjects = subjectsOf(survey, i18n.t("The whole of the work"));
  const sheets = subjects.map((subject, index): Sheet => {
    const values = { sheet: index + 1, sheets: subjects.length, survey: isolate(survey.name) };
    return {
      ...frame,
      title: subject.title,
      lead: i18n.t("Field sheet {sheet} of {sheets}: {survey}", values),
      blocks: [
        ...plan(i18n, locale, survey, origin.site),
        ...samples(i18n, locale, subject),
        ...beside(i18n, survey),
      ],
    };
  });
  const [first, ...more] = sheets;
  return {
    ...frame,
    ...(first ?? {
      title: i18n.t("Field sheet"),
      lead: isolate(survey.name),
      blocks: [
        {
          kind: "text",
          text: i18n.t("Nobody has been drawn yet, so there is no page to print."),
        } as const,
      ],
    }),
    more,
    fileTitle: `${i18n.t("Field sheet")}, ${survey.name}`,
  };
}

function plan(i18n: I18n, locale: Locale, survey: SurveyDetail, site: string): Block[] {
  const people = (isReserve: boolean) =>
    survey.people
      .filter(({ part }) => (part === "reserve") === isReserve)
      .flatMap(({ workerId }) => survey.peopleNames[workerId] ?? [])
      .map(({ name }) => isolate(name))
      .join(", ");
  const instruments = [...new Set(survey.reservations.map(({ instrumentId }) => instrumentId))]
    .flatMap((id) => {
      const { name, serialNumber } = survey.instrumentNames[id] ?? {};
      return name ? [`${isolate(name)}, ${serialNumber}`] : [];
    })
    .join("; ");
  const rows: [string, string][] = [
    [i18n.t("Group"), isolate(survey.jobName)],
    [i18n.t("Site"), isolate(site)],
    [i18n.t("Strategy"), strategyTitle(i18n, survey.strategy)],
    [
      i18n.t("From, to"),
      `${formatShortDate(survey.fromDate, locale)} – ${formatShortDate(survey.toDate, locale)}`,
    ],
    [i18n.t("Whom to measure"), survey.strategy === "task" ? people(false) : ""],
    [i18n.t("In reserve"), people(true)],
    [i18n.t("Instruments"), instruments],
    [i18n.t("Id of the survey"), survey.id],
  ];
  return [{ kind: "facts", rows: rows.filter(([, value]) => value !== "") }];
}

const samples = (
  i18n: I18n,
  locale: Locale,
  { samplesCount, sampleMin }: Subject,
): readonly Block[] => [
  {
    kind: "table",
    isForm: true,
    summary: i18n.t("Samples"),
    empty: "",
    columns: [
      { head: i18n.t("Sample"), width: 9 },
      { head: i18n.t("At least"), width: 10 },
      { head: i18n.t("Instrument"), width: 14 },
      { head: i18n.t("Begin"), width: 10 },
      { head: i18n.t("Ended at"), width: 10 },
      { head: "LAeq, dB", width: 10 },
      { head: "LCeq, dB", width: 10 },
      { head: "LCpeak, dB", width: 10 },
      { head: i18n.t("Who, where"), width: 17 },
    ],
    rows: Array.from({ length: samplesCount }, (_, index) => [
      String(index + 1),
      formatDuration(sampleMin, locale),
    ]),
  },
  {
    kind: "blanks",
    roomPt: 20,
    blanks: [
      { label: i18n.t("Field check before, dB") },
      { label: i18n.t("Field check after, dB") },
    ],
  },
  {
    kind: "text",
    isQuiet: true,
    text: i18n.t("Over 0.5 dB apart: the samples in between are discarded."),
  },
];

const beside = (i18n: I18n, survey: SurveyDetail): readonly Block[] => [
  { kind: "heading", text: i18n.t("Beside the level") },
  {
    kind: "checks",
    rows: RISK_FACTORS.map((factor) => ({
      text: riskFactorTitle(i18n, factor),
      answers: (["yes", "no"] as const).map((one) => ({
        text: one === "yes" ? i18n.t("yes") : i18n.t("no"),
        isTicked: survey.riskFactors[factor].answer === one,
      })),
    })),
  },
  { kind: "heading", text: i18n.t("What was observed, what was unusual") },
  { kind: "room", heightPt: 84 },
  {
    kind: "blanks",
    roomPt: 22,
    blanks: [
      { label: i18n.t("Who observes"), value: survey.observers.map(isolate).join(", ") },
      { label: i18n.t("Date and signature") },
    ],
  },
  {
    kind: "text",
    isQuiet: true,
    text: i18n.t("ISO 9612:2009. An aid to screening. A qualified hygienist decides."),
  },
];
