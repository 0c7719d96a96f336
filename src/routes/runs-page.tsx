import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useSearchParams } from "react-router-dom";
import { formatShortDate } from "../../shared/format/date";
import { formatDose } from "../../shared/format/dose";
import { formatDuration } from "../../shared/format/duration";
import { formatLevel } from "../../shared/format/level";
import type { RunView } from "../../shared/schemas/run";
import { doubtWord } from "../../shared/words/run-words";
import { ButtonLink } from "../components/button";
import { type DataColumn, DataTable } from "../components/data-table";
import { Empty } from "../components/empty";
import { FilterRow, FilterSelect } from "../components/filter-row";
import { TextLink } from "../components/link";
import { Folio, PageBody, PageHead } from "../components/page";
import { instrumentQueries } from "../features/instruments/queries";
import { runQueries } from "../features/runs/queries";
import { driftDb, isDriftTooLarge } from "../features/runs/run-fields";
import { hasRole, useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { MeasuringWays } from "./measuring-frame";
import "../styles/findings.css";
import "../styles/register.css";
import "../styles/runs.css";

export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const [search, setSearch] = useSearchParams();
  const instruments = useQuery(instrumentQueries.list());
  const instrumentId = instruments.data?.rows.find(({ id }) => id === search.get("instrument"))?.id;
  const siteId = user.sites.find(({ id }) => id === search.get("site"))?.id;
  const list = useInfiniteQuery(runQueries.list({ siteId, instrumentId }));
  const rows = list.data?.pages.flatMap((page) => page.rows) ?? [];
  const narrow = (name: string, value: string) =>
    setSearch(
      (before) => {
        const next = new URLSearchParams(before);
        if (value === "") next.delete(name);
        else next.set(name, value);
        return next;
      },
      { replace: true },
    );
  const columns: DataColumn<RunView>[] = [
    {
      id: "date",
      head: i18n.t("Day"),
      isRowHead: true,
      cell: (run) => (
        <span className="two-lines">
          <TextLink to={paths.run(run.id)}>{formatShortDate(run.date, locale)}</TextLink>
          <span className="beneath">
            {run.isVoid
              ? i18n.t("struck")
              : run.isOut
                ? i18n.t("out")
                : run.revision > 1
                  ? i18n.t("revision {number}", { number: run.revision })
                  : " "}
          </span>
        </span>
      ),
    },
    {
      id: "worker",
      head: i18n.t("Worn by, or taken at"),
      cell: (run) => {
        const { workerId, workerName, taskId, taskName, place, areaName } = run;
        const where = [taskId && (place ?? areaName), run.surveyName].filter(Boolean).join(", ");
        return (
          <span className="two-lines">
            {workerId ? (
              <TextLink className="is-quiet is-name" to={paths.worker(workerId)}>
                {workerName}
              </TextLink>
            ) : (
              <span>{taskName ?? areaName ?? place ?? "–"}</span>
            )}
            <span className="beneath">
              {[workerId && taskName, where].filter(Boolean).join(", ") || " "}
            </span>
          </span>
        );
      },
    },
    {
      id: "instrument",
      head: i18n.t("Instrument"),
      cell: (run) => (
        <span className="two-lines">
          <TextLink className="is-quiet" to={paths.instrument(run.instrumentId)}>
            {run.instrumentName}
          </TextLink>
          <span className="beneath">{run.serialNumber}</span>
        </span>
      ),
      hidesOnPhone: true,
    },
    {
      id: "time",
      head: i18n.t("Run time"),
      kind: "right",
      cell: ({ durationMin }) => formatDuration(durationMin, locale),
      hidesOnPhone: true,
    },
    {
      id: "readings",
      head: i18n.t("Readings"),
      cell: ({ readings }) => (
        <ul className="run-readings">
          {readings.map((reading) => (
            <li key={JSON.stringify(reading.settings)}>
              <span className="beneath">
                {i18n.t("{rate} dB, {threshold}", {
                  rate: reading.settings.exchangeRateDb,
                  threshold:
                    reading.settings.thresholdDb === null
                      ? i18n.t("no threshold")
                      : i18n.t("threshold {value}", { value: reading.settings.thresholdDb }),
                })}
              </span>{" "}
              <b className="mono">
                {reading.averageDb === null
                  ? formatDose(reading.dosePct, locale)
                  : formatLevel(reading.averageDb, locale)}
              </b>
            </li>
          ))}
        </ul>
      ),
    },
    {
      id: "check",
      head: i18n.t("Field checks"),
      cell: ({ checkBeforeDb, checkAfterDb, keptReason, doubts, isOut }) => {
        if (isOut) return <span className="beneath">{i18n.t("out")}</span>;
        const drift = driftDb(checkBeforeDb, checkAfterDb);
        return (
          <span className="two-lines">
            <span className={isDriftTooLarge(drift) ? "is-fault" : undefined}>
              {drift === null
                ? i18n.t("not both")
                : i18n.t("{drift} dB apart", { drift: formatLevel(drift, locale) })}
            </span>
            {doubts
              .filter((code) => code !== "field-check-drift")
              .map((code) => (
                <span key={code} className="is-fault">
                  {doubtWord(i18n, code)}
                </span>
              ))}
            {keptReason && (
              <span className="beneath">{i18n.t("kept: {reason}", { reason: keptReason })}</span>
            )}
          </span>
        );
      },
    },
  ];
  return (
    <>
      <PageBody>
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Runs")}
          lead={i18n.t(
            "What instruments said, from out to back, each reading under its own settings.",
          )}
          actions={
            hasRole(user, "officer") && (
              <ButtonLink kind="primary" to={paths.newRun}>
                {i18n.t("New run")}
              </ButtonLink>
            )
          }
        />
        <FilterRow label={i18n.t("Narrow the runs")}>
          {user.sites.length > 1 && (
            <FilterSelect
              label={i18n.t("Site")}
              value={siteId ?? ""}
              onChange={(value) => narrow("site", value)}
              choices={[
                { value: "", label: i18n.t("All sites") },
                ...user.sites.map(({ id, name }) => ({ value: id, label: name })),
              ]}
            />
          )}
          <FilterSelect
            label={i18n.t("Instrument")}
            value={instrumentId ?? ""}
            onChange={(value) => narrow("instrument", value)}
            choices={[
              { value: "", label: i18n.t("Any instrument") },
              ...(instruments.data?.rows ?? [])
                .filter(({ kind }) => kind !== "calibrator")
                .map(({ id, name, serialNumber }) => ({
                  value: id,
                  label: `${name}, ${serialNumber}`,
                })),
            ]}
          />
        </FilterRow>
        <DataTable
          caption={i18n.t("Runs, latest first")}
          columns={columns}
          rows={rows}
          rowKey={({ id }) => id}
          isTwoLine
          stacksOnPhone
          state={list.isSuccess ? "ready" : list.isError ? "failed" : "loading"}
          error={list.error}
          onRetry={() => void list.refetch()}
          more={{
            hasMore: list.hasNextPage,
            isLoading: list.isFetchingNextPage,
            onMore: () => void list.fetchNextPage(),
          }}
          empty={
            <Empty title={i18n.t("No run is on record yet.")}>
              {hasRole(user, "officer") && (
                <>
                  {i18n.t("A run typed into the day grid stands here too.")}{" "}
                  <TextLink to={paths.newRun}>{i18n.t("Record a run")}</TextLink>
                </>
              )}
            </Empty>
          }
        />
      </PageBody>
      <Folio>{i18n.t("A reading counts only for criteria with its settings.")}</Folio>
    </>
  );
}
