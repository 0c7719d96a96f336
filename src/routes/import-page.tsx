import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useEffect, useId, useRef, useState } from "react";
import { formatNumber } from "../../shared/format/number";
import {
  IMPORT_KINDS,
  IMPORT_LIMIT_BYTES,
  IMPORT_LINES_LIMIT,
  type ImportKind,
  type ImportReport,
} from "../../shared/schemas/import";
import { Button } from "../components/button";
import { RecomputeProgress } from "../components/change-preview";
import { Field } from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import { ImportReportView } from "../features/imports/import-report";
import { countsText, importKindNote, importKindWord } from "../features/imports/import-words";
import { FileChanged, reportOf, useDryRun, useImport } from "../features/imports/queries";
import { OutgoingNotice } from "../features/notices/outgoing-notice";
import { useUser } from "../features/session/session";
import { useLocale } from "../lib/i18n";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";

const MEGABYTE = 1024 * 1024;

/** Where what was imported is found. */
const resultPath: Record<ImportKind, string> = {
  shifts: paths.days,
  readings: paths.runs,
  "past-results": paths.workers,
};

/** Shifts, readings and past years' levels from a file: looked at first, then all of it or nothing. */
export function Component() {
  const { i18n } = useLingui();
  const locale = useLocale();
  const user = useUser();
  const client = useQueryClient();
  const choice = useSiteChoice();
  const ids = useId();
  const [kind, setKind] = useState<ImportKind>("shifts");
  const [siteId, setSiteId] = useState(choice.site?.id ?? choice.sites[0]?.id ?? "");
  const [file, setFile] = useState<File | null>(null);
  const [reason, setReason] = useState("");
  const [fileError, setFileError] = useState<string | null>(null);
  const [report, setReport] = useState<ImportReport | null>(null);
  const [done, setDone] = useState<ImportReport | null>(null);
  const outcome = useRef<HTMLDivElement>(null);
  const dryRun = useDryRun();
  const importing = useImport((stored) => {
    setDone(stored);
    setReport(null);
    setFile(null);
    setReason("");
    void client.invalidateQueries();
  });

  useEffect(() => {
    if (report ?? done) outcome.current?.focus();
  }, [report, done]);

  /** Anything else than what was looked at has to be looked at again. */
  function change(put: () => void) {
    put();
    setReport(null);
    dryRun.reset();
    importing.reset();
  }

  function look() {
    setDone(null);
    if (!file) {
      setFileError(i18n.t("Choose a file first."));
      return;
    }
    if (file.size > IMPORT_LIMIT_BYTES) {
      setFileError(
        i18n.t(
          "This file has {size} MB; at most {limit} MB are taken. Part it, by month for example, and import the parts one after the other.",
          {
            size: formatNumber(file.size / MEGABYTE, 0, locale),
            limit: formatNumber(IMPORT_LIMIT_BYTES / MEGABYTE, 0, locale),
          },
        ),
      );
      return;
    }
    setFileError(null);
    dryRun.mutate({ kind, siteId, file, reason }, { onSuccess: setReport });
  }

  function store() {
    if (!file) return;
    importing.mutate(
      { kind, siteId, file, reason },
      {
        onError: (error) => {
          const found = reportOf(error);
          if (found) setReport(found);
        },
      },
    );
  }

  const mayImport =
    report !== null && report.issuesCount === 0 && report.fresh + report.changed > 0;
  const failure = importing.error ?? dryRun.error;
  const timeZone = choice.sites.find(({ id }) => id === siteId)?.timeZone ?? "UTC";
  const notices = done?.notices;
  return (
    <>
      <PageBody
        margin={
          <>
            {notices && notices.people > 0 && (
              <OutgoingNotice entry={notices} timeZone={timeZone} ownName={user.name} />
            )}
            <MarginNote title={i18n.t("How a file may be written")} isRuled={!notices?.people}>
              <p>
                {i18n.t(
                  "CSV in UTF-8 or UTF-16, with comma, semicolon or tab, its first line the names of the columns.",
                )}
              </p>
              <p>
                {i18n.t(
                  "Dates as 2026-03-02, times as 06:00, by the site’s clock. Names of tasks and crews letter by letter.",
                )}
              </p>
              <p>
                {i18n.t("Up to {size} MB and {lines} lines.", {
                  size: formatNumber(IMPORT_LIMIT_BYTES / MEGABYTE, 0, locale),
                  lines: formatNumber(IMPORT_LINES_LIMIT, 0, locale),
                })}
              </p>
            </MarginNote>
            <MarginNote title={i18n.t("Files to fill in")}>
              {IMPORT_KINDS.map((found) => (
                <p key={found}>
                  <a className="link" href={`/api/imports/${found}/template.csv`} download>
                    {importKindWord(i18n, found)}
                  </a>
                </p>
              ))}
            </MarginNote>
          </>
        }
      >
        <PageHead
          way={<TextLink to={paths.days}>{i18n.t("Days")}</TextLink>}
          title={i18n.t("Import")}
          lead={i18n.t(
            "The file is looked at line by line first. Then all of it is stored, or nothing.",
          )}
        />
        <form
          className="form"
          noValidate
          aria-label={i18n.t("File to import")}
          onSubmit={(event) => {
            event.preventDefault();
            look();
          }}
        >
          <Field label={i18n.t("What it holds")} isGroup error={undefined}>
            {() =>
              IMPORT_KINDS.map((found) => (
                <label key={found} className="choice">
                  <input
                    type="radio"
                    name="kind"
                    checked={kind === found}
                    onChange={() => change(() => setKind(found))}
                  />
                  <span>
                    {importKindWord(i18n, found)}
                    <span className="beneath block">{importKindNote(i18n, found)}</span>
                  </span>
                </label>
              ))
            }
          </Field>
          {choice.sites.length > 1 && (
            <Field label={i18n.t("Site")} error={undefined}>
              {({ readOnly: _, ...wires }) => (
                <select
                  className="input"
                  {...wires}
                  value={siteId}
                  onChange={(event) => change(() => setSiteId(event.target.value))}
                >
                  {choice.sites.map(({ id, name }) => (
                    <option key={id} value={id}>
                      {name}
                    </option>
                  ))}
                </select>
              )}
            </Field>
          )}
          <Field
            label={i18n.t("File")}
            error={
              fileError ??
              (failure instanceof FileChanged
                ? i18n.t(
                    "The file was saved again or moved since you chose it. Choose it once more.",
                  )
                : undefined)
            }
          >
            {(wires) => (
              <input
                {...wires}
                className="file-input"
                type="file"
                accept=".csv,.txt,.tsv,text/csv"
                key={done ? `done-${done.entryId}` : "open"}
                onChange={(event) =>
                  change(() => {
                    setFile(event.target.files?.[0] ?? null);
                    setFileError(null);
                  })
                }
              />
            )}
          </Field>
          <Field
            label={i18n.t("Reason")}
            isOptional
            note={i18n.t("Needed where the file changes what is recorded already.")}
            error={undefined}
          >
            {(wires) => (
              <textarea
                {...wires}
                className="input"
                rows={2}
                value={reason}
                onChange={(event) => change(() => setReason(event.target.value))}
              />
            )}
          </Field>
          {!(failure instanceof FileChanged) && !reportOf(failure) && (
            <FormProblem error={failure} />
          )}
          <div className="form-actions">
            <Button type="submit" kind={mayImport ? "plain" : "primary"} isBusy={dryRun.isPending}>
              {i18n.t("Look at the file")}
            </Button>
          </div>
        </form>
        <div ref={outcome} tabIndex={-1} className="import-outcome" aria-live="polite">
          {report && (
            <Section
              title={
                mayImport
                  ? i18n.t("Nothing stands in the way")
                  : report.issuesCount > 0
                    ? i18n.t(
                        "{count, plural, one {# thing stands} other {# things stand}} in the way; nothing is stored",
                        { count: report.issuesCount },
                      )
                    : i18n.t("All of it is recorded already")
              }
              id={`${ids}-report`}
            >
              <ImportReportView report={report} />
              {mayImport && (
                <div className="review-actions">
                  <Button kind="primary" isBusy={importing.isPending} onClick={store}>
                    {i18n.t("Import all of it")}
                  </Button>
                </div>
              )}
            </Section>
          )}
          {done && (
            <Section
              title={i18n.t("{file} is imported", { file: done.fileName })}
              id={`${ids}-done`}
            >
              <p className="review-lead">
                {countsText(i18n, done)}.{" "}
                {done.queuedDays > 0
                  ? i18n.t(
                      "{count, plural, one {# day is} other {# days are}} computed now, one after the other.",
                      { count: done.queuedDays },
                    )
                  : i18n.t(
                      "{count, plural, =0 {No day was computed.} one {# day is computed.} other {# days are computed.}}",
                      { count: done.computedDays },
                    )}{" "}
                <TextLink to={resultPath[done.kind]}>{i18n.t("Look at them")}</TextLink>
              </p>
              {done.queuedDays > 0 && <RecomputeProgress />}
            </Section>
          )}
        </div>
      </PageBody>
      <Folio>
        {i18n.t(
          "The same checks hold as for a day that is typed. The same file again changes nothing.",
        )}
      </Folio>
    </>
  );
}
