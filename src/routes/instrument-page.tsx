import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useParams } from "react-router-dom";
import { formatDate, formatInstant, formatShortDate, localDateOf } from "../../shared/format/date";
import { formatDuration } from "../../shared/format/duration";
import { formatLevelChange } from "../../shared/format/level";
import type { CalibrationHistory, CalibrationView } from "../../shared/schemas/outing";
import type { RunView } from "../../shared/schemas/run";
import { instrumentKindWord, settingsWords } from "../../shared/words/register-words";
import { doubtWord } from "../../shared/words/run-words";
import { Button, ButtonLink } from "../components/button";
import { DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { Failed } from "../components/failed";
import { TextLink } from "../components/link";
import { Folio, Leaders, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { instrumentQueries } from "../features/instruments/queries";
import { CalibrationForm } from "../features/outings/calibration-form";
import { outingQueries } from "../features/outings/queries";
import { runQueries } from "../features/runs/queries";
import { hasRole, useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import "../styles/findings.css";
import "../styles/register.css";
import "../styles/runs.css";
import "../styles/outings.css";

type InDoubt = CalibrationHistory["inDoubt"][number];

/** One instrument: what it is, what the laboratory said of it, its runs, and what hangs on a calibration that failed. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const { id = "" } = useParams();
  const [isRecording, setIsRecording] = useState(false);
  const list = useQuery(instrumentQueries.list());
  const isOffice = hasRole(user, "officer", "auditor");
  const history = useQuery({ ...outingQueries.calibrations(id), enabled: isOffice });
  const runs = useInfiniteQuery(runQueries.list({ instrumentId: id }));
  const instrument = list.data?.rows.find((row) => row.id === id);
  if (!instrument) {
    return (
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Instrument")}
          lead={list.isPending ? <span className="loading-line" /> : undefined}
        />
        {list.error && <Failed error={list.error} onRetry={() => void list.refetch()} />}
        {list.isSuccess && (
          <Empty title={i18n.t("It does not exist, or it is not yours to see.")}>
            <TextLink to={paths.instruments}>{i18n.t("Instruments")}</TextLink>
          </Empty>
        )}
      </PageBody>
    );
  }
  const { timeZone = "UTC", name: siteName = "" } =
    user.sites.find((site) => site.id === instrument.siteId) ?? {};
  const latest = history.data?.rows[0];
  const hasFailed = latest?.hasPassed === false;
  const inDoubt = history.data?.inDoubt ?? [];
  const results = inDoubt.reduce((sum, { resultsCount }) => sum + resultsCount, 0);
  const hangsOnIt = new Set(inDoubt.map(({ runId }) => runId));
  const wordsAgainst = (runId: string, doubts: RunView["doubts"]) => [
    ...doubts.map((code) => doubtWord(i18n, code)),
    ...(latest && hangsOnIt.has(runId) && !doubts.includes("calibration-failed")
      ? [
          i18n.t("failed its calibration on {date}", {
            date: formatShortDate(latest.doneOn, locale),
          }),
        ]
      : []),
  ];
  return (
    <>
      <PageBody
        marginWidthPx={260}
        margin={
          <>
            <MarginNote title={i18n.t("This instrument")} isRuled>
              <Leaders
                items={[
                  { key: "serial", label: i18n.t("Serial number"), value: instrument.serialNumber },
                  { key: "class", label: i18n.t("Class"), value: instrument.class },
                  {
                    key: "due",
                    label: i18n.t("Calibration due"),
                    value: instrument.calibrationDueOn
                      ? formatShortDate(instrument.calibrationDueOn, locale)
                      : i18n.t("not known"),
                  },
                ]}
              />
            </MarginNote>
            <MarginNote title={i18n.t("Settings presets")}>
              {instrument.presets.length === 0 ? (
                <p>{i18n.t("None: it is read as an LAeq meter.")}</p>
              ) : (
                <ul>
                  {instrument.presets.map((settings) => {
                    const words = settingsWords(i18n, settings, locale);
                    return <li key={words}>{words}</li>;
                  })}
                </ul>
              )}
            </MarginNote>
          </>
        }
      >
        <PageHead
          way={<MeasuringWays />}
          title={`${instrument.name}, ${instrument.serialNumber}`}
          lead={
            hasFailed ? (
              <b>
                {i18n.t("It failed its laboratory calibration on {date}.", {
                  date: formatShortDate(latest.doneOn, locale),
                })}
              </b>
            ) : (
              i18n.t("{kind}, class {class}, {site}.", {
                kind: instrumentKindWord(i18n, instrument.kind),
                class: instrument.class,
                site: siteName,
              })
            )
          }
          actions={
            instrument.can.change &&
            !isRecording && (
              <>
                <Button kind="primary" onClick={() => setIsRecording(true)}>
                  {i18n.t("Record a calibration")}
                </Button>
                <ButtonLink to={`${paths.instruments}?edit=${instrument.id}`}>
                  {i18n.t("Change")}
                </ButtonLink>
              </>
            )
          }
        />
        {isRecording && (
          <Section title={i18n.t("Record a calibration")} id="calibration">
            <CalibrationForm instrumentId={instrument.id} onDone={() => setIsRecording(false)} />
          </Section>
        )}
        {hasFailed && history.data && (
          <Section title={i18n.t("What hangs on it")} id="in-doubt">
            <p className="lead">
              {history.data.lastGoodCheckAt
                ? history.data.lastGoodCheck === "field-check"
                  ? i18n.t("Its field checks were last in order on {date}.", {
                      date: formatInstant(history.data.lastGoodCheckAt, timeZone, locale),
                    })
                  : i18n.t("It last passed a calibration on {date}.", {
                      date: formatDate(localDateOf(history.data.lastGoodCheckAt, timeZone), locale),
                    })
                : i18n.t("No check that was in order is on record.")}{" "}
              {i18n.t(
                "{count, plural, =0 {No run has} one {# run has} other {# runs have}} been taken since; {results, plural, =0 {no result rests} one {# result rests} other {# results rest}} on them.",
                { count: inDoubt.length, results },
              )}
            </p>
            <DataTable<InDoubt>
              caption={i18n.t("Runs since the last good check")}
              rows={inDoubt}
              rowKey={({ runId }) => runId}
              isTwoLine
              stacksOnPhone
              columns={[
                {
                  id: "date",
                  head: i18n.t("Day"),
                  isRowHead: true,
                  cell: ({ runId, date }) => (
                    <TextLink to={paths.run(runId)}>{formatShortDate(date, locale)}</TextLink>
                  ),
                },
                {
                  id: "of",
                  head: i18n.t("Worker or task"),
                  cell: ({ workerId, workerName, taskName }) =>
                    workerId ? (
                      <TextLink className="is-quiet is-name" to={paths.worker(workerId)}>
                        {workerName}
                      </TextLink>
                    ) : (
                      (taskName ?? "–")
                    ),
                },
                {
                  id: "results",
                  head: i18n.t("Results that rest on it"),
                  kind: "right",
                  cell: ({ resultsCount, workerId, date }) =>
                    workerId && resultsCount > 0 ? (
                      <TextLink to={paths.result(workerId, date)}>{resultsCount}</TextLink>
                    ) : (
                      resultsCount
                    ),
                },
                {
                  id: "kept",
                  head: i18n.t("Kept because"),
                  hidesOnPhone: true,
                  cell: ({ keptReason }) => keptReason ?? "–",
                },
              ]}
              empty={<Empty title={i18n.t("Nothing was measured with it since.")} />}
            />
          </Section>
        )}
        {isOffice && (
          <Section title={i18n.t("Calibrations")} id="calibrations">
            <DataTable<CalibrationView>
              caption={i18n.t("Calibrations, latest first")}
              state={history.isSuccess ? "ready" : history.isError ? "failed" : "loading"}
              error={history.error}
              onRetry={() => void history.refetch()}
              rows={history.data?.rows ?? []}
              rowKey={(row) => row.id}
              isTwoLine
              stacksOnPhone
              empty={<Empty title={i18n.t("No calibration is on record yet.")} />}
              columns={[
                {
                  id: "done",
                  head: i18n.t("Done"),
                  isRowHead: true,
                  cell: ({ doneOn, authorName }) => (
                    <span className="two-lines">
                      {formatShortDate(doneOn, locale)}
                      <span className="beneath">{authorName ?? " "}</span>
                    </span>
                  ),
                },
                {
                  id: "passed",
                  head: i18n.t("Outcome"),
                  cell: ({ hasPassed }) =>
                    hasPassed ? (
                      i18n.t("passed")
                    ) : (
                      <span className="is-fault">{i18n.t("failed")}</span>
                    ),
                },
                {
                  id: "error",
                  head: i18n.t("Error found"),
                  unit: "dB",
                  kind: "figure",
                  cell: ({ foundErrorDb }) => formatLevelChange(foundErrorDb, locale),
                },
                {
                  id: "due",
                  head: i18n.t("Good until"),
                  cell: ({ dueOn }) => (dueOn ? formatShortDate(dueOn, locale) : "–"),
                },
                {
                  id: "certificate",
                  head: i18n.t("Certificate"),
                  cell: ({ certificateFileId, doneOn }) =>
                    certificateFileId ? (
                      <a
                        className="link"
                        href={`/api/files/${certificateFileId}`}
                        download
                        aria-label={i18n.t("Certificate of {date}", {
                          date: formatShortDate(doneOn, locale),
                        })}
                      >
                        {i18n.t("Certificate")}
                      </a>
                    ) : (
                      "–"
                    ),
                },
                {
                  id: "note",
                  head: i18n.t("Note"),
                  hidesOnPhone: true,
                  cell: ({ note }) => note,
                },
              ]}
            />
          </Section>
        )}
        <Section title={i18n.t("Runs")} id="runs">
          <DataTable<RunView>
            caption={i18n.t("Runs, latest first")}
            state={runs.isSuccess ? "ready" : runs.isError ? "failed" : "loading"}
            error={runs.error}
            onRetry={() => void runs.refetch()}
            rows={runs.data?.pages.flatMap((page) => page.rows) ?? []}
            rowKey={(run) => run.id}
            isTwoLine
            stacksOnPhone
            more={{
              hasMore: runs.hasNextPage,
              isLoading: runs.isFetchingNextPage,
              onMore: () => void runs.fetchNextPage(),
            }}
            empty={<Empty title={i18n.t("Nothing was measured with it yet.")} />}
            columns={[
              {
                id: "date",
                head: i18n.t("Day"),
                isRowHead: true,
                cell: (run) => (
                  <span className="two-lines">
                    <TextLink to={paths.run(run.id)}>{formatShortDate(run.date, locale)}</TextLink>
                    <span className="beneath">
                      {run.isVoid ? i18n.t("struck") : run.isOut ? i18n.t("out") : " "}
                    </span>
                  </span>
                ),
              },
              {
                id: "of",
                head: i18n.t("Worker or task"),
                cell: ({ workerName, taskName, areaName, place }) => (
                  <span className="two-lines">
                    {workerName ?? taskName ?? areaName ?? "–"}
                    <span className="beneath">
                      {[workerName && taskName, place].filter(Boolean).join(", ") || " "}
                    </span>
                  </span>
                ),
              },
              {
                id: "time",
                head: i18n.t("Run time"),
                kind: "right",
                cell: ({ durationMin }) => formatDuration(durationMin, locale),
                hidesOnPhone: true,
              },
              {
                id: "doubts",
                head: i18n.t("What speaks against it"),
                cell: ({ id, doubts, keptReason }) =>
                  wordsAgainst(id, doubts).length === 0 ? (
                    "–"
                  ) : (
                    <span className="two-lines">
                      <span>{wordsAgainst(id, doubts).join(", ")}</span>
                      {keptReason && (
                        <span className="beneath">
                          {i18n.t("kept: {reason}", { reason: keptReason })}
                        </span>
                      )}
                    </span>
                  ),
              },
            ]}
          />
        </Section>
      </PageBody>
      <Folio>
        {i18n.t(
          "A calibration that failed puts in doubt what was measured since the last one that passed, or since the last field checks in order.",
        )}
      </Folio>
    </>
  );
}
