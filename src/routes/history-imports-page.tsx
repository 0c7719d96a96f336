import { useLingui } from "@lingui/react";
import { useInfiniteQuery, useQuery } from "@tanstack/react-query";
import { useState } from "react";
import { useForm } from "react-hook-form";
import { useNavigate, useSearchParams } from "react-router-dom";
import { formatInstant } from "../../shared/format/date";
import { formatNumber } from "../../shared/format/number";
import { HISTORY_LIMIT_BYTES } from "../../shared/schemas/history";
import { Button } from "../components/button";
import { ComboboxField } from "../components/combobox-field";
import { DataTable } from "../components/data-table";
import { Field, Form, SelectField, showIssuesOn } from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { Status } from "../components/status";
import { importStateText } from "../features/histories/import-words";
import { historyImportQueries, useStartImport } from "../features/histories/imports";
import { instrumentQueries } from "../features/instruments/queries";
import { hasRole, useUser } from "../features/session/session";
import { ApiError } from "../lib/api";
import { useLocale } from "../lib/i18n";
import { searchWorkers } from "../lib/references";
import { paths } from "../paths";
import "../styles/histories.css";
import { MeasuringWays } from "./measuring-frame";

const MEGABYTE = 1024 * 1024;

interface NewImportValues {
  instrumentId: string;
  workerId: string | null;
}

/** Where a file is that somebody sent in before, and whether anything of it is stored. */
function whereIs(error: unknown): { to: string; isStored: boolean } | null {
  if (!(error instanceof ApiError) || error.code !== "same-file") return null;
  const { historyId, importId } = error.body as {
    historyId?: string | null;
    importId?: string | null;
  };
  if (historyId) return { to: paths.history(historyId), isStored: true };
  return importId ? { to: paths.historyImport(importId), isStored: false } : null;
}

