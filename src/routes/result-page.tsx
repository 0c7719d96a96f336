import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { lazy, Suspense } from "react";
import { useParams } from "react-router-dom";
import { formatDate } from "../../shared/format/date";
import { formatLevel, formatLimit } from "../../shared/format/level";
import { formatNumber } from "../../shared/format/number";
import { isolate } from "../../shared/i18n/isolate";
import { ruleSetVersion } from "../../shared/rule-sets";
import { IsoDate } from "../../shared/schemas/common";
import type { ResultView } from "../../shared/schemas/result";
import {
  AtEarFigure,
  DayStrip,
  OutsideFigure,
  TableStripScale,
  useStripFrame,
} from "../components/day-figures";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { groundOf } from "../components/strip-of-day";
import { dayResultQuery, storedResultQuery } from "../features/results/queries";
import { ResultFacts } from "../features/results/result-facts";
import { OfficeLink } from "../features/session/office-link";
import { hasRole, useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { useIsPhone } from "../lib/use-is-phone";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/result.css";

// The engine and its words come when there is a result to take apart.
const WorkingOf = lazy(async () => ({
  default: (await import("../features/results/working-of")).WorkingOf,
}));

/** How a working is called on paper: the start of its result's id. */
const workingName = (id: string) => id.slice(0, 8);

export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { id = "", date: asked } = useParams();
  // An address with something else in it names no day: the answer is the one for a day that is not there.
  const date = asked === undefined || IsoDate.safeParse(asked).success ? asked : "0001-01-01";
  const user = useUser();
  const day = useQuery({ ...dayResultQuery(id, date ?? ""), enabled: date !== undefined });
  const storedOne = useQuery({ ...storedResultQuery(id), enabled: date === undefined });
  const { data, error, refetch } = date === undefined ? storedOne : day;
  const canListWorkers = hasRole(user, "officer", "auditor");
  const ruleSet = data && ruleSetVersion(data.governing.key, data.governing.version);
  const figures = data?.figures;
  const title = !figures
    ? date
      ? i18n.t("Day of {date}: how", { date: formatDate(date, locale) })
      : i18n.t("A result: how")
    : figures.atEarDb !== null
      ? i18n.t("At the ear {atEar}, outside {outside}: how", {
          atEar: formatLevel(figures.atEarDb, locale, figures.atEarBound),
          outside: formatLevel(figures.outsideDb, locale, figures.outsideBound),
        })
      : figures.outsideDb !== null
        ? i18n.t("Outside {outside}: how", {
            outside: formatLevel(figures.outsideDb, locale, figures.outsideBound),
          })
        : i18n.t("Not assessed: why");
  return (
    <div className="sheet">
      <div className="sheet-head">
        <div>
          <b>Dinward</b>
          <span>
            {data &&
              `${isolate(data.worker.name)}, ${data.worker.employeeNumber} · ${formatDate(data.date, locale)}`}
          </span>
          <span>{data && i18n.t("Working {name}", { name: workingName(data.id) })}</span>
        </div>
      </div>
      <div className="sheet-body">
        <PageBody>
          <PageHead
            way={
              <>
                {canListWorkers && (
                  <>
                    <OfficeLink to={paths.workers}>{i18n.t("Workers")}</OfficeLink> /{" "}
                  </>
                )}
                {data && (
                  <>
                    <TextLink
                      to={paths.worker(data.worker.id)}
                    >{`${isolate(data.worker.name)}, ${data.worker.employeeNumber}`}</TextLink>{" "}
                    / {dayWords(i18n, locale, data)}
                  </>
                )}
              </>
            }
            title={title}
            lead={
              data && !data.isCurrent ? (
                <>
                  {i18n.t("An earlier result of this day.")}{" "}
                  <TextLink to={paths.result(data.worker.id, data.date)}>
                    {i18n.t("The one that stands now")}
                  </TextLink>
                </>
              ) : undefined
            }
          />
          {error && <Failed error={error} onRetry={() => void refetch()} />}
          {!data && !error && <WorkingFrame />}
          {data && (
            <div className="working">
              {data.input && data.evaluation ? (
                <Suspense fallback={<WorkingFrame />}>
                  <WorkingOf
                    result={data}
                    input={data.input}
                    evaluation={data.evaluation}
                    workingName={workingName(data.id)}
                    strip={<ResultStrip result={data} />}
                    seesMethods={hasRole(user, "officer", "auditor", "supervisor")}
                  />
                </Suspense>
              ) : (
                <Imported result={data} />
              )}
            </div>
          )}
        </PageBody>
      </div>
      <div className="sheet-foot">
        <Folio
          caution={i18n.t(
            "An aid to screening. Local regulation, a qualified hygienist and a licensed audiologist decide.",
          )}
        >
          {data &&
            ruleSet &&
            i18n.t(
              "{title}, rule set version {version}. Method version {method}. Working {name}.",
              {
                title: i18n._(ruleSet.title),
                version: ruleSet.version,
                method: data.methodVersion,
                name: workingName(data.id),
              },
            )}
        </Folio>
      </div>
    </div>
  );
}

