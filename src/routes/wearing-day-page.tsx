import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { useParams } from "react-router-dom";
import { formatDate } from "../../shared/format/date";
import { formatWholeLevel } from "../../shared/format/level";
import type { Locale } from "../../shared/i18n/index";
import { ruleSetVersion } from "../../shared/rule-sets";
import { IsoDate } from "../../shared/schemas/common";
import type { ResultView } from "../../shared/schemas/result";
import type { OwnReports } from "../../shared/schemas/wearing";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { PageBody, PageHead } from "../components/page";
import { dayResultQuery } from "../features/results/queries";
import { WearingCost } from "../features/results/wearing-cost";
import { useUser } from "../features/session/session";
import { OwnSaid } from "../features/wearing/own-said";
import { wearingQueries } from "../features/wearing/queries";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/sample.css";
import "../styles/wearing.css";

/**
 * One day of a worker's own: what taking the protector off cost, and the worker's own word on how long it was worn. It
 * shares no component with the worker's first page, which a piece that is shared would make larger.
 */
export function Component() {
  const { i18n } = useLingui();
  const { workerId } = useUser();
  const { date: asked = "" } = useParams();
  // An address with something else in it names no day: the answer is the one for a day that is not there.
  const date = IsoDate.safeParse(asked).success ? asked : "0001-01-01";
  if (workerId === null)
    return (
      <PageBody size="worker">
        <PageHead title={i18n.t("A day of mine")} />
        <Empty title={i18n.t("Your sign-in is not linked to a worker.")} />
      </PageBody>
    );
  return <OwnDayPage key={date} workerId={workerId} date={date} />;
}

function OwnDayPage({ workerId, date }: { workerId: string; date: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const siteId = useQuery(wearingQueries.ownSite(workerId));
  const result = useQuery(dayResultQuery(workerId, date));
  const reports = useQuery(wearingQueries.ownReports(workerId, date));
  const error = siteId.error ?? result.error ?? reports.error;
  return (
    <PageBody size="worker">
      <div className="sample-page own-day">
        <PageHead
          way={<TextLink to={paths.me}>{i18n.t("My page")}</TextLink>}
          title={formatDate(date, locale)}
          lead={result.data && reachedWords(i18n, locale, result.data)}
        />
        {error ? (
          <Failed
            error={error}
            onRetry={() => {
              void siteId.refetch();
              void result.refetch();
              void reports.refetch();
            }}
          />
        ) : siteId.data === undefined || !result.data || !reports.data ? (
          <span className="loading-line" />
        ) : (
          <Wearing
            result={result.data}
            workerId={workerId}
            siteId={siteId.data}
            said={reports.data.filter((one) => one.date === date)}
          />
        )}
      </div>
    </PageBody>
  );
}

/** What reached the ear that day; no more than is known. */
function reachedWords(
  i18n: I18n,
  locale: Locale,
  { figures: { atEarDb, atEarBound, outsideDb, outsideBound, verdictAtEar, reason } }: ResultView,
): string {
  const level = formatWholeLevel(atEarDb, locale);
  const around = formatWholeLevel(outsideDb, locale);
  if (reason === "wearing-unknown" && verdictAtEar === "not-assessed")
    return i18n.t(
      "We can’t say how much reached your ear: nobody wrote down how long you wore your protector.",
    );
  if (atEarDb !== null && atEarBound === "exact" && outsideDb !== null && outsideBound === "exact")
    return i18n.t("{level} decibels reached your ear, {around} were around you.", {
      level,
      around,
    });
  if (atEarDb !== null && atEarBound === "lower")
    return i18n.t("At least {level} decibels reached your ear.", { level });
  if (atEarDb !== null && atEarBound === "upper")
    return i18n.t("At most {level} decibels reached your ear.", { level });
  if (atEarDb !== null) return i18n.t("{level} decibels reached your ear.", { level });
  return i18n.t("We can’t say how much reached your ear.");
}

function Wearing({
  result: { input, evaluation, governing, date },
  workerId,
  siteId,
  said,
}: {
  result: ResultView;
  workerId: string;
  siteId: string;
  said: OwnReports["rows"];
}) {
  const ruleSet = ruleSetVersion(governing.key, governing.version);
  if (!input || !evaluation) return null;
  const worn = new Set(
    evaluation.tasks.filter(({ isWorn }) => isWorn).map(({ timedTaskId }) => timedTaskId),
  );
  const timed = input.shifts.flatMap((shift) => shift.tasks);
  const tasks = new Map(
    timed.filter(({ id }) => worn.has(id)).map(({ taskId, name }) => [taskId, name]),
  );
  return (
    <>
      {ruleSet && <WearingCost input={input} governing={ruleSet} isOwn />}
      {tasks.size > 0 && (
        <OwnSaid
          workerId={workerId}
          siteId={siteId}
          date={date}
          tasks={[...tasks].map(([id, name]) => ({
            id,
            name,
            statedPct: statedPct(timed.filter(({ taskId }) => taskId === id)),
          }))}
          said={said}
        />
      )}
    </>
  );
}

/** What the record states of a task's stretches together, percent of their time; null where one of them states none. */
function statedPct(stretches: NonNullable<ResultView["input"]>["shifts"][number]["tasks"]) {
  if (stretches.some(({ wornFrom }) => wornFrom?.how !== "stated")) return null;
  const minutes = stretches.reduce((sum, { durationMin }) => sum + durationMin, 0);
  const worn = stretches.reduce(
    (sum, { durationMin, wornPct }) => sum + durationMin * (wornPct ?? 0),
    0,
  );
  return minutes > 0 ? worn / minutes : null;
}
