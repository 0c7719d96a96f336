import type { I18n } from "@lingui/core";
import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { type ReactNode, useEffect, useMemo, useRef } from "react";
import { useLocation, useParams, useSearchParams } from "react-router-dom";
import type { z } from "zod";
import { formatDate, formatShortDate } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { formatLimit } from "../../shared/format/level";
import { LOCALE_NAMES } from "../../shared/i18n/index";
import type { DayFigures } from "../../shared/schemas/finding";
import type { HistoryPage, WorkerView } from "../../shared/schemas/worker";
import { localDate } from "../../shared/time/zone";
import { gearWords } from "../../shared/words/register-words";
import { Button, ButtonLink } from "../components/button";
import { type DataColumn, DataTable } from "../components/data-table";
import {
  AtEarFigure,
  DayStrip,
  isBoundReason,
  OutsideFigure,
  TableStripGround,
  TableStripScale,
  useDecidedBy,
  useStripFrame,
  useTableFrame,
} from "../components/day-figures";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { HistoryChart } from "../components/history-chart";
import { TextButton, TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { ProtectorWord } from "../components/protector-word";
import { SlipsLink } from "../components/slips-link";
import { groundOf } from "../components/strip-of-day";
import { AssignForm } from "../features/assignments/assign-form";
import { AssignmentsTable } from "../features/assignments/assignments-table";
import { FindingsTable } from "../features/findings/findings-table";
import { findingQueries } from "../features/findings/queries";
import { FitTestsTable } from "../features/fits/fit-tests-table";
import { IssuesTable } from "../features/fits/issues-table";
import { fitQueries } from "../features/fits/queries";
import { Refusals } from "../features/fits/refusals";
import { OfficeLink } from "../features/session/office-link";
import { hasRole, useUser } from "../features/session/session";
import { WorkerTrainings } from "../features/training/worker-training";
import { EmployerNote } from "../features/workers/employer-note";
import { workerQueries } from "../features/workers/queries";
import { SignInSlip } from "../features/workers/sign-in-slip";
import { employerWords } from "../features/workers/workers-table";
import { apiAddress } from "../lib/api";
import { assignedUse } from "../lib/assigned-use";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import "../styles/findings.css";
import "../styles/fits.css";
import "../styles/worker.css";

type Day = z.infer<typeof HistoryPage>["rows"][number];

export function Component() {
  const { i18n } = useLingui();
  const { id = "" } = useParams();
  const { data, error, refetch } = useQuery(workerQueries.one(id));
  if (data) return <WorkerSheet key={data.id} worker={data} />;
  return (
    <PageBody>
      <PageHead
        title={i18n.t("Worker")}
        lead={error ? undefined : <span className="loading-line" />}
      />
      {error && <Failed error={error} onRetry={() => void refetch()} />}
    </PageBody>
  );
}

function WorkerSheet({ worker }: { worker: WorkerView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const timeZone = user.sites.find(({ id }) => id === worker.siteId)?.timeZone ?? "UTC";
  const today = localDate(new Date(), timeZone);
  const isOfficer = hasRole(user, "officer");
  const hasLeft = worker.leftOn !== null && worker.leftOn < today;
  const canGive = worker.can.assign && !hasLeft;
  const currentCrew = worker.crews.find(
    ({ fromDate, toDate }) => fromDate <= today && (toDate === null || toDate >= today),
  );
  const hasRequirement = worker.mustWear || worker.personalTargetDb !== null;
  return (
    <>
      <PageBody
        marginWidthPx={240}
        margin={
          <>
            <MarginNote title={i18n.t("Access")}>
              <p>
                <TextLink to={paths.workerAccess(worker.id)}>
                  {i18n.t("Who can see this record")}
                </TextLink>
              </p>
            </MarginNote>
            {worker.employer !== "own" && hasRole(user, "officer", "auditor") && (
              <EmployerNote worker={worker} />
            )}
            {/* A visitor's grant shows no crews: that there are none would not be true. */}
            {(worker.crews.length > 0 || !hasRole(user, "visitor")) && (
              <MarginNote title={i18n.t("Crews")}>
                {worker.crews.length === 0 && <p>{i18n.t("In no crew.")}</p>}
                {worker.crews.map((crew) => (
                  <p key={`${crew.id} ${crew.fromDate}`}>
                    <TextLink className="is-quiet is-name" to={paths.crew(crew.id)}>
                      {crew.name}
                    </TextLink>{" "}
                    {crew.toDate
                      ? i18n.t("{from} to {to}", {
                          from: formatShortDate(crew.fromDate, locale),
                          to: formatShortDate(crew.toDate, locale),
                        })
                      : i18n.t("since {date}", { date: formatShortDate(crew.fromDate, locale) })}
                    {crew.isLoan && i18n.t(", on loan")}
                  </p>
                ))}
              </MarginNote>
            )}
            {hasRequirement && (
              <MarginNote title={i18n.t("Personal requirement")} isRuled>
                {worker.mustWear && <p>{i18n.t("Must wear a protector whatever the level.")}</p>}
                {worker.personalTargetDb !== null && (
                  <p>
                    {i18n.t("At most {level} dB at the ear.", {
                      level: formatLimit(worker.personalTargetDb, locale),
                    })}
                  </p>
                )}
                {worker.requirementReason && (
                  <p>
                    {worker.requirementReason} <i>{i18n.t("Only officers see this reason.")}</i>
                  </p>
                )}
              </MarginNote>
            )}
          </>
        }
      >
        <PageHead
          way={<OfficeLink to={paths.workers}>{i18n.t("Workers")}</OfficeLink>}
          title={worker.name}
          lead={
            worker.leftOn
              ? leavingWords(
                  i18n,
                  worker.employeeNumber,
                  formatDate(worker.leftOn, locale),
                  hasLeft,
                )
              : [worker.employeeNumber, currentCrew?.name, worker.jobName]
                  .filter(Boolean)
                  .join(", ")
          }
          actions={
            <>
              {hasRole(user, "officer", "auditor") && (
                <a
                  className="link"
                  href={apiAddress(`/workers/${worker.id}/exposure-record.pdf`)}
                  download
                >
                  {i18n.t("Exposure record (PDF)")}
                </a>
              )}
              {worker.can.change && (
                <ButtonLink to={paths.changeWorker(worker.id)}>{i18n.t("Change")}</ButtonLink>
              )}
            </>
          }
        />
        <div className="beside-slip">
          <LastDay worker={worker} />
          <Facts worker={worker} />
        </div>
        <div className="beside-slip">
          <Protectors worker={worker} today={today} canGive={canGive} />
          <Fits worker={worker} today={today} isOfficer={isOfficer} canGive={canGive} />
          <OpenFindings worker={worker} today={today} />
          <Training worker={worker} today={today} />
          <History worker={worker} />
        </div>
        {worker.can.issueCode && (
          <Section title={i18n.t("Sign-in")} id="sign-in">
            <SignInSlip
              worker={worker}
              timeZone={timeZone}
              organizationName={user.organizationName}
              issuedBy={user.name}
            />
          </Section>
        )}
      </PageBody>
      <Folio>
        {isOfficer
          ? i18n.t("Each day is judged by the rule set that was in force at the site on its date.")
          : null}
      </Folio>
    </>
  );
}

const leavingWords = (i18n: I18n, number: string, date: string, hasLeft: boolean): string =>
  hasLeft
    ? i18n.t("{number}, left {date}.", { number, date })
    : i18n.t("{number}, leaves {date}.", { number, date });

function Fact({ label, children }: { label: string; children: ReactNode }) {
  return (
    <div>
      <dt>{label}</dt>
      <dd>{children}</dd>
    </div>
  );
}

function Facts({ worker }: { worker: WorkerView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  return (
    <dl className="worker-facts">
      <Fact label={i18n.t("Site")}>{worker.siteName}</Fact>
      <Fact label={i18n.t("Job")}>{worker.jobName ?? "–"}</Fact>
      <Fact label={i18n.t("Employer")}>{employerWords(i18n, worker)}</Fact>
      <Fact label={i18n.t("Language")}>{LOCALE_NAMES[worker.language]}</Fact>
      <Fact label={i18n.t("Hired")}>{formatShortDate(worker.hiredOn, locale)}</Fact>
      <Fact label={i18n.t("Worn beside a protector")}>
        {gearWords(i18n, worker.wornGear) ?? i18n.t("nothing stated")}
      </Fact>
      <Fact label={i18n.t("Sign-in")}>
        {worker.hasSignIn ? i18n.t("has one") : i18n.t("none yet")}
      </Fact>
    </dl>
  );
}

function useHistory(workerId: string) {
  const history = useInfiniteQuery(workerQueries.history(workerId));
  const days = useMemo(
    () => history.data?.pages.flatMap((page) => page.rows) ?? [],
    [history.data],
  );
  return { ...history, days };
}

function LastDay({ worker }: { worker: WorkerView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const { days } = useHistory(worker.id);
  const [last] = days;
  const frame = useStripFrame(last ?? null);
  if (!last) return null;
  return (
    <section className="last-day-block" aria-label={i18n.t("Last day")}>
      <div className="last-day">
        <AtEarFigure figures={last} />
        <span className="last-day-strip">
          <TableStripScale frame={frame && { ...frame, ...groundOf(last, frame) }} />
          <DayStrip figures={last} variant="list" />
        </span>
        <OutsideFigure figures={last} />
        <span className="two-lines last-day-words">
          <TextLink to={paths.result(worker.id, last.date)}>
            {i18n.t("{date}: how", { date: formatDate(last.date, locale) })}
          </TextLink>
          <DayProtector day={last} />
        </span>
      </div>
    </section>
  );
}

function DayProtector({ day }: { day: DayFigures }) {
  const { i18n } = useLingui();
  const decidedBy = useDecidedBy(day);
  if (day.hasProtector === "no") return <span>{i18n.t("No protector")}</span>;
  return <ProtectorWord word={day.word} isOpen={isBoundReason(day.reason)} beneath={decidedBy} />;
}

function Protectors({
  worker,
  today,
  canGive,
}: {
  worker: WorkerView;
  today: string;
  canGive: boolean;
}) {
  const { i18n } = useLingui();
  const { hash } = useLocation();
  const [search, setSearch] = useSearchParams();
  const asked = search.get("assign");
  useEffect(() => {
    if (hash === "#protectors" || hash === "#findings")
      document.getElementById(hash.slice(1))?.scrollIntoView();
  }, [hash]);
  const [innerModelId, outerModelId] = (asked ?? "").split(",").filter(Boolean);
  // Assigned or left, the form goes away with the focus on it: the keyboard goes on at what opened it.
  const place = useRef<HTMLDivElement>(null);
  const isOpen = asked !== null;
  const wasOpen = useRef(isOpen);
  useEffect(() => {
    if (wasOpen.current && !isOpen)
      place.current?.querySelector<HTMLElement>(".after-table .button")?.focus();
    wasOpen.current = isOpen;
  }, [isOpen]);
  const close = () =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        next.delete("assign");
        next.delete("use");
        return next;
      },
      { replace: true },
    );
  const open = (use?: string) =>
    setSearch({ assign: "", ...(use ? { use } : {}) }, { replace: true });
  return (
    <Section title={i18n.t("Protectors by use")} id="protectors">
      <div ref={place}>
        <AssignmentsTable
          rows={worker.assignments}
          today={today}
          canAssign={canGive}
          onChange={(assignment) => open(assignedUse(assignment))}
        />
        {canGive &&
          (asked === null ? (
            <p className="after-table">
              <Button onClick={() => open()}>{i18n.t("Assign a protector")}</Button>{" "}
              {worker.assignments.length > 0 && <SlipsLink workerIds={[worker.id]} />}
            </p>
          ) : (
            <div className="inset-form">
              <AssignForm
                key={`${asked} ${search.get("use")}`}
                workerId={worker.id}
                siteId={worker.siteId}
                today={today}
                start={{ use: search.get("use") ?? undefined, innerModelId, outerModelId }}
                onDone={close}
                onCancel={close}
              />
            </div>
          ))}
      </div>
    </Section>
  );
}

/** Fits, and what was handed out; refusals only to those who may read why. */
function Fits({
  worker,
  today,
  isOfficer,
  canGive,
}: {
  worker: WorkerView;
  today: string;
  isOfficer: boolean;
  canGive: boolean;
}) {
  const { i18n } = useLingui();
  const tests = useInfiniteQuery(fitQueries.tests({ workerId: worker.id }));
  const issues = useInfiniteQuery(fitQueries.issues({ workerId: worker.id }));
  return (
    <Section title={i18n.t("Fits and issues")} id="fits">
      <FitTestsTable
        hidesWorker
        rows={tests.data?.pages.flatMap((page) => page.rows) ?? []}
        state={tests.isError ? "failed" : tests.data ? "ready" : "loading"}
        error={tests.error}
        onRetry={() => void tests.refetch()}
        more={{
          hasMore: tests.hasNextPage,
          isLoading: tests.isFetchingNextPage,
          onMore: () => void tests.fetchNextPage(),
        }}
        empty={<Empty title={i18n.t("No fit of this worker is on record.")} />}
      />
      {canGive && (
        <p className="after-table">
          <ButtonLink to={paths.fittingOf(worker.id)}>{i18n.t("Fit and issue")}</ButtonLink>{" "}
          <ButtonLink to={paths.microphoneCheck(worker.id)}>
            {i18n.t("Two-microphone check")}
          </ButtonLink>{" "}
          <ButtonLink to={paths.tryChangesFor("worker", worker.id)}>
            {i18n.t("Try changes")}
          </ButtonLink>
        </p>
      )}
      <h3 className="part-head">{i18n.t("Handed out")}</h3>
      <IssuesTable
        hidesWorker
        today={today}
        rows={issues.data?.pages.flatMap((page) => page.rows) ?? []}
        state={issues.isError ? "failed" : issues.data ? "ready" : "loading"}
        error={issues.error}
        onRetry={() => void issues.refetch()}
        more={{
          hasMore: issues.hasNextPage,
          isLoading: issues.isFetchingNextPage,
          onMore: () => void issues.fetchNextPage(),
        }}
        empty={<Empty title={i18n.t("Nothing was handed out yet.")} />}
      />
      {isOfficer && (
        <>
          <h3 className="part-head">{i18n.t("Refusals and non-wear")}</h3>
          <Refusals workerId={worker.id} today={today} />
        </>
      )}
    </Section>
  );
}

function Training({ worker, today }: { worker: WorkerView; today: string }) {
  const { i18n } = useLingui();
  return (
    <Section title={i18n.t("Training")} id="training">
      <WorkerTrainings workerId={worker.id} today={today} />
    </Section>
  );
}

function OpenFindings({ worker, today }: { worker: WorkerView; today: string }) {
  const { i18n } = useLingui();
  const list = useInfiniteQuery(findingQueries.list({ state: "open", workerId: worker.id }));
  return (
    <Section title={i18n.t("Open findings")} id="findings">
      <FindingsTable
        hidesWorker
        todayAt={() => today}
        rows={list.data?.pages.flatMap((page) => page.rows) ?? []}
        state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
        error={list.error}
        onRetry={() => void list.refetch()}
        more={{
          hasMore: list.hasNextPage,
          isLoading: list.isFetchingNextPage,
          onMore: () => void list.fetchNextPage(),
        }}
        empty={<Empty title={i18n.t("Nothing is open about this worker.")} />}
      />
    </Section>
  );
}

function History({ worker }: { worker: WorkerView }) {
  const { i18n } = useLingui();
  const locale = useLocale();
  const [search, setSearch] = useSearchParams();
  const history = useHistory(worker.id);
  const { days } = history;
  const frame = useTableFrame(days);
  const isTable = search.get("history") === "table";
  const show = (as: "table" | "chart") =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (as === "table") next.set("history", "table");
        else next.delete("history");
        return next;
      },
      { replace: true, preventScrollReset: true },
    );
  const columns: DataColumn<Day>[] = [
    {
      id: "wrong",
      head: i18n.t("Day"),
      isRowHead: true,
      cell: (day) => (
        <span className="two-lines">
          <TextLink to={paths.result(worker.id, day.date)}>
            {formatShortDate(day.date, locale)}
          </TextLink>
          <span className="beneath">
            {day.origin === "imported" ? i18n.t("imported") : formatDuration(day.shiftMin, locale)}
            {day.isStale && i18n.t(", being worked out anew")}
          </span>
        </span>
      ),
    },
    {
      id: "at-ear",
      head: i18n.t("At the ear"),
      unit: i18n.t("day, dB"),
      cell: (day) => <AtEarFigure figures={day} />,
    },
    {
      id: "strip",
      kind: "strip",
      head: <TableStripScale frame={frame} />,
      widthPx: 216,
      filler: <TableStripGround frame={frame} />,
      cell: (day) => <DayStrip figures={day} isHidden />,
    },
    {
      id: "outside",
      head: i18n.t("Without protection"),
      unit: i18n.t("day, dB"),
      cell: (day) => <OutsideFigure figures={day} />,
    },
    {
      id: "todo",
      head: i18n.t("Protector, while worn"),
      cell: (day) => <DayProtector day={day} />,
    },
  ];
  const chartDays = days.toReversed();
  const limit = frame?.limits[0];
  return (
    <Section title={i18n.t("History at the ear")} id="history">
      {!isTable && days.length > 0 && (
        <HistoryChart
          title={i18n.t("At the ear, day by day, {name}", { name: worker.name })}
          days={chartDays.map(({ date, atEarDb }) => ({ date, levelDb: atEarDb }))}
          limitDb={limit?.levelDb ?? null}
          tableLink={<TextButton onClick={() => show("table")}>{i18n.t("As a table")}</TextButton>}
        />
      )}
      {!isTable && history.hasNextPage && (
        <p className="after-table">
          <Button isBusy={history.isFetchingNextPage} onClick={() => void history.fetchNextPage()}>
            {i18n.t("Further back")}
          </Button>
        </p>
      )}
      {(isTable || days.length === 0) && (
        <>
          {days.length > 0 && (
            <p className="table-foot">
              <TextButton onClick={() => show("chart")}>{i18n.t("As a picture")}</TextButton>
            </p>
          )}
          <div className="stacked-table">
            <DataTable
              caption={i18n.t("Days, latest first")}
              columns={columns}
              rows={days}
              rowKey={({ resultId }) => resultId}
              isTwoLine
              state={history.isSuccess ? "ready" : history.isError ? "failed" : "loading"}
              error={history.error}
              onRetry={() => void history.refetch()}
              more={{
                hasMore: history.hasNextPage,
                isLoading: history.isFetchingNextPage,
                onMore: () => void history.fetchNextPage(),
              }}
              empty={<Empty title={i18n.t("No day of this worker is on record yet.")} />}
            />
          </div>
        </>
      )}
    </Section>
  );
}
