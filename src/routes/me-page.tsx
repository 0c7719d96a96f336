import { useLingui } from "@lingui/react";
import { useQuery } from "@tanstack/react-query";
import { lazy, type ReactNode, Suspense, useEffect } from "react";
import { formatDate, localDateOf } from "../../shared/format/date";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { PageBody, Section } from "../components/page";
import { LastShift, lastFinished } from "../features/me/last-shift";
import { MyProtectors } from "../features/me/my-protectors";
import { protectorsToday } from "../features/me/own-protectors";
import { ownQueries } from "../features/me/queries";
import { ReportProblem } from "../features/me/report-problem";
import { whatToDo } from "../features/me/what-to-do";
import { useUser } from "../features/session/session";
import { WorkerTrainings } from "../features/training/worker-training";
import { useLocale } from "../lib/i18n";
import { usePageTitle } from "../lib/page-title";
import { useNow } from "../lib/use-now";
import { OWN_REPORT, paths } from "../paths";
import "../styles/me.css";

/** The picture comes beside the data that it shows: what to do does not wait for it. */
const loadHistory = () => import("../features/me/my-history");
const MyHistory = lazy(() => loadHistory().then(({ MyHistory }) => ({ default: MyHistory })));

/** After the page itself: it is worked out anew each time. */
const TaskTimes = lazy(() =>
  import("../features/me/task-times").then(({ TaskTimes }) => ({ default: TaskTimes })),
);

/** A longer title is set smaller: a phone holds about three lines of the large one. */
const LONG_TITLE = 64;

/** The worker's own page: what to do, my protectors, my last shift, my year. */
export function Component() {
  const { i18n } = useLingui();
  const { workerId } = useUser();
  usePageTitle(i18n.t("My page"));
  if (workerId === null)
    return (
      <PageBody size="worker">
        <h1>{i18n.t("My page")}</h1>
        <Empty title={i18n.t("Your sign-in is not linked to a worker.")}>
          {i18n.t("Ask your administrator to link it.")}
        </Empty>
      </PageBody>
    );
  return <OwnPage workerId={workerId} />;
}

function OwnPage({ workerId }: { workerId: string }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { sites } = useUser();
  const worker = useQuery(ownQueries.worker(workerId));
  const site = sites.find(({ id }) => id === worker.data?.siteId) ?? sites[0];
  const timeZone = site?.timeZone ?? "UTC";
  const now = useNow();
  const today = localDateOf(now.toISOString(), timeZone);
  const days = useQuery(ownQueries.days(workerId, aYearBefore(today)));
  const findings = useQuery(ownQueries.findings(workerId));
  const lastDay = days.data?.[0] ?? null;
  const { finished, running } = lastFinished(days.data ?? [], now);

  const leftOn = worker.data?.leftOn ?? null;
  const hasLeft = leftOn !== null && leftOn < today;

  // The day of which nobody knows how long it was worn: the worker may say it here, once it is over.
  const askedFor = findings.data?.find(
    ({ kind, state, lastDate }) =>
      !hasLeft &&
      kind === "wearing-unknown" &&
      state !== "done" &&
      running.every(({ date }) => date !== lastDate),
  )?.lastDate;
  const error = worker.error ?? days.error ?? findings.error;
  useEffect(() => void loadHistory().catch(() => undefined), []);
  const retry = () => {
    void worker.refetch();
    void days.refetch();
    void findings.refetch();
  };
  let title: ReactNode = (
    <>
      <span className="sr-only">{i18n.t("Loading")}</span>
      <span className="loading-line" />
    </>
  );
  let more: readonly string[] = [];
  let isLong = false;
  let protectors: ReturnType<typeof protectorsToday> | null = null;
  if (worker.data && days.data && findings.data) {
    protectors = protectorsToday(worker.data, today, lastDay);
    const [order, ...rest] = whatToDo(i18n, locale, {
      lastDay,
      protectors,
      findings: findings.data,
      leftOn: hasLeft ? leftOn : null,
    });
    title = order;
    more = rest;
    isLong = order.length > LONG_TITLE;
  }
  const part = (content: ReactNode) => (protectors ? content : <PartLoading />);

  if (error)
    return (
      <PageBody size="worker">
        <h1>{i18n.t("My page")}</h1>
        <Failed error={error} onRetry={retry} />
      </PageBody>
    );
  return (
    <PageBody size="worker">
      <div className="me" aria-busy={worker.isPending || days.isPending}>
        <h1 className={isLong ? "is-long" : undefined}>{title}</h1>
        {more.map((sentence) => (
          <p key={sentence} className="me-more">
            {sentence}
          </p>
        ))}
        {askedFor && (
          <p>
            <TextLink className="me-list-link" to={`${paths.myDay(askedFor)}#${OWN_REPORT}`}>
              {i18n.t("Say how long you wore it on {day}", { day: formatDate(askedFor, locale) })}
            </TextLink>
          </p>
        )}
        {!hasLeft && (
          <Section title={i18n.t("My protectors")} id="my-protectors">
            {part(
              <MyProtectors workerId={workerId} protectors={protectors ?? []} lastDay={lastDay} />,
            )}
          </Section>
        )}
        <Section title={i18n.t("My last shift")} id="my-last-shift">
          {part(
            <LastShift
              day={finished}
              running={running}
              workerId={workerId}
              askedFor={askedFor}
              today={today}
              timeZone={timeZone}
            />,
          )}
        </Section>
        {protectors && !hasLeft && (
          <Suspense fallback={null}>
            <TaskTimes workerId={workerId} />
          </Suspense>
        )}
        <Section title={i18n.t("My year at the ear")} id="my-year">
          <Suspense fallback={<PartLoading />}>
            {part(
              <MyHistory days={days.data ?? []} assignments={worker.data?.assignments ?? []} />,
            )}
          </Suspense>
          <p>
            <a
              className="link me-list-link"
              href={`/api/workers/${workerId}/exposure-record.pdf`}
              download
            >
              {i18n.t("My whole record to print (PDF)")}
            </a>
          </p>
          <p>
            <a className="link me-list-link" href="/api/me/record.zip" download>
              {i18n.t("My whole record as a file (ZIP)")}
            </a>
          </p>
        </Section>
        <Section title={i18n.t("My training")} id="my-training">
          <WorkerTrainings workerId={workerId} today={today} />
        </Section>
        <div className="me-report">
          {worker.data?.can.report && <ReportProblem workerId={workerId} />}
          <p className="me-note">
            {i18n.t(
              "A help for you, not a medical opinion. Seen by you, your supervisor and your safety officer.",
            )}{" "}
            <TextLink to={paths.account}>{i18n.t("Who else can see it, and who has")}</TextLink>
          </p>
          <p>
            <TextLink className="me-list-link" to={`${paths.account}#sent`}>
              {i18n.t("Letters and mails sent to me")}
            </TextLink>
          </p>
        </div>
      </div>
    </PageBody>
  );
}

/** The same day a year ago; the 29th of February becomes the 1st of March. */
function aYearBefore(date: string): string {
  const [year, ...rest] = date.split("-");
  return new Date(`${Number(year) - 1}-${rest.join("-")}T00:00:00Z`).toISOString().slice(0, 10);
}

function PartLoading() {
  return (
    <div aria-hidden="true">
      <span className="loading-line" />
    </div>
  );
}