function dayWords(
  i18n: ReturnType<typeof useLingui>["i18n"],
  locale: ReturnType<typeof useLocale>,
  { date, shifts }: ResultView,
): string {
  const day = i18n.t("Day of {date}", { date: formatDate(date, locale) });
  const spans = shifts.map(({ localStart, lengthMin }) =>
    i18n.t("shift {start} to {end}", { start: localStart, end: endOf(localStart, lengthMin) }),
  );
  return [day, ...spans].join(", ");
}

function endOf(start: string, lengthMin: number): string {
  const min = (Number(start.slice(0, 2)) * 60 + Number(start.slice(3)) + lengthMin) % 1440;
  return `${String(Math.floor(min / 60)).padStart(2, "0")}:${String(min % 60).padStart(2, "0")}`;
}

/** The shift's own word counts; whoever reads it is told where rounds saw something else. */
function WearingSeen({ seen }: { seen: ResultView["wearingSeen"] }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return seen.map(({ taskId, taskName, statedPct, wornCount, seenCount, from }) => {
    const values = {
      task: taskName,
      stated: formatNumber(statedPct, 0, locale),
      worn: wornCount,
      seen: seenCount,
      said: formatNumber((100 * wornCount) / seenCount, 0, locale),
    };
    return (
      <p key={taskId} className="working-strip-words">
        {from === "rounds"
          ? i18n.t(
              "{task}: the shift states that it was worn {stated} % of the time; rounds saw it worn in {worn} of {seen} looks. What the shift states counts.",
              values,
            )
          : from === "own-reports"
            ? i18n.t(
                "{task}: the shift states that it was worn {stated} % of the time; the worker’s own report comes to {said} %, and nobody looked. What the shift states counts.",
                values,
              )
            : i18n.t(
                "{task}: the shift states that it was worn {stated} % of the time; rounds and own reports together come to {said} %. What the shift states counts.",
                values,
              )}
      </p>
    );
  });
}

function ResultStrip({ result: { figures, wearingSeen } }: { result: ResultView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const isPhone = useIsPhone();
  const frame = useStripFrame(figures);
  const widthPx = isPhone ? 280 : 560;
  const level = (db: number) => formatLevel(db, locale, figures.atEarBound);
  return (
    <div className="working-strip">
      <TableStripScale
        frame={frame && { ...frame, ...groundOf(figures, frame) }}
        widthPx={widthPx}
      />
      <DayStrip figures={figures} variant="card" widthPx={widthPx} k={2.3} />
      <p className="working-strip-words">
        {figures.whileWornDb !== null && (
          <span>
            {figures.decidingTaskName
              ? i18n.t("▲ {level} while worn, {task}", {
                  level: formatLevel(figures.whileWornDb, locale, figures.whileWornBound),
                  task: figures.decidingTaskName,
                })
              : i18n.t("▲ {level} while worn", {
                  level: formatLevel(figures.whileWornDb, locale, figures.whileWornBound),
                })}
          </span>
        )}
        {figures.ownTargetDb !== null && (
          <span>
            {i18n.t("target {target}: a stricter target is set for this worker", {
              target: formatLimit(figures.ownTargetDb, locale),
            })}
          </span>
        )}
        {figures.atEarOffDb !== null && (
          <span>
            {i18n.t(
              "○ {level} with the active part off: the site credits it, and its check was passed",
              {
                level: level(figures.atEarOffDb),
              },
            )}
          </span>
        )}
        {figures.atEarActiveDb !== null && figures.atEarOffDb === null && (
          <span>
            {i18n.t("○ {level} with the active part on", { level: level(figures.atEarActiveDb) })}
          </span>
        )}
        {figures.atEarAsWorkedDb !== null && (
          <span>{i18n.t("● {level} as worked", { level: level(figures.atEarAsWorkedDb) })}</span>
        )}
      </p>
      <WearingSeen seen={wearingSeen} />
    </div>
  );
}

/** Levels only: a past year that came in as a file. */
function Imported({ result }: { result: ResultView }) {
  const { i18n } = useLingui();
  return (
    <div className="working-top">
      <div>
        <table className="working-lines">
          <caption className="sr-only">{i18n.t("The result")}</caption>
          <tbody>
            <tr>
              <th scope="row">{i18n.t("At the ear")}</th>
              <td>
                <AtEarFigure figures={result.figures} />
              </td>
            </tr>
            <tr className="is-quiet">
              <th scope="row">{i18n.t("Without protection")}</th>
              <td>
                <OutsideFigure figures={result.figures} />
              </td>
            </tr>
          </tbody>
        </table>
        <ResultStrip result={result} />
        <p>
          <b>{i18n.t("Imported, working not available.")}</b>{" "}
          {i18n.t(
            "This day came in with its levels only; the tasks and readings behind it are not on record here.",
          )}
        </p>
      </div>
      <ResultFacts result={result} workingName={workingName(result.id)} />
    </div>
  );
}

const FRAME_LINES = ["ear", "protector", "outside"];

function WorkingFrame() {
  return (
    <div className="working-top" aria-busy="true">
      <table className="working-lines">
        <tbody>
          {FRAME_LINES.map((key) => (
            <tr key={key}>
              <td>
                <span className="loading-line" />
              </td>
              <td>
                <span className="loading-line" />
              </td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}
