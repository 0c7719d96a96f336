import { useLingui } from "@lingui/react";
import { useQueryClient } from "@tanstack/react-query";
import { useEffect, useId, useRef, useState } from "react";
import { issueText } from "../../shared/problems/issue-text";
import { IMPORT_LIMIT_BYTES } from "../../shared/schemas/import";
import type { RosterReport } from "../../shared/schemas/roster";
import { Button } from "../components/button";
import { DateInput } from "../components/date-input";
import { Field } from "../components/form";
import { FormProblem } from "../components/form-problem";
import { TextLink } from "../components/link";
import { Folio, MarginNote, PageBody, PageHead, Section } from "../components/page";
import {
  FileChanged,
  rosterReportOf,
  useRosterDryRun,
  useRosterImport,
} from "../features/imports/queries";
import { RosterReportView, rosterCounts } from "../features/imports/roster-report";
import { ApiError } from "../lib/api";
import { paths } from "../paths";
import { useSiteChoice } from "./site-choice";

/** Joiners, movers and leavers from a file: looked at first, then all of it or nothing. */
export function Component() {
  const { i18n } = useLingui();
  const client = useQueryClient();
  const choice = useSiteChoice();
  const ids = useId();
  const [siteId, setSiteId] = useState(choice.site?.id ?? choice.sites[0]?.id ?? "");
  const [file, setFile] = useState<File | null>(null);
  const [isWhole, setIsWhole] = useState(false);
  const [missingLeftOn, setMissingLeftOn] = useState(() => choice.todayAt(siteId));
  const [isConfirmed, setIsConfirmed] = useState(false);
  const [fault, setFault] = useState<"file" | "size" | null>(null);
  const [report, setReport] = useState<RosterReport | null>(null);
  const [done, setDone] = useState<RosterReport | null>(null);
  const outcome = useRef<HTMLDivElement>(null);
  const dryRun = useRosterDryRun();
  const importing = useRosterImport((stored) => {
    setDone(stored);
    setReport(null);
    setFile(null);
    void client.invalidateQueries();
  });

  useEffect(() => {
    if (report ?? done) outcome.current?.focus();
  }, [report, done]);

  /** Anything else than what was looked at has to be looked at again. */
  function change(put: () => void) {
    put();
    setReport(null);
    setIsConfirmed(false);
    setFault(null);
    dryRun.reset();
    importing.reset();
  }

  const order = (of: File) => ({
    siteId,
    file: of,
    missingLeftOn: isWhole ? missingLeftOn : null,
    confirmedLeavers: isConfirmed ? (report?.leavers ?? null) : null,
  });

  function look() {
    setDone(null);
    setIsConfirmed(false);
    const found = file === null ? "file" : file.size > IMPORT_LIMIT_BYTES ? "size" : null;
    setFault(found);
    if (file && found === null)
      dryRun.mutate({ ...order(file), confirmedLeavers: null }, { onSuccess: setReport });
  }

  function store() {
    if (!file) return;
    importing.mutate(order(file), {
      onError: (error) => {
        const found = rosterReportOf(error);
        if (found) {
          setReport(found);
          setIsConfirmed(false);
        }
      },
    });
  }

  const changes = report ? report.joiners + report.changed + report.leavers : 0;
  const mayImport = report !== null && report.issuesCount === 0 && changes > 0;
  const asks = report?.asks ?? [];
  const failure = importing.error ?? dryRun.error;
  const lateDay =
    failure instanceof ApiError && failure.issues.find(({ path }) => path === "missingLeftOn");
  return (
    <>
      <PageBody
        margin={
          <MarginNote title={i18n.t("How the file may be written")}>
            <p>
              {i18n.t(
                "CSV in UTF-8 or UTF-16, one line per worker, known by the employee number. An empty cell leaves what is recorded.",
              )}
            </p>
            <p>
              {i18n.t(
                "A new worker needs the first day; another crew the day from which it holds; whoever leaves the last day.",
              )}
            </p>
            <p>
              <a className="link" href="/api/roster-imports/template.csv" download>
                {i18n.t("A file to fill in")}
              </a>
            </p>
          </MarginNote>
        }
      >
        <PageHead
          way={<TextLink to={paths.workers}>{i18n.t("Workers")}</TextLink>}
          title={i18n.t("Roster from a file")}
          lead={i18n.t(
            "Who joins, moves and leaves. The file is looked at first; then all of it is stored, or nothing.",
          )}
        />
        <form
          className="form"
          noValidate
          aria-label={i18n.t("Roster")}
          onSubmit={(event) => {
            event.preventDefault();
            look();
          }}
        >
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
              fault === "file"
                ? i18n.t("Choose a file first.")
                : fault === "size"
                  ? i18n.t("This file is too large for a roster.")
                  : failure instanceof FileChanged
                    ? i18n.t(
                        "The file was saved again or moved since you chose it. Choose it once more.",
                      )
                    : undefined
            }
          >
            {(wires) => (
              <input
                {...wires}
                className="file-input"
                type="file"
                accept=".csv,.txt,.tsv,text/csv"
                key={done ? "done" : "open"}
                onChange={(event) => change(() => setFile(event.target.files?.[0] ?? null))}
              />
            )}
          </Field>
          <Field label={i18n.t("Who is missing")} isGroup error={undefined}>
            {() => (
              <>
                <label className="choice">
                  <input
                    type="radio"
                    name="missing"
                    checked={!isWhole}
                    onChange={() => change(() => setIsWhole(false))}
                  />
                  <span>{i18n.t("stays as recorded: the file is a part of the roster")}</span>
                </label>
                <label className="choice">
                  <input
                    type="radio"
                    name="missing"
                    checked={isWhole}
                    onChange={() => change(() => setIsWhole(true))}
                  />
                  <span>{i18n.t("has left: the file is the whole roster of the site")}</span>
                </label>
              </>
            )}
          </Field>
          {isWhole && (
            <Field
              label={i18n.t("Their last day")}
              error={lateDay ? issueText(i18n, lateDay) : undefined}
            >
              {(wires) => (
                <DateInput
                  {...wires}
                  value={missingLeftOn}
                  onChoose={(date) => change(() => setMissingLeftOn(date))}
                />
              )}
            </Field>
          )}
          {!(failure instanceof FileChanged) && !lateDay && <FormProblem error={failure} />}
          <div className="form-actions">
            <Button type="submit" kind={mayImport ? "plain" : "primary"} isBusy={dryRun.isPending}>
              {i18n.t("Look at the file")}
            </Button>
          </div>
        </form>
        <div ref={outcome} tabIndex={-1} className="import-outcome" aria-live="polite">
          {report && (
            <Section
              id={`${ids}-report`}
              title={
                report.issuesCount > 0
                  ? i18n.t(
                      "{count, plural, one {# thing stands} other {# things stand}} in the way; nothing is stored",
                      { count: report.issuesCount },
                    )
                  : changes === 0
                    ? i18n.t("All of it is recorded already")
                    : asks.length > 0
                      ? i18n.t("To be confirmed")
                      : i18n.t("Nothing stands in the way")
              }
            >
              <RosterReportView report={report} />
              {mayImport && (
                <>
                  {asks.length > 0 && (
                    <label className="choice mt-3">
                      <input
                        type="checkbox"
                        checked={isConfirmed}
                        onChange={(event) => setIsConfirmed(event.target.checked)}
                      />
                      <span>
                        {i18n.t(
                          "Yes, {leavers, plural, one {# worker leaves} other {# workers leave}} of {present}.",
                          { leavers: report.leavers, present: report.present },
                        )}{" "}
                        {asks.includes("last-administrator-leaves") &&
                          i18n.t(
                            "Among them is the last administrator, whose sign-in stays until another is named.",
                          )}
                      </span>
                    </label>
                  )}
                  <div className="review-actions">
                    <Button
                      kind="primary"
                      isBusy={importing.isPending}
                      aria-disabled={(asks.length > 0 && !isConfirmed) || undefined}
                      onClick={() => (asks.length === 0 || isConfirmed) && store()}
                    >
                      {i18n.t("Store all of it")}
                    </Button>
                  </div>
                </>
              )}
            </Section>
          )}
          {done && (
            <Section id={`${ids}-done`} title={i18n.t("The roster is stored")}>
              <p className="review-lead">
                {rosterCounts(i18n, done)}.{" "}
                <TextLink to={paths.workers}>{i18n.t("Look at them")}</TextLink>
              </p>
            </Section>
          )}
        </div>
      </PageBody>
      <Folio>
        {i18n.t(
          "Whoever leaves keeps the record, and the sign-in to read it. Crew, loans, absences and protectors assigned end with the last day.",
        )}
      </Folio>
    </>
  );
}
