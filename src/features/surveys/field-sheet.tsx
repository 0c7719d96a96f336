import { useLingui } from "@lingui/react";
import { formatShortDate } from "../../../shared/format/date";
import { formatDuration } from "../../../shared/format/duration";
import { RISK_FACTORS, type SurveyDetail } from "../../../shared/schemas/survey";
import { useLocale } from "../../lib/i18n";
import { riskFactorTitle, strategyTitle } from "./survey-words";

export interface SheetSubject {
  readonly key: string;
  /** Who or what the page is for. */
  readonly title: string;
  readonly note: string | null;
  /** Samples to take on this page. */
  readonly rows: readonly {
    readonly key: string;
    readonly label: string;
    readonly lengthMin: number;
  }[];
}

/** Pages of a survey's field sheet: one for each task, or one for each worker drawn where it is by job or full days. */
export function sheetSubjects(survey: SurveyDetail, whole: string): SheetSubject[] {
  if (survey.strategy === "task")
    return survey.targets.map(({ taskId, samplesCount, sampleMin }) => ({
      key: taskId ?? "",
      title: (taskId && survey.taskNames[taskId]) || whole,
      note: null,
      rows: Array.from({ length: samplesCount }, (_, index) => ({
        key: String(index),
        label: String(index + 1),
        lengthMin: sampleMin,
      })),
    }));
  const [target] = survey.targets;
  const lengthMin = target?.sampleMin ?? 0;
  const measured = survey.people.filter(({ part }) => part !== "reserve");
  // The samples of a job are spread over those who are drawn.
  const each = Math.max(1, Math.ceil((target?.samplesCount ?? 1) / Math.max(1, measured.length)));
  return measured.map(({ workerId }) => {
    const person = survey.peopleNames[workerId];
    return {
      key: workerId,
      title: person?.name ?? whole,
      note: person?.employeeNumber ?? null,
      rows: Array.from({ length: each }, (_, index) => ({
        key: String(index),
        label: String(index + 1),
        lengthMin,
      })),
    };
  });
}

/** One page to carry along: what is to be sampled, with room to write. */
export function FieldSheetPage({
  survey,
  subject,
  siteName,
  page,
  pages,
}: {
  survey: SurveyDetail;
  subject: SheetSubject;
  siteName: string;
  page: number;
  pages: number;
}) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const reserve = survey.people
    .filter(({ part }) => part === "reserve")
    .map(({ workerId }) => survey.peopleNames[workerId]?.name)
    .filter(Boolean)
    .join(", ");
  const drawn = survey.people
    .filter(({ part }) => part !== "reserve")
    .map(({ workerId }) => survey.peopleNames[workerId]?.name)
    .filter(Boolean)
    .join(", ");
  const instruments = [...new Set(survey.reservations.map(({ instrumentId }) => instrumentId))]
    .flatMap((id) => {
      const { name, serialNumber } = survey.instrumentNames[id] ?? {};
      return name ? [`${name}, ${serialNumber}`] : [];
    })
    .join("; ");
  const facts = [
    [i18n.t("Group"), survey.jobName],
    [i18n.t("Site"), siteName],
    [i18n.t("Strategy"), strategyTitle(i18n, survey.strategy)],
    [
      i18n.t("From, to"),
      `${formatShortDate(survey.fromDate, locale)} – ${formatShortDate(survey.toDate, locale)}`,
    ],
    ...(survey.strategy === "task" && drawn ? [[i18n.t("Whom to measure"), drawn]] : []),
    ...(reserve ? [[i18n.t("In reserve"), reserve]] : []),
    ...(instruments ? [[i18n.t("Instruments"), instruments]] : []),
  ];
  return (
    <article className="field-sheet" aria-label={subject.title}>
      <header className="field-sheet-head">
        <b>Dinward</b>
        <span>{survey.name}</span>
      </header>
      <h2>
        {subject.title}
        {subject.note && <span className="beneath"> {subject.note}</span>}
      </h2>
      <dl className="field-sheet-facts">
        {facts.map(([label, value]) => (
          <div key={label}>
            <dt>{label}</dt>
            <dd>{value}</dd>
          </div>
        ))}
      </dl>
      <div className="table-scroll">
        <table className="field-sheet-rows">
          <thead>
            <tr>
              <th scope="col">{i18n.t("Sample")}</th>
              <th scope="col">{i18n.t("At least")}</th>
              <th scope="col">{i18n.t("Instrument")}</th>
              <th scope="col">{i18n.t("Begin")}</th>
              <th scope="col">{i18n.t("Ended at")}</th>
              <th scope="col">LAeq, dB</th>
              <th scope="col">LCeq, dB</th>
              <th scope="col">LCpeak, dB</th>
              <th scope="col">{i18n.t("Who, where")}</th>
            </tr>
          </thead>
          <tbody>
            {subject.rows.map(({ key, label, lengthMin }) => (
              <tr key={key}>
                <th scope="row">{label}</th>
                <td>{formatDuration(lengthMin, locale)}</td>
                <td />
                <td />
                <td />
                <td />
                <td />
                <td />
                <td />
              </tr>
            ))}
          </tbody>
        </table>
      </div>
      <div className="field-sheet-lines">
        <p>
          {i18n.t("Field check before, dB")} <span className="blank" />
        </p>
        <p>
          {i18n.t("Field check after, dB")} <span className="blank" />
        </p>
        <p className="is-wide">
          {i18n.t("Over 0.5 dB apart: the samples in between are discarded.")}
        </p>
      </div>
      <h3>{i18n.t("Beside the level")}</h3>
      <ul className="field-sheet-risks">
        {RISK_FACTORS.map((factor) => {
          const { answer } = survey.riskFactors[factor];
          return (
            <li key={factor}>
              <span>{riskFactorTitle(i18n, factor)}</span>
              <span>
                {(["yes", "no"] as const).map((one) => (
                  <span key={one} className="tick-box">
                    <span aria-hidden="true">{answer === one ? "☒" : "☐"}</span>{" "}
                    {one === "yes" ? i18n.t("yes") : i18n.t("no")}
                  </span>
                ))}
              </span>
            </li>
          );
        })}
      </ul>
      <h3>{i18n.t("What was observed, what was unusual")}</h3>
      <div className="field-sheet-room" />
      <div className="field-sheet-lines">
        <p>
          {i18n.t("Who observes")} <span className="blank">{survey.observers.join(", ")}</span>
        </p>
        <p>
          {i18n.t("Date and signature")} <span className="blank" />
        </p>
      </div>
      <footer className="field-sheet-foot">
        <span>{i18n.t("ISO 9612:2009. An aid to screening. A qualified hygienist decides.")}</span>
        <span>{i18n.t("page {page} of {pages}", { page, pages })}</span>
      </footer>
    </article>
  );
}