/** A file of levels is sent in here; what came in before stands beneath. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const isOfficer = hasRole(user, "officer");
  const list = useInfiniteQuery(historyImportQueries.list());
  const rows = list.data?.pages.flatMap((page) => page.rows) ?? [];
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("What a file may be")}>
            <p>
              {i18n.t(
                "Text with a delimiter, or a workbook, with one line per value: a time, and one or more levels.",
              )}
            </p>
            <p>{i18n.t("One value every 1/8 s to 60 s; up to 24 hours, one instrument.")}</p>
            <p>
              {i18n.t("Up to {size} MB.", {
                size: formatNumber(HISTORY_LIMIT_BYTES / MEGABYTE, 0, locale),
              })}
            </p>
          </MarginNote>
        }
      >
        <PageHead
          way={<MeasuringWays />}
          title={i18n.t("Import a time history")}
          lead={i18n.t(
            "The file is read first and says what it holds. Then all of it is stored, or nothing.",
          )}
        />
        {isOfficer && <NewImportForm />}
        <Section id="sent-in" title={i18n.t("Sent in before")}>
          <DataTable
            caption={i18n.t("Sent in before")}
            rows={rows}
            rowKey={({ id }) => id}
            state={list.isPending ? "loading" : list.isError ? "failed" : "ready"}
            error={list.error}
            onRetry={() => void list.refetch()}
            empty={i18n.t("No file has come in yet.")}
            stacksOnPhone
            more={{
              hasMore: list.hasNextPage,
              isLoading: list.isFetchingNextPage,
              onMore: () => void list.fetchNextPage(),
            }}
            columns={[
              {
                id: "file",
                head: i18n.t("File"),
                isRowHead: true,
                cell: ({ id, fileName }) => (
                  <TextLink to={paths.historyImport(id)}>{fileName}</TextLink>
                ),
              },
              { id: "worker", head: i18n.t("Worn by"), cell: ({ workerName }) => workerName ?? "" },
              {
                id: "instrument",
                head: i18n.t("Instrument"),
                cell: ({ instrumentName, serialNumber }) => `${instrumentName}, ${serialNumber}`,
              },
              {
                id: "when",
                head: i18n.t("Sent in"),
                cell: ({ createdAt, timeZone }) => formatInstant(createdAt, timeZone, locale),
              },
              {
                id: "state",
                head: i18n.t("State"),
                cell: ({ state }) => importStateText(i18n, state),
              },
            ]}
          />
        </Section>
      </PageBody>
      <Folio>
        {i18n.t(
          "The same file is imported once. A cancelled import leaves nothing but its line here.",
        )}
      </Folio>
    </>
  );
}

function NewImportForm() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const navigate = useNavigate();
  const [search] = useSearchParams();
  // From a run's own page: the history belongs to that run, and its instrument and worker are known.
  const runId = search.get("run");
  const form = useForm<NewImportValues>({
    defaultValues: { instrumentId: search.get("instrument") ?? "", workerId: null },
  });
  const instruments = useQuery(instrumentQueries.list());
  const [file, setFile] = useState<File | null>(null);
  const [fileError, setFileError] = useState<string | null>(null);
  const { start, progressPct, cancel } = useStartImport();
  const usable = (instruments.data?.rows ?? []).filter(
    ({ isArchived, kind }) => !isArchived && kind !== "calibrator",
  );
  const submit = form.handleSubmit(({ instrumentId, workerId }) => {
    let isWrong = false;
    const refuse = (name: keyof NewImportValues) => {
      isWrong = true;
      form.setError(name, { message: i18n.t("This is needed.") }, { shouldFocus: true });
    };
    if (instrumentId === "") refuse("instrumentId");
    if (workerId === null && runId === null) refuse("workerId");
    const tooLarge = file !== null && file.size > HISTORY_LIMIT_BYTES;
    setFileError(
      !file
        ? i18n.t("Choose a file first.")
        : tooLarge
          ? i18n.t("This file has {size} MB; at most {limit} MB are taken.", {
              size: formatNumber(file.size / MEGABYTE, 0, locale),
              limit: formatNumber(HISTORY_LIMIT_BYTES / MEGABYTE, 0, locale),
            })
          : null,
    );
    if (!file || tooLarge || isWrong) return;
    start.mutate(
      { file, instrumentId, workerId, runId },
      {
        onSuccess: ({ id }) => navigate(paths.historyImport(id)),
        onError: (error) => {
          const ofFile =
            error instanceof ApiError
              ? error.issues.find(({ path }) => path === "file")
              : undefined;
          if (ofFile)
            setFileError(
              ofFile.code === "file-without-values"
                ? i18n.t("There is no line with values in this file.")
                : i18n.t(
                    "This file can’t be read as a history. Send text, or a workbook without macros.",
                  ),
            );
          else showIssuesOn(form, i18n)(error);
        },
      },
    );
  });
  const link = whereIs(start.error);
  const isAborted = start.error instanceof DOMException && start.error.name === "AbortError";
  const isOfFile = start.error instanceof ApiError && start.error.issues.length > 0;
  return (
    <Form aria-label={i18n.t("File to import")} onSubmit={submit}>
      <SelectField
        form={form}
        name="instrumentId"
        label={i18n.t("Instrument")}
        emptyLabel={i18n.t("Choose one")}
        choices={usable.map(({ id, name, serialNumber }) => ({
          value: id,
          label: `${name}, ${serialNumber}`,
        }))}
      />
      {runId === null && (
        <ComboboxField
          form={form}
          name="workerId"
          label={i18n.t("Worn by")}
          search={searchWorkers}
        />
      )}
      <Field label={i18n.t("File")} error={fileError ?? undefined}>
        {(wires) => (
          <input
            {...wires}
            className="file-input"
            type="file"
            accept=".csv,.txt,.tsv,.dat,.asc,.xlsx,text/plain,text/csv"
            onChange={(event) => {
              setFile(event.target.files?.[0] ?? null);
              setFileError(null);
              start.reset();
            }}
          />
        )}
      </Field>
      {link ? (
        <p className="field-error" role="alert">
          {link.isStored
            ? i18n.t("This file has been sent in already.")
            : i18n.t(
                "This file was sent in before, and nothing of it is stored yet. Go on with it there, or cancel that import and send the file again.",
              )}{" "}
          <TextLink to={link.to}>
            {link.isStored ? i18n.t("Look at it") : i18n.t("Go to that import")}
          </TextLink>
        </p>
      ) : (
        !isAborted && !isOfFile && <FormProblem error={start.error} />
      )}
      <div className="form-actions">
        <Button type="submit" kind="primary" isBusy={start.isPending}>
          {i18n.t("Send the file in")}
        </Button>
        {start.isPending && <Button onClick={cancel}>{i18n.t("Cancel")}</Button>}
      </div>
      {start.isPending && (
        <div className="import-progress">
          <progress max={100} value={progressPct} aria-label={i18n.t("Sent")} />
          <Status>
            {i18n.t("{share} % sent", { share: formatNumber(progressPct, 0, locale) })}
          </Status>
        </div>
      )}
    </Form>
  );
}
